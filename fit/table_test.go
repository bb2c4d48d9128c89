package fit

import (
	"math"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// TestBandTableAgainstQuadrature compares the compiled tables with the bands' own
// quadrature, for ε linear and exponential in λ.
func TestBandTableAgainstQuadrature(t *testing.T) {
	for _, c := range []struct {
		width, lo, hi float64 // µm
		family        emissivity.Family
		θ             []float64
		bound         float64 // relative, of the signal
	}{
		{0.01, 0.5, 1.0, emissivity.Polynomial(1), []float64{0.5, -0.25}, 1e-11},
		{0.01, 0.5, 1.0, emissivity.Exponential(1), []float64{-0.7, -1}, 1e-11},
		{0.1, 0.7, 1.6, emissivity.Polynomial(3), []float64{0.5, -0.25, 0.1, 0.1}, 1e-10},
		{0.1, 0.7, 1.6, emissivity.Exponential(2), []float64{-0.7, -1, 0.3}, 3e-7}, // fourth order: (0.1/√12)⁴/24·(1.8−1)·ε⁗/ε, ε⁗/ε ≤ 12
		{0.4, 0.9, 1.1, emissivity.Grey(), []float64{0.5}, 1e-8},
	} {
		bands, _ := testBands(t, c.lo, c.hi, c.width, 5)
		e, err := New(bands, Assume{Emissivity: c.family, Range: Range{500, 3000}})
		if err != nil {
			t.Fatal(err)
		}
		w := e.NewWork()
		for j := range w.std {
			w.signal[j], w.std[j] = 1, 1
		}
		worst := 0.0
		for T := 505.0; T < 3000; T += 97 {
			w.evaluate(1/T, c.θ, false)
			for j, b := range bands {
				λ, weight := b.Nodes()
				want := 0.0
				for k := range λ {
					want += weight[k] * e.family.Emissivity(nil, c.θ, λ[k]) * pyro.Radiance(λ[k], pyro.Temperature(T))
				}
				worst = math.Max(worst, math.Abs(w.model[j]/want-1))
			}
		}
		t.Logf("%v, bands %g µm wide: %.2g", c.family, c.width, worst)
		if worst > c.bound {
			t.Errorf("%v, bands %g µm wide: off by %.2g, bound %.2g", c.family, c.width, worst, c.bound)
		}
	}
}
