package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/examples/internal/golden"
	"candent/examples/internal/show"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
)

const loopTable = `label,current_mA
start,3.80
heat,9.62
heat,12.07
soak,14.31
soak,14.31
wire,0.00
card,22.00
between,3.70
hot,20.50
gap,
`

const furnaceTable = `label,temperature_C
a,1030
b,1100
c,400
`

// TestOutput compares what the program writes with files that were read by a person.
func TestOutput(t *testing.T) {
	plain := job{unit: "C", windowSetting: 1, background: -1, ratioSetting: 1, repeats: 5}
	with := func(f func(*job)) job {
		j := plain
		f(&j)
		return j
	}
	loop := with(func(j *job) {
		j.in, j.band, j.span, j.setting, j.emissivity, j.emissivityStd, j.repeats = "-", "900-1100", "600:1400", 1, 0.85, 0.02, 2
		j.windowSetting, j.window, j.windowStd, j.indicatorStd = 1, 0.93, 0.02, 1.5
	})
	furnace := with(func(j *job) { // walls hotter than the piece, which the indicator didn't know
		j.in, j.band, j.setting, j.emissivity, j.emissivityStd, j.background, j.backgroundStd = "-", "900-1100", 0.8, 0.8, 0.05, 1373.15, 10
	})
	for _, c := range []struct {
		name, golden string
		job          job
		stdin        string
		failed       int
	}{
		{"demo", "demo.txt", plain, "", 0},
		{"demo, JSON, exact", "exact.json", with(func(j *job) { j.emissivity, j.json = 0.82, true }), "", 0},
		{"two-colour demo", "ratio.txt", with(func(j *job) { j.short, j.long = "750", "900" }), "", 0},
		{"two-colour demo, JSON", "ratio.json", with(func(j *job) { j.short, j.long, j.json = "750", "900", true }), "", 0},
		{"current loop", "loop.txt", loop, loopTable, 4},
		{"current loop, JSON", "loop.json", func() job { j := loop; j.json = true; return j }(), loopTable, 4},
		{"hot walls", "furnace.txt", furnace, furnaceTable, 1},
	} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(c.stdin), &out, show.NewProgress(os.Stderr))
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.name, failed, err, c.failed)
		}
		golden.Check(t, c.name, c.golden, out.Bytes())
		for _, line := range strings.Split(strings.TrimSpace(out.String()), "\n") {
			if c.job.json && !json.Valid([]byte(line)) {
				t.Errorf("%s: not JSON: %s", c.name, line)
			}
		}
	}
}

// TestWorkedValues: what a monochromatic instrument shows with a wrong setting, in double
// precision to the digits given, taken back: T in K, true ε, surroundings, setting, shown.
func TestWorkedValues(t *testing.T) {
	for _, c := range []struct{ nm, T, ε, bg, set, shown float64 }{
		{900, 1273.15, 0.8, 0, 1, 1250.9199}, {3900, 1273.15, 0.8, 0, 1, 1186.3340}, {10000, 1273.15, 0.8, 0, 1, 1118.4053}, {900, 1273.15, 0.8, 0, 0.85, 1267.0326},
		{10000, 323.15, 0.5, 296.15, 0.5, 364.1571}, {900, 1173.15, 0.8, 1473.15, 0.8, 1330.4835}, {3900, 1173.15, 0.8, 1473.15, 0.8, 1334.6731},
	} {
		var out bytes.Buffer
		j := job{in: "-", unit: "K", json: true, band: fmt.Sprint(c.nm), setting: c.set, emissivity: c.ε, windowSetting: 1, background: c.bg, repeats: 5}
		if failed, err := run(j, strings.NewReader(fmt.Sprintf("label,temperature_K\nx,%.4f\n", c.shown)), &out, show.NewProgress(os.Stderr)); err != nil || failed > 0 {
			t.Errorf("%+v: %v, %s", c, err, out.String())
			continue
		}
		var got struct {
			T float64 `json:"temperature_K"`
		}
		if err := json.Unmarshal(out.Bytes(), &got); err != nil {
			t.Fatal(err)
		}
		// Half a digit of what was shown, amplified where the surroundings carry the signal.
		line, err := pyro.Line(pyro.Wavelength(c.nm) * pyro.Nanometre)
		if err != nil {
			t.Fatal(err)
		}
		allowed := 0.5e-4*c.set*line.RadianceSlope(pyro.Temperature(c.shown))/(c.ε*line.RadianceSlope(pyro.Temperature(c.T))) + 1e-6
		if math.Abs(got.T-c.T) > allowed {
			t.Errorf("%+v: %.5f K, want it within %.1g K", c, got.T, allowed)
		}
	}
}

// TestAgainstTheEstimator: temperature, uncertainty and interval of one band without
// surroundings, against fit with the emissivity as a prior: a profile interval. The two
// differ in second order of the smaller input only.
func TestAgainstTheEstimator(t *testing.T) {
	band, err := pyro.FlatTop(900*pyro.Nanometre, 1100*pyro.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	const step, ε, u = 1.0, 0.82, 0.03
	d := detector.Indicator{Band: band, Emissivity: 0.95, Window: 1, Low: 300, High: 3000}
	m := oneBand(d, scene{input{"emissivity", ε, u, 1e-3, 1}, input{"window", 1, 0, 0, 1}, input{"background", 0, 0, 0, 6000}}, 0)
	e, err := fit.New([]*pyro.Band{band}, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", ε, u)})
	if err != nil {
		t.Fatal(err)
	}
	for _, shown := range []pyro.Temperature{900, 1300, 1700} {
		got, err := m.estimate(shown, step, nil)
		if err != nil {
			t.Fatal(err)
		}
		s, err := d.Radiance(shown)
		if err != nil {
			t.Fatal(err)
		}
		want, err := e.Estimate(fit.Readings{Signal: []float64{s}, Std: []float64{step * show.Rectangular * d.Slope(shown)}})
		if err != nil {
			t.Fatal(err)
		}
		T, _ := want.Temperature()
		std, ok := want.Uncertainty()
		iv, ok2 := want.Interval()
		if !ok || !ok2 || math.Abs(float64(got.t-T)) > 1e-6 || math.Abs(got.std-std) > 1e-4*std {
			t.Errorf("%v: %v ± %.5f K, the estimator %v ± %.5f K", shown, got.t, got.std, T, std)
		}
		if math.Abs(float64(*got.lo-iv.Low)) > 2e-3*std || math.Abs(float64(*got.hi-iv.High)) > 2e-3*std {
			t.Errorf("%v: %v to %v, the estimator %v to %v", shown, *got.lo, *got.hi, iv.Low, iv.High)
		}
	}
}

// TestTwoColourAgainstThePair: the closed form of the ratio.
func TestTwoColourAgainstThePair(t *testing.T) {
	short, err := show.Band("short-nm", "700-800")
	if err != nil {
		t.Fatal(err)
	}
	long, err := show.Band("long-nm", "900-1000")
	if err != nil {
		t.Fatal(err)
	}
	p, err := show.WidestPair(short, long)
	if err != nil {
		t.Fatal(err)
	}
	d := detector.RatioIndicator{Pair: p, EmissivityRatio: 1.02, Low: 900, High: 2500}
	m := twoColour(d, input{"ratio", 0.97, 0.01, 0.1, 10}, 0)
	for _, shown := range []pyro.Temperature{1000, 1700, 2400} {
		got, err := m.estimate(shown, 0, nil)
		if err != nil {
			t.Fatal(err)
		}
		T, u, err := p.Estimate(1.02*p.Ratio(shown), 0.97, 0, 0.01/0.97)
		if err != nil || math.Abs(float64(got.t-T)) > 1e-8 || math.Abs(got.std/u-1) > 1e-5 {
			t.Errorf("%v: %v ± %.6f K, the pair %v ± %.6f K, %v", shown, got.t, got.std, T, u, err)
		}
	}
}

// TestSignUnderHotWalls: the sign of the emissivity's share turns where the surroundings are
// brighter than the piece; shares agree with moving the input by its standard uncertainty.
func TestSignUnderHotWalls(t *testing.T) {
	band, err := pyro.Line(1000 * pyro.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	d := detector.Indicator{Band: band, Emissivity: 0.8, Window: 1, Low: 300, High: 3000}
	for _, c := range []struct {
		walls float64
		sign  float64
	}{{1000, -1}, {1500, 1}} {
		s := scene{input{"emissivity", 0.8, 0.01, 1e-3, 1}, input{"window", 0.95, 0.01, 1e-3, 1}, input{"background", c.walls, 5, 0, 6000}}
		m := oneBand(d, s, 1)
		got, err := m.estimate(1400, 1, nil)
		if err != nil {
			t.Fatal(err)
		}
		if len(got.budget) != 5 || math.Signbit(got.budget[2].K) != (c.sign < 0) {
			t.Errorf("walls at %g K: %+v", c.walls, got.budget)
		}
		for i, in := range m.inputs {
			move := func(z float64) pyro.Temperature {
				x := make([]float64, len(m.inputs))
				for k := range x {
					x[k] = m.inputs[k].value
				}
				u := in.std
				if i == 0 {
					u = show.Rectangular
				}
				x[i] += z * u
				T, err := m.at(1400, x)
				if err != nil {
					t.Fatal(err)
				}
				return T
			}
			if want := float64(move(1)-move(-1)) / 2; math.Abs(got.budget[i].K-want) > 0.01*math.Abs(want)+1e-6 {
				t.Errorf("walls at %g K: %s %.5f K, re-estimated %.5f K", c.walls, in.name, got.budget[i].K, want)
			}
		}
	}
}

func TestWrongFlagsAreExplained(t *testing.T) {
	ok := job{in: "-", unit: "K", band: "900", setting: 1, emissivity: 0.8, windowSetting: 1, background: -1, ratioSetting: 1, repeats: 5}
	for name, spoil := range map[string]func(*job){
		"unit":             func(j *job) { j.unit = "R" },
		"no band":          func(j *job) { j.band = "" },
		"band":             func(j *job) { j.band = "red" },
		"no setting":       func(j *job) { j.setting = 0 },
		"setting in %":     func(j *job) { j.setting = 95 },
		"no emissivity":    func(j *job) { j.emissivity = 0 },
		"emissivity":       func(j *job) { j.emissivity = 1.2 },
		"its std":          func(j *job) { j.emissivityStd = -1 },
		"window":           func(j *job) { j.window = 1.2 },
		"background in °C": func(j *job) { j.background = 25 },
		"setting in °C":    func(j *job) { j.backgroundSetting = 25 },
		"range":            func(j *job) { j.span = "1400:600" },
		"range, a word":    func(j *job) { j.span = "cold:hot" },
		"repeats":          func(j *job) { j.repeats = 1 },
		"indicator":        func(j *job) { j.indicatorStd = math.NaN() },
		"file":             func(j *job) { j.in = "no/such/file" },
		"one band of two":  func(j *job) { j.short = "750" },
		"no ratio":         func(j *job) { j.short, j.long = "750", "900" },
		"ratio in %":       func(j *job) { j.short, j.long, j.ratio = "750", "900", 97 },
		"ratio setting":    func(j *job) { j.short, j.long, j.ratio, j.ratioSetting = "750", "900", 1, 0 },
	} {
		j := ok
		spoil(&j)
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader("label,temperature_C\na,1000\n"), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
	for name, table := range map[string]string{"mA without range": "label,current_mA\na,12\n", "amperes": "label,current_A\na,0.012\n", "no column": "label,value\na,1\n", "no unit": "label,temperature\na,1\n"} {
		var out bytes.Buffer
		if _, err := run(ok, strings.NewReader(table), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

func TestEndsOfTheInterval(t *testing.T) {
	band, err := pyro.Line(1000 * pyro.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	d := detector.Indicator{Band: band, Emissivity: 0.9, Window: 1, Low: 300, High: 3000}
	// Walls that nearly account for the signal: no lower end.
	s := scene{input{"emissivity", 0.5, 0.01, 1e-3, 1}, input{"window", 1, 0, 1e-3, 1}, input{"background", 1440, 30, 0, 6000}}
	e, err := oneBand(d, s, 0).estimate(1400, 1, nil)
	if err != nil || e.lo != nil || e.hi == nil || e.determined() {
		t.Errorf("near the walls: %+v, %v", e, err)
	}
	// Walls that give more than was measured.
	s.background.value, s.background.std = 1600, 1
	if _, err := oneBand(d, s, 0).estimate(1400, 1, nil); err == nil || !strings.Contains(err.Error(), "surroundings") {
		t.Errorf("beyond the walls: %v", err)
	}
	// An emissivity of 1 ends the interval on its cold side.
	s = scene{input{"emissivity", 0.98, 0.05, 1e-3, 1}, input{"window", 1, 0, 1e-3, 1}, input{"background", 0, 0, 0, 6000}}
	e, err = oneBand(d, s, 0).estimate(1400, 0, nil)
	radiance, err2 := d.Radiance(1400)
	if errors.Join(err, err2) != nil || math.Abs(float64(*e.lo-band.RadianceTemperature(radiance))) > 1e-9 {
		t.Errorf("black at most: %+v, %v", e, err)
	}
}
