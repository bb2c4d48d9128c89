package pyro_test

import (
	"errors"
	"math"
	"testing"

	"candent/pyro"
)

// FuzzPlanck: for any finite positive wavelength, temperature and radiance nothing is NaN or
// negative, the fraction lies between 0 and 1, nothing falls with temperature, and inverses
// come back.
func FuzzPlanck(f *testing.F) {
	f.Add(650e-9, 1500.0)
	f.Add(1e-300, 1e-300)
	f.Add(1e300, 1e300)
	f.Add(1e300, 1e-300)
	f.Add(5e-324, 1e300)
	f.Add(1e-9, 5e-324)
	f.Add(5e-324, 5e-324)
	f.Add(math.MaxFloat64, math.MaxFloat64)
	f.Add(1e-60, 1e57)
	f.Add(1e55, 1e-55)
	// Where the arguments take their logarithms (see extremes.go), rounding is a few 1e-13.
	// Near the least normal float64 a step is more than that.
	const rise, slack, least = 1e-9, 3e-12, 1e-290
	f.Fuzz(func(t *testing.T, l, k float64) {
		l, k = math.Abs(l), math.Abs(k)
		if !(l > 0) || !(k > 0) || math.IsInf(l, 0) || math.IsInf(k, 0) {
			return
		}
		λ, T := pyro.Wavelength(l), pyro.Temperature(k)
		for name, f := range map[string]func(pyro.Wavelength, pyro.Temperature) float64{
			"radiance": pyro.Radiance, "per wavenumber": pyro.RadiancePerWavenumber, "photons": pyro.PhotonRadiance,
			"Wien": pyro.WienRadiance, "fraction": pyro.Fraction,
			"radiance temperature": func(λ pyro.Wavelength, t pyro.Temperature) float64 {
				return float64(pyro.RadianceTemperature(λ, float64(t)))
			},
			"radiance temperature per wavenumber": func(λ pyro.Wavelength, t pyro.Temperature) float64 {
				return float64(pyro.RadiancePerWavenumberTemperature(λ, float64(t)))
			},
			"radiance temperature of photons": func(λ pyro.Wavelength, t pyro.Temperature) float64 {
				return float64(pyro.PhotonRadianceTemperature(λ, float64(t)))
			},
		} {
			v := f(λ, T)
			if math.IsNaN(v) || v < 0 {
				t.Fatalf("%s at %g m, %g is %g", name, l, k, v)
			}
			if hotter := f(λ, T*(1+rise)); v > least && k < 1e308 && !(hotter >= v*(1-slack)) {
				t.Fatalf("%s at %g m falls from %g at %g to %g a little above", name, l, v, k, hotter)
			}
		}
		for name, v := range map[string]float64{
			"slope": pyro.RadianceSlope(λ, T), "log slope": pyro.LogSlope(λ, T), "−Wien's error": -pyro.WienError(λ, T),
			"slope per wavenumber": pyro.RadiancePerWavenumberSlope(λ, T), "slope of photons": pyro.PhotonRadianceSlope(λ, T),
			"exitance": pyro.Exitance(T), "peak": float64(pyro.PeakWavelength(T)),
			"fraction in an octave": pyro.FractionBetween(λ/2, λ, T), "fraction in one per cent": pyro.FractionBetween(λ*0.99, λ, T),
		} {
			if math.IsNaN(v) || v < 0 {
				t.Fatalf("%s at %g m, %g K is %g", name, l, k, v)
			}
		}
		if v := pyro.Fraction(λ, T); v > 1 {
			t.Fatalf("fraction %g", v)
		}
		if s := pyro.Radiance(λ, T); s > 0x1p-1022 && !math.IsInf(s, 0) {
			// dT/T is one nth of dL/L; n ≥ 1.
			if back := pyro.RadianceTemperature(λ, s); math.Abs(float64(back)/k-1) > 1e-12 {
				t.Fatalf("radiance %g at %g m, %g K gives %g K back", s, l, k, float64(back))
			}
		}
	})
}

// FuzzPair: a ratio has a temperature in the range that gives it back, or a typed error; all
// temperatures of an ambiguous ratio give it back.
func FuzzPair(f *testing.F) {
	wide, err := pyro.FlatTop(0.7*µm, 1.0*µm)
	if err != nil {
		f.Fatal(err)
	}
	long, err := pyro.FlatTop(1.0*µm, 1.7*µm)
	if err != nil {
		f.Fatal(err)
	}
	layers, err := pyro.NewPair(wide, long, 300, 3500)
	if err != nil {
		f.Fatal(err)
	}
	pairs := []*pyro.Pair{linePair(f, 0.75, 0.9, 900, 2800), layers, turningPair(f)}
	f.Add(0.16, 0.985)
	f.Add(1e-300, 1e300)
	f.Add(5e-324, 1.0)
	for _, p := range pairs {
		for _, b := range p.Branches() {
			f.Add(b.RatioLo, 1.0)
			f.Add(b.RatioHi, 1.0)
			f.Add(p.Ratio(b.Lo), 1.0)
			f.Add(p.Ratio((b.Lo+b.Hi)/2), 1.0)
		}
	}
	f.Fuzz(func(t *testing.T, ratio, e float64) {
		for i, p := range pairs {
			T, err := p.Temperature(ratio, e)
			found := []pyro.Temperature{T}
			if err != nil {
				var two *pyro.AmbiguousRatio
				switch {
				case errors.As(err, &two) && len(two.Temperatures) > 1:
					found = two.Temperatures
				case errors.Is(err, pyro.ErrPair), errors.Is(err, pyro.ErrRatioLow), errors.Is(err, pyro.ErrRatioHigh):
					found = nil
				default:
					t.Fatalf("untyped error %v", err)
				}
			}
			lo, hi := p.Range()
			for _, T := range found {
				if !(T >= lo && T <= hi) || !(math.Abs(p.Ratio(T)/(ratio/e)-1) <= 1e-12) {
					t.Fatalf("pair %d, ratio %g, emissivity ratio %g: %v, which gives %g", i, ratio, e, T, e*p.Ratio(T))
				}
			}
		}
	})
}
