package fit

import (
	"math"
	"testing"

	"candent/emissivity"
)

// TestModelDerivatives compares ∂m/∂(β, θ) with central differences, for every family over
// lines and wide bands. Steps h = 1e-5 relative: truncation h²/6 times the third derivative,
// below 1e-7 here, rounding 1e-16/h = 1e-11.
func TestModelDerivatives(t *testing.T) {
	for _, width := range []float64{0, 0.1} {
		bands, _ := testBands(t, 0.7, 1.6, width, 5)
		for _, c := range []struct {
			family emissivity.Family
			ψ      []float64
		}{
			{emissivity.Grey(), []float64{0.5}},
			{emissivity.Polynomial(1), []float64{0.5, -0.25}},
			{emissivity.Polynomial(3), []float64{0.5, -0.25, 0.1, 0.1}},
			{emissivity.Exponential(1), []float64{-0.7, -1}},
			{emissivity.Exponential(3), []float64{-0.7, -1, 0.4, -0.3}},
			{emissivity.PowerLaw(), []float64{-0.7, -0.8}},
		} {
			e, err := New(bands, Assume{Emissivity: c.family, Range: Range{500, 3000}})
			if err != nil {
				t.Fatal(err)
			}
			w := e.NewWork()
			for j := range w.std {
				w.signal[j], w.std[j] = 1, 1
			}
			const β = 1.0 / 1500
			w.evaluate(β, c.ψ, false)
			size := e.size()
			jac := append([]float64(nil), w.jac...)
			value := append([]float64(nil), w.model...)
			for a := range size {
				h := 1e-5
				at := func(sign float64) []float64 {
					ψ := append([]float64(nil), c.ψ...)
					x := β
					if a == 0 {
						x += sign * h * β
					} else {
						ψ[a-1] += sign * h
					}
					w.evaluate(x, ψ, false)
					return append([]float64(nil), w.model...)
				}
				hi, lo := at(1), at(-1)
				if a == 0 {
					h *= β
				}
				for j := range e.n {
					want := (hi[j] - lo[j]) / (2 * h)
					if got := jac[j*size+a]; math.Abs(got-want) > 2e-7*(math.Abs(want)+value[j]) {
						t.Errorf("%v, width %g, channel %d: derivative %d is %.10g, difference %.10g", c.family, width, j, a, got, want)
					}
				}
			}
		}
	}
}
