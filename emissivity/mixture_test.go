package emissivity_test

import (
	"fmt"
	"math"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

func TestMixtureIsBetweenItsParts(t *testing.T) {
	scale, metal := emissivity.Given{Spectrum: emissivity.Constant(0.85)}, emissivity.HagenRubens{}
	m, err := emissivity.NewMixture(scale, metal)
	if err != nil {
		t.Fatal(err)
	}
	names := []string{"fraction", "b.resistivity", "b.temperature_coefficient"}
	for k, p := range m.Parameters() {
		if p.Name != names[k] {
			t.Errorf("parameter %d is %s", k, p.Name)
		}
	}
	bare, dBare := metal.Emissivity(nil, []float64{30, 0.004}, 5*µm, 1500)
	for _, f := range []float64{0, 0.25, 1} {
		ε, dT := m.Emissivity(nil, []float64{f, 30, 0.004}, 5*µm, 1500)
		if want := f*0.85 + (1-f)*bare; math.Abs(ε-want) > 1e-15 || math.Abs(dT-(1-f)*dBare) > 1e-18 {
			t.Errorf("f = %g: %g, %g; want %g, %g", f, ε, dT, want, (1-f)*dBare)
		}
	}
}

// What is known of a part is known in the mixture.
func TestMixtureKeepsPriors(t *testing.T) {
	m, err := emissivity.NewMixture(emissivity.Fix(emissivity.Soot{}, "alpha", 1.2), emissivity.Drude{})
	if err != nil {
		t.Fatal(err)
	}
	known := emissivity.WithPrior(m, "fraction", 0.3, 0.1)
	if err := known.Err(); err != nil {
		t.Fatal(err)
	}
	p := known.Parameters()
	if p[0].Prior.Std != 0.1 || p[2].Name != "a.alpha" || p[2].Prior != (emissivity.Prior{Value: 1.2, Set: true}) {
		t.Errorf("%+v", p)
	}
}

func ExampleNewMixture() {
	// Patches of dark scale on clean metal (both values invented).
	m, err := emissivity.NewMixture(
		emissivity.Given{Spectrum: emissivity.Constant(0.85)},
		emissivity.Given{Spectrum: emissivity.Constant(0.35)})
	if err != nil {
		fmt.Println(err)
		return
	}
	grad := make([]float64, 1)
	ε, _ := m.Emissivity(grad, []float64{0.2}, 900*pyro.Nanometre, 1400*pyro.Kelvin)
	fmt.Printf("ε = %.2f, ∂ε/∂%s = %.2f\n", ε, m.Parameters()[0].Name, grad[0])
	// Output: ε = 0.45, ∂ε/∂fraction = 0.50
}
