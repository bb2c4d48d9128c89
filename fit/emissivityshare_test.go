package fit_test

import (
	"math"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
)

// TestShareOfTheEmissivity: what a process brings to u² is what is missing from the fit in
// which its curve is given.
func TestShareOfTheEmissivity(t *testing.T) {
	bands := lines(t, 0.6, 1.6, 12)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.5 * math.Pow(b.Mean().Micrometres(), -0.3) * b.Radiance(1600)
	}
	gain := input("gain", 1, 0.01)
	detectors := make([]detector.Channel, len(bands))
	for i := range detectors {
		detectors[i].Gain = gain
	}
	r := fit.Readings{Signal: y, Std: scaled(y, 0.005)}
	for _, c := range []struct {
		name string
		a    fit.Assume
	}{
		{"noise", fit.Assume{}},
		{"noise and a gain", fit.Assume{Detectors: detectors}},
		{"noise and a shared effect", fit.Assume{Shared: []fit.Shared{fit.SharedScale("scale", 0.02, len(bands))}}},
		{"noise and a temperature", fit.Assume{Temperature: fit.TemperaturePrior{Value: 1600, StdK: 0.4}}},
	} {
		c.a.Emissivity = emissivity.Unknown()
		res := estimate(t, bands, c.a, r)
		_, u := determined(t, res)
		share, ok := res.EmissivityShare()
		// The curve that the process found, as a fact.
		curve := law(func(um float64) float64 {
			best, at := math.Inf(1), 0
			for i, b := range bands {
				if d := math.Abs(b.Mean().Micrometres() - um); d < best {
					best, at = d, i
				}
			}
			ε, _, _, _ := res.Emissivity(at)
			return ε
		})
		c.a.Emissivity = emissivity.Given{Spectrum: curve}
		given := estimate(t, bands, c.a, r)
		_, u0 := determined(t, given)
		if want := 1 - u0*u0/(u*u); !ok || math.Abs(share-want) > 0.002*(1-want)+1e-4 {
			t.Errorf("%s: share %.6f, %v; %.6f from the fit with the curve given (u %.3f K, %.3f K)", c.name, share, ok, want, u, u0)
		}
		if _, ok := given.EmissivityShare(); !ok {
			t.Errorf("%s: a given curve has a share, 0", c.name)
		}
		if shown := strings.Contains(res.String(), "of u² is the emissivity assumption"); shown != (share > 0.5) {
			t.Errorf("%s: share %.3f, and the one line is %v", c.name, share, res)
		}
	}
}

// TestShareOfARelativeLevel: an unknown gain is no assumption on the emissivity.
func TestShareOfARelativeLevel(t *testing.T) {
	bands := lines(t, 0.6, 1.6, 12)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 3e-9 * b.Radiance(1600)
	}
	r := fit.Readings{Signal: y, Std: scaled(y, 0.005)}
	_, u0 := determined(t, estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().Relative()}, r))
	grey := emissivity.NewProcess("grey", emissivity.Component{Weight: 1, Level: 0.5, Spread: math.Inf(1), Roughness: 1e-6})
	res := estimate(t, bands, fit.Assume{Emissivity: grey}, r)
	_, u := determined(t, res)
	if share, ok := res.EmissivityShare(); !ok || share > 0.01 {
		t.Errorf("grey of unknown level: share %g, %v; u %g K, that of the grey family %g K", share, ok, u, u0)
	}
	res = estimate(t, bands, fit.Assume{Emissivity: emissivity.Unknown().Relative()}, r)
	_, u = determined(t, res)
	if share, ok := res.EmissivityShare(); !ok || math.Abs(share-(1-u0*u0/(u*u))) > 1e-3 {
		t.Errorf("share %g, %v; 1 − u₀²/u² = %g", share, ok, 1-u0*u0/(u*u))
	}
}

// TestShareOfPriors: for a family it is the budget's part that its priors have.
func TestShareOfPriors(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	y := []float64{0.6 * bands[0].Radiance(1500)}
	a := fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.6, 0.03), Detectors: []detector.Channel{{Gain: input("gain", 1, 0.02)}}}
	res := estimate(t, bands, a, fit.Readings{Signal: y, Std: scaled(y, 0.01)})
	_, u := determined(t, res)
	want := 0.0
	for _, s := range res.Budget() {
		if strings.Contains(s.Name, "prior on") {
			want += s.StdK * s.StdK / (u * u)
		}
	}
	share, ok := res.EmissivityShare()
	if !ok || math.Abs(share-want) > 1e-9 || !(share > 0.8) { // 5² of 5² + 2² + 1²
		t.Errorf("share %g, %v; %g by the budget", share, ok, want)
	}
	if !strings.Contains(res.String(), "83 % of u² is the emissivity assumption") {
		t.Errorf("%v", res)
	}
	a.Emissivity = emissivity.Grey()
	if _, ok := estimate(t, bands, a, fit.Readings{Signal: y, Std: scaled(y, 0.01)}).EmissivityShare(); ok {
		t.Error("a share of no u(T)")
	}
	e, err := fit.New([]*pyro.Band{bands[0]}, fit.Assume{Emissivity: emissivity.Carbon()})
	if err != nil {
		t.Fatal(err)
	}
	w, dst := e.NewWork(), e.NewResult()
	r := fit.Readings{Signal: y, Std: scaled(y, 0.01)}
	if err := e.EstimateTo(dst, w, r); err != nil {
		t.Fatal(err)
	}
	if err := e.IntervalTo(dst, w, r, 0.95); err != nil {
		t.Fatal(err)
	}
	if _, ok := dst.EmissivityShare(); ok {
		t.Error("a share before DiagnoseTo")
	}
}

// TestASharedScaleCountsWhateverTheRange: what is shared acts on the logarithm of a reading
// alike at all temperatures, also where the search begins far from the truth.
func TestASharedScaleCountsWhateverTheRange(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	y := []float64{0.78 * bands[0].Radiance(1600)}
	r := fit.Readings{Signal: y, Std: scaled(y, 0.001)}
	for _, s := range []fit.Shared{fit.SharedScale("scale", 0.15, 1), {Name: "dark", Additive: []float64{0.15 * y[0]}}} {
		a := fit.Assume{Emissivity: emissivity.About("plate", emissivity.Constant(0.5), 0.02), Shared: []fit.Shared{s}}
		_, wide := determined(t, estimate(t, bands, a, r))
		a.Range = fit.Range{Min: 1400, Max: 1900}
		_, narrow := determined(t, estimate(t, bands, a, r))
		// λT²/c₂ times the root of the squares of 0.15, 0.02 and 0.001, a third order of 0.15 off
		// where ln s is taken for Gaussian.
		T := float64(bands[0].RadianceTemperature(y[0] / 0.5))
		want := 0.9e-6 * T * T / pyro.C2 * math.Sqrt(0.15*0.15+0.02*0.02+0.002*0.002+0.001*0.001)
		if math.Abs(wide-narrow) > 1e-3*narrow || math.Abs(wide-want) > 0.02*want {
			t.Errorf("%s: u %.3f K over the widest range, %.3f K over a narrow one; %.3f K", s.Name, wide, narrow, want)
		}
	}
}
