package fit_test

import (
	"encoding/json"
	"log/slog"
	"math"
	"os"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// reportCases are results of each kind, from deterministic readings: noise of ± 0.5 σ in
// alternation, so that nobody's random numbers enter a golden file.
func reportCases(t *testing.T) map[string]*fit.Result {
	t.Helper()
	out := map[string]*fit.Result{}
	add := func(name string, bands []*pyro.Band, a fit.Assume, signal, std []float64) {
		t.Helper()
		e, err := fit.New(bands, a)
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: signal, Std: std})
		if err != nil {
			t.Fatal(err)
		}
		out[name] = r
	}
	ripple := func(y []float64, rel float64) ([]float64, []float64) {
		std := scaled(y, rel)
		for i := range y {
			y[i] += 0.5 * std[i] * (1 - 2*float64(i%2))
		}
		return y, std
	}
	grey := truth{"grey", emissivity.Grey(), []float64{0.6}}
	linear := truth{"linear", emissivity.Polynomial(1), []float64{0.55, -0.3}}

	bands := lines(t, 0.7, 1.0, 6)
	y, u := ripple(grey.signals(bands, 0.85*µm, 1523), 0.01)
	add("good", bands, fit.Assume{Emissivity: emissivity.Grey()}, y, u)

	y, u = ripple(linear.signals(bands, 0.85*µm, 1523), 0.01)
	add("bad-chi2", bands, fit.Assume{Emissivity: emissivity.Grey()}, y, scaled(u, 0.1))

	white := truth{"grey", emissivity.Grey(), []float64{1.02}}
	y, u = ripple(white.signals(bands, 0.85*µm, 1523), 0.01)
	add("at-bound", bands, fit.Assume{Emissivity: emissivity.Grey()}, y, u)

	one := lines(t, 0.9, 0.9, 1)
	y, u = ripple(grey.signals(one, 0.9*µm, 1523), 0.01)
	add("undetermined", one, fit.Assume{Emissivity: emissivity.Grey().Relative()}, y, u)
	y, u = ripple(grey.signals(one, 0.9*µm, 1523), 0.01)
	add("bounded", one, fit.Assume{Emissivity: emissivity.Grey()}, y, u)

	eight := lines(t, 0.5, 1.0, 8)
	steep := truth{"linear", emissivity.Polynomial(1), []float64{0.4, 0.1}}
	y, u = ripple(steep.signals(eight, 0.75*µm, 1690), 0.01)
	add("two-basins", eight, fit.Assume{Emissivity: emissivity.Polynomial(1)}, y, u)

	y, u = ripple(grey.signals(bands, 0.85*µm, 1523), 0.01)
	add("shared", bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.6, 0.02),
		Shared: []fit.Shared{fit.SharedScale("calibration scale", 0.02, 6)}}, y, u)

	y, u = ripple(linear.signals(bands, 0.85*µm, 1523), 0.01)
	add("unknown", bands, fit.Assume{Emissivity: emissivity.Unknown()}, y, u)

	// A single band past hot walls through an old window: 0.9·(0.8 L(1300 K) + 0.2 L(1400 K)).
	one = lines(t, 1.6, 1.6, 1)
	y = []float64{0.9 * (0.8*planck(1.6, 1300) + 0.2*planck(1.6, 1400))}
	add("furnace", one, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.8, 0.05),
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "furnace wall", Unit: "K", Value: 1400, Std: 15, PerReading: true}),
		Path:         []sightline.Layer{sightline.Window(&pyro.Input{Name: "window transmittance", Value: 0.9, Std: 0.02})},
		Detectors:    []detector.Channel{{Gain: &pyro.Input{Name: "calibration gain", Value: 1, Std: 0.01}}},
		Range:        fit.Range{Min: 800, Max: 2000}}, y, scaled(y, 0.003))
	return out
}

// TestReports compares with testdata/report. The files were read by a person; nothing
// rewrites them.
func TestReports(t *testing.T) {
	for name, r := range reportCases(t) {
		js, err := json.MarshalIndent(r, "", " ")
		if err != nil {
			t.Fatal(err)
		}
		got := r.Report() + "\n" + string(js) + "\n"
		if dir := os.Getenv("CANDENT_SHOW"); dir != "" {
			if err := os.WriteFile(dir+"/"+name+".txt", []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile("../testdata/report/" + name + ".txt")
		if err != nil {
			t.Error(err)
			continue
		}
		if d := cmp.Diff(string(want), got); d != "" {
			t.Errorf("%s (-want +got):\n%s", name, d)
		}
		if strings.Contains(got, "NaN") || strings.Contains(got, "Inf") {
			t.Errorf("%s shows NaN or Inf:\n%s", name, got)
		}
	}
}

func TestLogValue(t *testing.T) {
	var b strings.Builder
	logger := slog.New(slog.NewTextHandler(&b, &slog.HandlerOptions{ReplaceAttr: func(_ []string, a slog.Attr) slog.Attr {
		if a.Key == slog.TimeKey {
			return slog.Attr{}
		}
		if a.Value.Kind() == slog.KindFloat64 {
			return slog.Float64(a.Key, math.Round(a.Value.Float64()))
		}
		return a
	}}))
	cases := reportCases(t)
	logger.Info("load", "reading", cases["good"])
	logger.Info("load", "reading", cases["bounded"])
	want := `level=INFO msg=load reading.state=determined reading.assumed="grey emissivity" reading.temperature_K=1525 reading.std_K=5 reading.low_K=1516 reading.high_K=1534
level=INFO msg=load reading.state=bounded reading.assumed="grey emissivity" reading.low_K=1450
`
	if d := cmp.Diff(want, b.String()); d != "" {
		t.Errorf("(-want +got):\n%s", d)
	}
}
