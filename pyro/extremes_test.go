package pyro_test

import (
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

// TestExtremeArguments: where λ⁵ leaves the float64 but the result does not, the value is
// right; where the result does, it is the limit. Values from L = 2ckT/λ⁴ (Rayleigh–Jeans,
// right to x/2) and by scaling: L(λ,T) = L(sλ,T/s)·s⁵.
func TestExtremeArguments(t *testing.T) {
	const bound = 1e-11
	for _, r := range []struct{ l, k float64 }{{1e-60, 2e57}, {3e-55, 1e52}, {1e58, 1e-60}, {2e20, 1e100}, {1e-10, 1e150}} {
		s := math.Exp2(math.Round(math.Log2(1e-6 / r.l)))
		want := math.Exp(math.Log(pyro.Radiance(pyro.Wavelength(r.l*s), pyro.Temperature(r.k/s))) + 5*math.Log(s))
		if r.k/s > 1e20 {
			want = math.Exp(math.Log(2*pyro.SpeedOfLight*pyro.BoltzmannConstant) + math.Log(r.k) - 4*math.Log(r.l))
		}
		near(t, fmt.Sprintf("L(%g m, %g K)", r.l, r.k), pyro.Radiance(pyro.Wavelength(r.l), pyro.Temperature(r.k)), want, bound)
		near(t, fmt.Sprintf("T(%g m, %g K)", r.l, r.k), float64(pyro.RadianceTemperature(pyro.Wavelength(r.l), want)), r.k, bound)
	}
	for _, r := range []struct{ l, k, want float64 }{
		{1e-300, 1e-300, 0}, {1e300, 1e-300, 0}, {1e300, 1e300, 0}, {1e-300, 1e300, math.Inf(1)}, {5e-324, 5e-324, 0},
		{math.MaxFloat64, math.MaxFloat64, 0}, {1e-6, 5e-324, 0}, {1e-9, math.MaxFloat64, math.Inf(1)},
	} {
		if got := pyro.Radiance(pyro.Wavelength(r.l), pyro.Temperature(r.k)); got != r.want {
			t.Errorf("L(%g m, %g K) = %g, want the limit %g", r.l, r.k, got, r.want)
		}
	}
	if got := pyro.LogSlope(1e300, 1e300); got != 1 {
		t.Errorf("n of Rayleigh–Jeans = %g, want 1", got)
	}
	if lo, hi := pyro.Fraction(1e-300, 1e-300), pyro.Fraction(1e300, 1e300); lo != 0 || hi != 1 {
		t.Errorf("fraction at the ends: %g and %g", lo, hi)
	}
}
