package emissivity_test

import (
	"errors"
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

const µm = pyro.Micrometre

func families() []emissivity.Family {
	all := []emissivity.Family{emissivity.Grey(), emissivity.PowerLaw()}
	for m := 1; m <= emissivity.MaxOrder; m++ {
		all = append(all, emissivity.Polynomial(m), emissivity.Exponential(m))
	}
	for i := range all {
		all[i] = all[i].CentredOn(1 * µm)
	}
	return all
}

// written is each family's formula from the package comment, over complex θ.
func written(f emissivity.Family, θ []complex128, um float64) complex128 {
	d := complex(um-1, 0)
	if f.Parameters()[len(f.Parameters())-1] == "exponent" {
		return cmplx.Exp(θ[0]) * cmplx.Pow(complex(um, 0), θ[1])
	}
	sum := complex(0, 0)
	for k := len(θ) - 1; k >= 0; k-- {
		sum = sum*d + θ[k]
	}
	if f.Link() == emissivity.Exp {
		return cmplx.Exp(sum)
	}
	return sum
}

func TestFamiliesAndDerivativesByComplexStep(t *testing.T) {
	const h = 1e-30
	for _, f := range families() {
		n := len(f.Parameters())
		θ := []float64{-0.7, 0.3, -0.2, 0.1}[:n]
		for _, um := range []float64{0.5, 0.9, 1, 1.6} {
			grad := make([]float64, n)
			got := f.Emissivity(grad, θ, pyro.Wavelength(um)*µm)
			z := make([]complex128, n)
			for k := range z {
				z[k] = complex(θ[k], 0)
			}
			if want := real(written(f, z, um)); math.Abs(got-want) > 1e-14*math.Abs(want) {
				t.Errorf("%v at %g µm = %.17g, want %.17g", f, um, got, want)
			}
			for k := range grad {
				z[k] += complex(0, h)
				want := imag(written(f, z, um)) / h
				z[k] = complex(θ[k], 0)
				if math.Abs(grad[k]-want) > 1e-13*math.Abs(want)+1e-15 {
					t.Errorf("%v at %g µm: ∂ε/∂%s = %.17g, want %.17g", f, um, f.Parameters()[k], grad[k], want)
				}
			}
		}
	}
}

func TestOrdersBeyondThreeAreRefused(t *testing.T) {
	for _, f := range []emissivity.Family{emissivity.Polynomial(4), emissivity.Polynomial(0), emissivity.Exponential(-1), emissivity.Grey().CentredOn(0)} {
		if !errors.Is(f.Err(), emissivity.ErrFamily) {
			t.Errorf("error %v", f.Err())
		}
		_, _ = f.String(), f.Parameters() // a refused description prints without panic
	}
	for _, f := range families() {
		if f.Err() != nil {
			t.Errorf("%v: %v", f, f.Err())
		}
	}
}

func TestEvaluationAllocatesNothing(t *testing.T) {
	f := emissivity.Exponential(3).CentredOn(1 * µm)
	θ, grad := []float64{-0.7, 0.3, -0.2, 0.1}, make([]float64, 4)
	sink := 0.0
	if n := testing.AllocsPerRun(100, func() { sink += f.Emissivity(grad, θ, 0.8*µm) }); n != 0 {
		t.Errorf("%g allocations", n)
	}
}

func ExampleFamily() {
	f := emissivity.Polynomial(1).CentredOn(900 * pyro.Nanometre)
	fmt.Println(f, f.Parameters())
	fmt.Printf("%.3f\n", f.Emissivity(nil, []float64{0.40, -0.15}, 1100*pyro.Nanometre))
	// Output:
	// linear emissivity [level slope_per_um]
	// 0.370
}
