package fit_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// TestIntervalHoldsTheCurve holds each result against the curve χ²(T) itself, which knows
// nothing of basins or fast paths: at no temperature is χ² lower than the minimum that the
// result rests on, and at none outside the interval is it below χ² at the interval's ends.
//
// The temperatures tried are 120, equal steps in ln T apart, so a basin narrower than 2 %
// may slip between them; ε is linear with slopes on both sides of ε ∝ λ.
func TestIntervalHoldsTheCurve(t *testing.T) {
	const steps = 120
	for ci, c := range []struct {
		name         string
		um           [2]float64
		n            int
		T            [2]float64
		rel, p       float64
		noise        fit.Noise
		withoutSigma bool
	}{
		{"short waves", [2]float64{0.5, 1}, 8, [2]float64{900, 2600}, 0.01, 0.95, fit.PerReading(), false},
		{"many channels, little noise", [2]float64{0.5, 1.6}, 100, [2]float64{900, 2600}, 0.003, 0.95, fit.PerReading(), false},
		{"1 to 2 µm", [2]float64{1, 2}, 30, [2]float64{900, 2600}, 0.01, 0.95, fit.PerReading(), false},
		{"1 to 4 µm", [2]float64{1, 4}, 30, [2]float64{500, 900}, 0.01, 0.95, fit.PerReading(), false},
		{"2 to 5 µm", [2]float64{2, 5}, 30, [2]float64{500, 1200}, 0.01, 0.95, fit.PerReading(), false},
		{"far into the tails", [2]float64{0.5, 1}, 8, [2]float64{900, 2600}, 0.01, 0.9999, fit.PerReading(), false},
		{"size of noise from two readings", [2]float64{0.5, 1}, 5, [2]float64{1000, 2500}, 0.01, 0.99, fit.Relative(0.01).UpToFactor(), true},
		{"size of noise declared too large", [2]float64{0.5, 1}, 5, [2]float64{1000, 2500}, 0.01, 0.99, fit.Relative(0.1).UpToFactor(), true},
	} {
		bands := lines(t, c.um[0], c.um[1], c.n)
		e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Polynomial(1), Noise: c.noise, Probability: c.p})
		if err != nil {
			t.Fatal(err)
		}
		at := make([]pyro.Temperature, steps, steps+2)
		for i := range at {
			at[i] = pyro.Temperature(300 * math.Pow(5900.0/300, float64(i)/(steps-1)))
		}
		rng := rand.New(rand.NewPCG(31, uint64(ci)))
		mid, half := (c.um[0]+c.um[1])/2, (c.um[1]-c.um[0])/2
		several, total := 0, 200
		for range total {
			T := pyro.Temperature(c.T[0] + (c.T[1]-c.T[0])*rng.Float64())
			level, slope := 0.2+0.3*rng.Float64(), 1.8*rng.Float64()-0.9
			y := truth{"", emissivity.Polynomial(1), []float64{level, level * slope / half}}.signals(bands, pyro.Wavelength(mid)*µm, T)
			reading := fit.Readings{Signal: y}
			if !c.withoutSigma {
				reading.Std = scaled(y, c.rel)
			}
			for i := range y {
				y[i] *= 1 + c.rel*rng.NormFloat64()
			}
			r, err := e.Estimate(reading)
			if err != nil {
				t.Fatalf("%s: %v", c.name, err)
			}
			iv, _ := r.Interval()
			chi2, _, err := e.Curve(reading, append(at, iv.Low, iv.High))
			if err != nil {
				t.Fatal(err)
			}
			limit := math.Inf(-1) // no claim is made of what lies outside an open end
			if !iv.LowOpen {
				limit = chi2[steps]
			}
			if !iv.HighOpen {
				limit = math.Max(limit, chi2[steps+1])
			}
			least, _ := r.ChiSquared()
			for i, T := range at {
				if chi2[i] < least-1e-6*(1+least) {
					t.Errorf("%s: χ² is %.6g at %v, below the minimum %.6g of %v", c.name, chi2[i], T, least, r)
					break
				}
				if (T < iv.Low || T > iv.High) && chi2[i] < limit-1e-6*(1+limit) {
					t.Errorf("%s: χ² is %.6g at %v, below %.6g at the ends of %+v", c.name, chi2[i], T, limit, iv)
					break
				}
			}
			if len(r.Basins()) > 1 {
				several++
			}
		}
		if several == 0 {
			t.Errorf("%s: no reading with several basins: nothing was tried", c.name)
		}
		t.Logf("%-34s %d of %d with several basins", c.name, several, total)
	}
}
