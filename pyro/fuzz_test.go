package pyro_test

import (
	"errors"
	"math"
	"testing"

	"candent/pyro"
)

// FuzzPlanck: for any finite positive wavelength and temperature nothing is NaN, and
// radiance and fraction lie in their limits.
func FuzzPlanck(f *testing.F) {
	f.Add(650e-9, 1500.0)
	f.Add(1e-300, 1e-300)
	f.Add(1e300, 1e300)
	f.Add(1e-9, 5e-324)
	f.Fuzz(func(t *testing.T, l, k float64) {
		l, k = math.Abs(l), math.Abs(k)
		if !(l > 0) || !(k > 0) || math.IsInf(l, 0) || math.IsInf(k, 0) {
			return
		}
		λ, T := pyro.Wavelength(l), pyro.Temperature(k)
		for name, v := range map[string]float64{
			"radiance": pyro.Radiance(λ, T), "slope": pyro.RadianceSlope(λ, T), "log slope": pyro.LogSlope(λ, T),
			"fraction": pyro.Fraction(λ, T), "inverse": float64(pyro.RadianceTemperature(λ, k)),
			"per wavenumber": pyro.RadiancePerWavenumber(λ, T), "photons": pyro.PhotonRadiance(λ, T),
			"Wien": pyro.WienRadiance(λ, T), "Wien's error": pyro.WienError(λ, T),
		} {
			if math.IsNaN(v) {
				t.Fatalf("%s at %g m, %g K is NaN", name, l, k)
			}
		}
		if v := pyro.Fraction(λ, T); v < 0 || v > 1 {
			t.Fatalf("fraction %g", v)
		}
	})
}

// FuzzPair: a ratio has a temperature in the range that gives it back, or a typed error.
func FuzzPair(f *testing.F) {
	f.Add(0.16, 0.985)
	f.Add(1e-300, 1e300)
	p := linePair(f, 0.75, 0.9, 900, 2800)
	f.Fuzz(func(t *testing.T, ratio, e float64) {
		T, err := p.Temperature(ratio, e)
		if err != nil {
			var two *pyro.AmbiguousRatio
			if !errors.Is(err, pyro.ErrPair) && !errors.Is(err, pyro.ErrRatioLow) && !errors.Is(err, pyro.ErrRatioHigh) && !errors.As(err, &two) {
				t.Fatalf("untyped error %v", err)
			}
			return
		}
		if T < 899.99 || T > 2800.01 || math.Abs(e*p.Ratio(T)/ratio-1) > 1e-11 {
			t.Fatalf("ratio %g, emissivity ratio %g: %v, which gives %g", ratio, e, T, e*p.Ratio(T))
		}
	})
}
