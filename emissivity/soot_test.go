package emissivity_test

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// Emissivity and radiance temperature of soot, computed to 50 digits elsewhere from Hottel
// and Broughton's law (1932), α = 1.39 at 0.5553, 0.6651 and 0.9 µm, 0.95 at 1.6 µm.
func TestSootTable(t *testing.T) {
	λ := []pyro.Wavelength{0.5553 * µm, 0.6651 * µm, 0.9 * µm, 1.6 * µm}
	for _, row := range []struct {
		kelvin, kl float64
		ε, unit    [4]float64 // unit of the last printed digit
		radiance   [4]float64
		radUnit    [4]float64
	}{
		{1600, 0.5, [4]float64{.6778055, .585784, .4394625, .2738007}, [4]float64{1e-7, 1e-6, 1e-7, 1e-7}, [4]float64{1562.4768, 1539.1192, 1478.3501, 1300.8001}, [4]float64{1e-4, 1e-4, 1e-4, 1e-4}},
		{2000, 0.1, [4]float64{.2026966, .1616114, .1093216, .06198201}, [4]float64{1e-7, 1e-7, 1e-7, 1e-8}, [4]float64{1780.6276, 1711.5952, 1566.3176, 1237.496}, [4]float64{1e-4, 1e-4, 1e-4, 1e-3}},
		{2000, 0.5, [4]float64{.6778055, .585784, .4394625, .2738007}, [4]float64{1e-7, 1e-6, 1e-7, 1e-7}, [4]float64{1941.7118, 1905.7715, 1813.5013, 1554.8559}, [4]float64{1e-4, 1e-4, 1e-4, 1e-4}},
		{2000, 1, [4]float64{.8961907, .8284251, .6857977, .4726346}, [4]float64{1e-7, 1e-7, 1e-7, 1e-7}, [4]float64{1983.2215, 1965.7911, 1909.9034, 1716.1926}, [4]float64{1e-4, 1e-4, 1e-4, 1e-4}},
		{2400, 2, [4]float64{.9892236, .9705621, .9012769, .7218857}, [4]float64{1e-7, 1e-7, 1e-7, 1e-7}, [4]float64{2397.5938, 2392.0712, 2363.1684, 2211.5322}, [4]float64{1e-4, 1e-4, 1e-4, 1e-4}},
	} {
		for i := range λ {
			α := 1.39
			if i == 3 {
				α = 0.95
			}
			ε, dT := emissivity.Soot{}.Emissivity(nil, []float64{row.kl, α}, λ[i], pyro.Temperature(row.kelvin))
			if math.Abs(ε-row.ε[i]) > 0.501*row.unit[i] || dT != 0 {
				t.Errorf("KL = %g at %v: ε = %.9f, want %.8g", row.kl, λ[i], ε, row.ε[i])
			}
			// the radiance temperature S of it, by Planck's law
			x := pyro.C2 / (float64(λ[i]) * row.kelvin)
			s := pyro.C2 / (float64(λ[i]) * math.Log1p(math.Expm1(x)/ε))
			if math.Abs(s-row.radiance[i]) > 0.501*row.radUnit[i] {
				t.Errorf("KL = %g at %v, %g K: radiance temperature %.6f K, want %.4f", row.kl, λ[i], row.kelvin, s, row.radiance[i])
			}
		}
	}
}

func TestSootDerivativesByComplexStep(t *testing.T) {
	const h = 1e-30
	for _, θ := range [][]float64{{0.5, 1.39}, {1e-4, 0.95}, {8, 1.1}, {20, 0.3}} {
		for _, um := range []float64{0.5, 0.9, 1.6, 3.9} {
			grad := make([]float64, 2)
			ε, _ := emissivity.Soot{}.Emissivity(grad, θ, pyro.Wavelength(um)*µm, 1800)
			law := func(kl, α complex128) complex128 {
				return 1 - cmplx.Exp(-kl*cmplx.Exp(-α*complex(math.Log(um), 0)))
			}
			kl, α := complex(θ[0], 0), complex(θ[1], 0)
			want := []float64{imag(law(kl+complex(0, h), α)) / h, imag(law(kl, α+complex(0, h))) / h}
			for k := range want {
				if math.Abs(grad[k]-want[k]) > 1e-13*math.Abs(want[k])+1e-18 {
					t.Errorf("θ = %v at %g µm: ∂ε/∂θ%d = %.16g, want %.16g", θ, um, k, grad[k], want[k])
				}
			}
			if math.Abs(ε-real(law(kl, α))) > 2e-16 {
				t.Errorf("θ = %v at %g µm: ε = %g", θ, um, ε)
			}
		}
	}
}

func TestSootsExponentHasAPrior(t *testing.T) {
	for s, want := range map[emissivity.Soot]float64{{}: 1.39, {Infrared: true}: 0.95} {
		if p := s.Parameters()[1]; p.Prior != (emissivity.Prior{Value: want, Std: 0.2, Set: true}) {
			t.Errorf("%+v: %+v", s, p)
		}
	}
}

func ExampleSoot() {
	flame := emissivity.WithPrior(emissivity.Soot{}, "KL", 0.5, 0.25)
	for _, p := range flame.Parameters() {
		fmt.Printf("%s = %g ± %g\n", p.Name, p.Prior.Value, p.Prior.Std)
	}
	ε, _ := flame.Emissivity(nil, []float64{0.5, 1.39}, 900*pyro.Nanometre, 1800*pyro.Kelvin)
	fmt.Printf("ε(0.9 µm) = %.4f\n", ε)
	// Output:
	// KL = 0.5 ± 0.25
	// alpha = 1.39 ± 0.2
	// ε(0.9 µm) = 0.4395
}
