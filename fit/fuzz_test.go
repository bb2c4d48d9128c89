package fit_test

import (
	"errors"
	"math"
	"testing"

	"candent/emissivity"
	"candent/fit"
)

// FuzzEstimate: whatever finite readings come, no panic, no NaN behind an accessor that
// says ok, an interval that is ordered and lies in the range, and a temperature inside it.
func FuzzEstimate(f *testing.F) {
	f.Add(1e9, 2e9, 3e9, 4e9, 1e7, uint8(0), uint8(0))
	f.Add(-1.0, 0.0, 1e-300, 1e300, 1.0, uint8(1), uint8(1))
	f.Add(1e5, 1e5, 1e5, 1e5, 1e5, uint8(2), uint8(2))
	bands := lines(f, 0.6, 1.2, 4)
	families := []emissivity.Family{emissivity.Grey(), emissivity.Polynomial(1), emissivity.Exponential(1), emissivity.PowerLaw(),
		emissivity.Polynomial(3), emissivity.Grey().Relative(), emissivity.Polynomial(2).Relative(), emissivity.Grey().WithPrior("level", 0.5, 0.1)}
	noises := []fit.Noise{fit.PerReading(), fit.RelativeWithFloor(0.01, 1e5), fit.Relative(0.05), fit.Constant(1e6).UpToFactor()}
	f.Fuzz(func(t *testing.T, a, b, c, d, σ float64, family, noise uint8) {
		n := noises[int(noise)%len(noises)]
		e, err := fit.New(bands, fit.Assume{Emissivity: families[int(family)%len(families)], Noise: n})
		if err != nil {
			t.Fatal(err)
		}
		r := fit.Readings{Signal: []float64{a, b, c, d}}
		if int(noise)%len(noises) == 0 {
			r.Std = []float64{σ, σ, 2 * σ, σ}
		}
		res, err := e.Estimate(r)
		if err != nil {
			if !errors.Is(err, fit.ErrReadings) && !errors.Is(err, fit.ErrRange) {
				t.Fatalf("untyped error %v", err)
			}
			return
		}
		finite := func(what string, v float64) {
			if math.IsNaN(v) || math.IsInf(v, 0) {
				t.Fatalf("%s = %g of %v", what, v, r)
			}
		}
		iv, ok := res.Interval()
		if !ok || !(iv.Low <= iv.High) || iv.Low < 199 || iv.High > 6001 {
			t.Fatalf("interval %+v", iv)
		}
		if T, state := res.Temperature(); state == fit.Determined {
			finite("T", float64(T))
			if T < iv.Low*(1-1e-9) || T > iv.High*(1+1e-9) {
				t.Fatalf("%v outside %+v", T, iv)
			}
		}
		if u, ok := res.Uncertainty(); ok {
			finite("u", u)
		}
		for i := range bands {
			if ε, u, _, ok := res.Emissivity(i); ok {
				finite("ε", ε)
				finite("u(ε)", u)
			}
		}
		for _, s := range res.Budget() {
			finite(s.Name, s.StdK)
		}
		if _, err := res.MarshalJSON(); err != nil {
			t.Fatal(err)
		}
		_ = res.Report()
	})
}

// FuzzPosterior: a process never panics on a reading; where it gives a temperature, that and
// its interval are finite, in order and inside the range, and so are the emissivities.
func FuzzPosterior(f *testing.F) {
	f.Add(1e9, 1.1e9, 1.2e9, 1.3e9, 0.01, uint8(0))
	f.Add(1.0, 1e20, 1e-20, 5.0, 0.04, uint8(1))
	f.Add(1e5, 2e5, 1e5, 2e5, 1e-9, uint8(2))
	surfaces := []emissivity.Process{emissivity.Unknown(), emissivity.AnySurface(), emissivity.Unknown().Relative(), emissivity.BrightMetal()}
	var estimators []*fit.Estimator
	for _, s := range surfaces {
		e, err := fit.New(lines(f, 0.7, 3, 4), fit.Assume{Emissivity: s})
		if err != nil {
			f.Fatal(err)
		}
		estimators = append(estimators, e)
	}
	f.Fuzz(func(t *testing.T, a, b, c, d, rel float64, which uint8) {
		y := []float64{a, b, c, d}
		r, err := estimators[int(which)%len(estimators)].Estimate(fit.Readings{Signal: y, Std: scaled(y, rel)})
		if err != nil {
			return
		}
		iv, ok := r.Interval()
		if !ok || !(iv.Low >= 199.9 && iv.High <= 6000.1 && iv.Low <= iv.High) {
			t.Fatalf("%v ± %g: interval %+v", y, rel, iv)
		}
		if T, state := r.Temperature(); state == fit.Determined && !(T >= iv.Low && T <= iv.High) {
			t.Fatalf("%v ± %g: %v outside %+v", y, rel, T, iv)
		}
		for i := range y {
			if ε, std, _, ok := r.Emissivity(i); ok && !(ε > 0 && std >= 0 && std < math.Inf(1)) {
				t.Fatalf("%v ± %g: emissivity %g ± %g", y, rel, ε, std)
			}
		}
		if _, err := r.MarshalJSON(); err != nil {
			t.Fatal(err)
		}
	})
}
