package emissivity_test

import (
	"fmt"
	"math"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// Plasma and damping wavenumbers of M. A. Ordal et al., Appl. Opt. 24 (1985) 4493, their
// table of Drude parameters; resistivity in µΩ cm and ε at 1, 2, 5, 10 and 20 µm computed from
// them in double precision elsewhere, digits as printed there.
var drudeTable = []struct {
	metal       string
	plasma      float64
	damping     float64
	resistivity float64
	ε           [5]float64
}{
	{"Ag", 72700, 145, 1.6449, [5]float64{.004019, .003990, .003980, .003971, .003941}},
	{"Al", 119000, 660, 2.7945, [5]float64{.011064, .011017, .010890, .010525, .009579}},
	{"Au", 72800, 215, 2.4324, [5]float64{.005945, .005902, .005883, .005856, .005764}},
	{"Co", 32000, 295, 17.2732, [5]float64{.019220, .018486, .018255, .018088, .017583}},
	{"Cu", 59600, 73.2, 1.2356, [5]float64{.002489, .002462, .002454, .002452, .002447}},
	{"Fe", 33000, 147, 8.0936, [5]float64{.009305, .008972, .008880, .008850, .008779}},
	{"Mo", 60200, 412, 6.8164, [5]float64{.013782, .013630, .013532, .013329, .012695}},
	{"Ni", 39400, 352, 13.5957, [5]float64{.018301, .017842, .017665, .017457, .016807}},
	{"Pb", 59400, 1630, 27.6991, [5]float64{.053986, .052929, .050026, .044470, .036287}},
	{"Pd", 44000, 124, 3.8403, [5]float64{.005771, .005657, .005624, .005611, .005579}},
	{"Pt", 41500, 558, 19.4262, [5]float64{.027318, .026685, .026317, .025639, .023775}},
	{"Ti", 20300, 382, 55.5804, [5]float64{.042318, .038061, .036951, .036358, .034808}},
	{"V", 41600, 489, 16.9423, [5]float64{.023922, .023376, .023095, .022619, .021240}},
	{"W", 51700, 487, 10.9244, [5]float64{.019013, .018728, .018543, .018168, .017066}},
}

func TestDrudeTableOfFourteenMetals(t *testing.T) {
	const half6, half4 = 0.5e-6 + 1e-12, 0.5e-4 + 1e-9 // half a unit of the last printed digit
	for _, row := range drudeTable {
		θ := []float64{row.plasma, row.damping}
		for i, um := range []float64{1, 2, 5, 10, 20} {
			ε, dT := emissivity.Drude{}.Emissivity(nil, θ, pyro.Wavelength(um)*µm, 300)
			if math.Abs(ε-row.ε[i]) > half6 || dT != 0 {
				t.Errorf("%s at %g µm: %.8f, want %.6f", row.metal, um, ε, row.ε[i])
			}
		}
		if ρ := (emissivity.Drude{}).Resistivity(θ); math.Abs(ρ-row.resistivity) > half4 {
			t.Errorf("%s: %.6f µΩ cm, want %.4f", row.metal, ρ, row.resistivity)
		}
	}
}

// Where 1/λ is far below the damping, Drude's metal is Hagen and Rubens's with the
// resistivity that Drude's parameters imply. The next order is ν/2ντ relative.
func TestDrudeBecomesHagenRubens(t *testing.T) {
	for _, row := range drudeTable {
		θ := []float64{row.plasma, row.damping}
		λ := pyro.Wavenumber(row.damping / 1e5)
		drude, _ := emissivity.Drude{}.Emissivity(nil, θ, λ, 300)
		rubens, _ := emissivity.HagenRubens{Resistivity: emissivity.Drude{}.Resistivity(θ)}.Emissivity(nil, nil, λ, 300)
		if math.Abs(drude/rubens-1) > 1e-5 {
			t.Errorf("%s at %v: Drude %.9g, Hagen–Rubens %.9g", row.metal, λ, drude, rubens)
		}
	}
}

// Worked values of Hagen and Rubens's formula, computed to 50 digits elsewhere; resistivities of
// tungsten from the CRC Handbook of Chemistry and Physics, 60th ed. (1979), p. E-381.
func TestHagenRubensWorkedValues(t *testing.T) {
	const half = 0.5e-7 + 1e-10 // half a unit of the last printed digit; Z₀ moves it by 1e-10
	for _, row := range []struct {
		name string
		ρ    float64 // µΩ cm
		ε    [3]float64
	}{
		{"W, 300 K", 5.65, [3]float64{0.0380827, 0.0270821, 0.0192271}},
		{"W, 2000 K", 56.67, [3]float64{0.1156442, 0.0832568, 0.0596254}},
		{"W, 3000 K", 92.04, [3]float64{0.1449188, 0.1048470, 0.0753497}},
		{"10 µΩ cm", 10, [3]float64{0.0503406, 0.0358664, 0.0254974}},
	} {
		for i, um := range []float64{5, 10, 20} {
			ε, _ := emissivity.HagenRubens{Resistivity: row.ρ}.Emissivity(nil, nil, pyro.Wavelength(um)*µm, 300)
			if math.Abs(ε-row.ε[i]) > half {
				t.Errorf("%s at %g µm: %.9f, want %.7f", row.name, um, ε, row.ε[i])
			}
		}
	}
}

// The series in q = √(ρ/λ) (Ω m and m, or Ω cm and cm), coefficients to the digits printed
// elsewhere from a 50-digit expansion; Foote's textbook form has 0.365, 0.0667 and 0.006.
// The next term, of the closed form's own expansion, is below 3e-4·q⁵.
func TestHagenRubensSeries(t *testing.T) {
	for _, q := range []float64{1e-3, 3e-3, 1e-2, 3e-2} {
		ρ := q * q * 5e-6 / 1e-8 // µΩ cm at 5 µm
		ε, _ := emissivity.HagenRubens{Resistivity: ρ}.Emissivity(nil, nil, 5*µm, 300)
		series := 0.36527474*q - 0.066712819*q*q + 0.006092127*q*q*q
		if math.Abs(ε-series) > 1e-8*q+3e-4*q*q*q*q*q {
			t.Errorf("q = %g: %.12g, series %.12g", q, ε, series)
		}
	}
}

func TestHagenRubensFollowsTheResistivity(t *testing.T) {
	h := emissivity.HagenRubens{Reference: 300}
	// straight line from 5.65 µΩ cm at 300 K to 56.67 at 2000 K
	θ := []float64{5.65, (56.67/5.65 - 1) / 1700}
	if ε, dT := h.Emissivity(nil, θ, 10*µm, 2000); math.Abs(ε-0.0832568) > 0.5e-7 || !(dT > 0) {
		t.Errorf("W at 2000 K: %.8f, %g/K", ε, dT)
	}
	if ε, dT := h.Emissivity(nil, []float64{5, 0.01}, 10*µm, 150); !math.IsNaN(ε) || !math.IsNaN(dT) {
		t.Errorf("a negative resistivity gave %g, %g", ε, dT)
	}
}

func ExampleHagenRubens() {
	// Tungsten at 2000 K, 10 µm, with 5.65 µΩ cm at 300 K and 56.67 µΩ cm at 2000 K.
	w := emissivity.HagenRubens{Reference: 300 * pyro.Kelvin}
	ε, dT := w.Emissivity(nil, []float64{5.65, 0.0053118}, 10*pyro.Micrometre, 2000*pyro.Kelvin)
	fmt.Printf("ε = %.4f, rising by %.2g per K\n", ε, dT)
	// Output: ε = 0.0833, rising by 2.1e-05 per K
}

func ExampleDrude() {
	// Tungsten's parameters of Ordal et al. (1985): fair at 10 µm, useless at 1 µm,
	// where the metal has 0.43.
	for _, λ := range []pyro.Wavelength{1 * pyro.Micrometre, 10 * pyro.Micrometre} {
		ε, _ := emissivity.Drude{}.Emissivity(nil, []float64{51700, 487}, λ, 300*pyro.Kelvin)
		fmt.Printf("%v %.6f\n", λ, ε)
	}
	// Output:
	// 1 µm 0.019013
	// 10 µm 0.018168
}
