package fit_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// A: priors and shared under UpToFactor
func TestProbePriorsUnknown(t *testing.T) {
	bands := lines(t, 0.895, 0.905, 16)
	for _, declared := range []float64{0.0001, 0.001, 0.01, 0.2} {
		a := fit.Assume{Emissivity: emissivity.Grey().Fix("level", 0.8), Noise: fit.Relative(declared).UpToFactor(),
			Shared: []fit.Shared{fit.SharedScale("scale", 0.02, 16)}}
		e, err := fit.New(bands, a)
		if err != nil { t.Fatal(err) }
		rng := rand.New(rand.NewPCG(1, 1))
		y := truth{"", emissivity.Grey(), []float64{0.8}}.signals(bands, 0.9*µm, 1500)
		for i := range y { y[i] *= 1 + 0.001*rng.NormFloat64() }
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil { t.Fatal(err) }
		u, ok := r.Uncertainty()
		t.Logf("declared %g (true 0.001): u=%.4g ok=%v; the 2 %% shared scale alone is worth %.4g K; %v", declared, u, ok, 0.02*pyro.SensitivityToRadiance(0.9*µm, 1500), r)

		a2 := fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.8, 0.05), Noise: fit.Relative(declared).UpToFactor()}
		e2, err := fit.New(bands, a2)
		if err != nil { t.Fatal(err) }
		r2, err := e2.Estimate(fit.Readings{Signal: y})
		if err != nil { t.Fatal(err) }
		u2, ok := r2.Uncertainty()
		t.Logf("     level prior 0.8±0.05 : u=%.4g ok=%v", u2, ok)
	}
}

// B: noise-free readings: notes?
func TestProbeNoiseFreeNotes(t *testing.T) {
	for _, s := range truths() {
		for _, n := range []int{12, 40, 100} {
			bands := lines(t, 0.7, 1.5, n)
			e, err := fit.New(bands, fit.Assume{Emissivity: s.family})
			if err != nil { t.Fatal(err) }
			notes := map[string]int{}
			for T := 900.0; T < 2900; T += 50 {
				y := s.signals(bands, 1.1*µm, pyro.Temperature(T))
				r, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 1e-2)})
				if err != nil { t.Errorf("%v %g %v", s.name, T, err); continue }
				for _, x := range r.Notes() { notes[x[:min(len(x), 50)]]++ }
			}
			t.Logf("%s n=%d: %v", s.name, n, notes)
		}
	}
}

// C: units suspicion over families and noise
func TestProbeUnits(t *testing.T) {
	for _, s := range truths() {
		for _, n := range []int{8, 40} {
			for _, rel := range []float64{0.001, 0.01} {
				for _, kind := range []string{"std", "rel", "unknown", "const"} {
				bands := lines(t, 0.7, 1.5, n)
				noise := fit.Noise{}
				switch kind { case "rel": noise = fit.Relative(rel); case "unknown": noise = fit.Relative(rel).UpToFactor() }
				line := ""
				for _, f := range []float64{1e-9, 1e-6, 1e-3, 1e3, 1e6, 1e9} {
					rng := rand.New(rand.NewPCG(5, 5))
					y := s.signals(bands, 1.1*µm, 1500)
					top := 0.0
					for i := range y { y[i] *= f; top = math.Max(top, y[i]) }
					rd := fit.Readings{Signal: y}
					if kind == "std" { rd.Std = scaled(y, rel) }
					nz := noise
					if kind == "const" { nz = fit.Constant(rel * top) }
					e, err := fit.New(bands, fit.Assume{Emissivity: s.family, Noise: nz})
					if err != nil { t.Fatal(err) }
					for i := range y { if kind == "const" { y[i] += rel*top*rng.NormFloat64() } else { y[i] *= 1 + rel*rng.NormFloat64() } }
					r, err := e.Estimate(rd)
					switch {
					case err != nil: line += " E"
					case r.State() != fit.Determined: line += " " + r.State().String()[:3]
					case len(r.Notes()) > 0: line += " note"
					default: line += " SILENT"
					}
				}
				t.Logf("%-22s n=%d rel=%g %-8s:%s", s.name, n, rel, kind, line)
				}
			}
		}
	}
}

// D: near-degenerate wavelengths
func TestProbeNear(t *testing.T) {
	for _, gap := range []float64{1e-2, 1e-3, 1e-4, 1e-5, 1e-6, 1e-8, 1e-10} {
		var bands []*pyro.Band
		for _, um := range []float64{0.8, 0.8 + gap, 0.9, 0.9 + gap} {
			b, err := pyro.Line(pyro.Wavelength(um) * µm)
			if err != nil { t.Fatal(err) }
			bands = append(bands, b)
		}
		for _, f := range []emissivity.Family{emissivity.Polynomial(1), emissivity.Exponential(1)} {
			e, err := fit.New(bands, fit.Assume{Emissivity: f})
			if err != nil { t.Fatal(err) }
			y := truth{"", emissivity.Grey(), []float64{0.6}}.signals(bands, 0.85*µm, 1500)
			r, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 0.01)})
			t.Logf("gap %g: %v %v", gap, r, err)
		}
	}
}

// E: fast vs oracle
func TestProbeOracle(t *testing.T) {
	var grid []pyro.Temperature
	for i := range 160 { grid = append(grid, pyro.Temperature(600*math.Pow(5900.0/600, float64(i)/159))) }
	rng := rand.New(rand.NewPCG(9, 7))
	for _, c := range []struct{ f emissivity.Family; n int; lo, hi, rel float64; noise fit.Noise }{
		{emissivity.Polynomial(1), 8, 0.5, 1.0, 0.01, fit.Noise{}},
		{emissivity.Polynomial(1), 5, 0.5, 1.0, 0.005, fit.Noise{}},
		{emissivity.Polynomial(1), 30, 1, 4, 0.01, fit.Noise{}},
		{emissivity.Polynomial(1), 12, 0.6, 1.6, 0.05, fit.Relative(0.05)},
		{emissivity.Polynomial(2), 12, 0.6, 1.6, 0.001, fit.Noise{}},
		{emissivity.Polynomial(1), 12, 0.6, 1.6, 0.03, fit.Relative(0.01).UpToFactor()},
	} {
		bands := lines(t, c.lo, c.hi, c.n)
		e, err := fit.New(bands, fit.Assume{Emissivity: c.f, Noise: c.noise})
		if err != nil { t.Fatal(err) }
		miss, lower, errs, N := 0, 0, 0, 1000
		for k := range N {
			T := pyro.Temperature(900 + 1700*rng.Float64())
			l := 0.2+0.3*rng.Float64()
			h := (c.hi-c.lo)/2
			y := truth{"", emissivity.Polynomial(1), []float64{l, l/h*(1.8*rng.Float64()-0.9)}}.signals(bands, pyro.Wavelength((c.lo+c.hi)/2)*µm, T)
			rd := fit.Readings{Signal: y}
			if c.noise.String() == fit.PerReading().String() { rd.Std = scaled(y, c.rel) }
			for i := range y { y[i] *= 1 + c.rel*rng.NormFloat64() }
			r, err := e.Estimate(rd)
			if err != nil { errs++; if errs < 3 { t.Log(err) }; continue }
			iv, _ := r.Interval()
			chi2, _, err := e.Curve(rd, grid)
			if err != nil { t.Fatal(err) }
			min2, _ := r.ChiSquared()
			ends, _, _ := e.Curve(rd, []pyro.Temperature{iv.Low, iv.High})
			limit := math.Max(ends[0], ends[1])
			if iv.LowOpen { limit = ends[1] }
			if iv.HighOpen { limit = ends[0] }
			if iv.LowOpen && iv.HighOpen { limit = 0 }
			for i, T := range grid {
				if chi2[i] < min2-1e-6 { lower++; if lower < 3 { t.Logf("case %d T=%v chi2 %g below minimum %g %v", k, T, chi2[i], min2, r) }; break }
				if (T < iv.Low || T > iv.High) && chi2[i] < limit*(1-1e-6)-1e-9 { miss++; if miss < 3 { t.Logf("case %d: %v chi2 %g limit %g iv %+v", k, T, chi2[i], limit, iv) }; break }
			}
		}
		t.Logf("%v n=%d rel=%g %v: %d missed, %d lower, %d errors of %d", c.f, c.n, c.rel, c.noise, miss, lower, errs, N)
	}
}
