package emissivity_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// Tungsten from the CRC Handbook of Chemistry and Physics, 60th ed. (1979), p. E-381, a part.
func tungsten(t testing.TB) emissivity.Tabulated {
	t.Helper()
	table, err := emissivity.NewTabulated(
		[]pyro.Wavelength{0.6 * µm, 0.7 * µm, 0.9 * µm},
		[]pyro.Temperature{1600, 2000, 2400, 2800},
		[][]float64{{0.456, 0.448, 0.442, 0.434}, {0.445, 0.438, 0.430, 0.420}, {0.415, 0.404, 0.393, 0.383}}, 0.02)
	if err != nil {
		t.Fatal(err)
	}
	return table
}

func TestTableIsBilinear(t *testing.T) {
	w := tungsten(t)
	one := []float64{1}
	for _, row := range []struct {
		um, kelvin, ε, dT float64
	}{
		{0.6, 1600, 0.456, -0.008 / 400},                                 // a corner: the cell above
		{0.9, 2800, 0.383, -0.010 / 400},                                 // the last: the cell below
		{0.7, 2000, 0.438, -0.008 / 400},                                 // inside, on the grid
		{0.65, 1800, (0.456 + 0.448 + 0.445 + 0.438) / 4, -7.5e-3 / 400}, // middle of a cell
		{0.85, 2000, 0.25*0.438 + 0.75*0.404, -(0.25*0.008 + 0.75*0.011) / 400},
	} {
		ε, dT := w.Emissivity(nil, one, pyro.Wavelength(row.um)*µm, pyro.Temperature(row.kelvin))
		if math.Abs(ε-row.ε) > 1e-14 || math.Abs(dT-row.dT) > 1e-16 {
			t.Errorf("%g µm, %g K: %.15g, %g; want %.15g, %g", row.um, row.kelvin, ε, dT, row.ε, row.dT)
		}
		grad := make([]float64, 1)
		if half, _ := w.Emissivity(grad, []float64{0.5}, pyro.Wavelength(row.um)*µm, pyro.Temperature(row.kelvin)); math.Abs(half-row.ε/2) > 1e-14 || math.Abs(grad[0]-row.ε) > 1e-14 {
			t.Errorf("%g µm, %g K at a scale of a half: %g, gradient %g", row.um, row.kelvin, half, grad[0])
		}
	}
}

func TestTableSaysNothingOutside(t *testing.T) {
	w := tungsten(t)
	for _, at := range []struct {
		λ pyro.Wavelength
		t pyro.Temperature
	}{{0.59 * µm, 2000}, {0.91 * µm, 2000}, {0.7 * µm, 1599}, {0.7 * µm, 2801}, {pyro.Wavelength(math.NaN()), 2000}, {0.7 * µm, pyro.Temperature(math.NaN())}} {
		grad := make([]float64, 1)
		if ε, dT := w.Emissivity(grad, []float64{1}, at.λ, at.t); !math.IsNaN(ε) || !math.IsNaN(dT) || !math.IsNaN(grad[0]) {
			t.Errorf("%v, %v: %g, %g, %g", at.λ, at.t, ε, dT, grad[0])
		}
	}
	if lo, hi, cold, hot := w.Range(); lo != 0.6*µm || hi != 0.9*µm || cold != 1600 || hot != 2800 {
		t.Errorf("range %v to %v, %v to %v", lo, hi, cold, hot)
	}
}

func TestTablesScale(t *testing.T) {
	p := tungsten(t).Parameters()[0]
	if p.Prior != (emissivity.Prior{Value: 1, Std: 0.02, Set: true}) || math.Abs(p.Hi-1/0.383) > 1e-15 {
		t.Errorf("%+v", p)
	}
}

func TestBadTablesAreRefused(t *testing.T) {
	λ, kelvin := []pyro.Wavelength{1 * µm, 2 * µm}, []pyro.Temperature{1000, 2000}
	good := [][]float64{{0.3, 0.4}, {0.2, 0.3}}
	if _, err := emissivity.NewTabulated(λ, kelvin, good, 0); err != nil {
		t.Fatal(err)
	}
	for name, err := range map[string]error{
		"one wavelength":  second(emissivity.NewTabulated(λ[:1], kelvin, good[:1], 0)),
		"one temperature": second(emissivity.NewTabulated(λ, kelvin[:1], [][]float64{{0.3}, {0.2}}, 0)),
		"a row too few":   second(emissivity.NewTabulated(λ, kelvin, good[:1], 0)),
		"a short row":     second(emissivity.NewTabulated(λ, kelvin, [][]float64{{0.3, 0.4}, {0.2}}, 0)),
		"falling λ":       second(emissivity.NewTabulated([]pyro.Wavelength{2 * µm, 1 * µm}, kelvin, good, 0)),
		"falling T":       second(emissivity.NewTabulated(λ, []pyro.Temperature{2000, 2000}, good, 0)),
		"per cent":        second(emissivity.NewTabulated(λ, kelvin, [][]float64{{30, 40}, {20, 30}}, 0)),
		"NaN":             second(emissivity.NewTabulated(λ, kelvin, [][]float64{{0.3, math.NaN()}, {0.2, 0.3}}, 0)),
		"negative std":    second(emissivity.NewTabulated(λ, kelvin, good, -1)),
	} {
		if !errors.Is(err, emissivity.ErrModel) {
			t.Errorf("%s: error %v", name, err)
		}
	}
}

func second(_ emissivity.Tabulated, err error) error { return err }

func TestTableKeepsCopies(t *testing.T) {
	λ, kelvin := []pyro.Wavelength{1 * µm, 2 * µm}, []pyro.Temperature{1000, 2000}
	ε := [][]float64{{0.3, 0.4}, {0.2, 0.3}}
	table, err := emissivity.NewTabulated(λ, kelvin, ε, 0)
	if err != nil {
		t.Fatal(err)
	}
	λ[0], kelvin[0], ε[0][0] = 0, 0, 9
	if v, _ := table.Emissivity(nil, []float64{1}, 1*µm, 1000); v != 0.3 {
		t.Errorf("the table followed the caller's slice: %g", v)
	}
}

func ExampleNewTabulated() {
	w, err := emissivity.NewTabulated(
		[]pyro.Wavelength{600 * pyro.Nanometre, 700 * pyro.Nanometre},
		[]pyro.Temperature{1600 * pyro.Kelvin, 2000 * pyro.Kelvin},
		[][]float64{{0.456, 0.448}, {0.445, 0.438}}, // CRC Handbook, 60th ed., p. E-381
		0.05)
	if err != nil {
		fmt.Println(err)
		return
	}
	ε, dT := w.Emissivity(nil, []float64{1}, 650*pyro.Nanometre, 1800*pyro.Kelvin)
	fmt.Printf("%.4f, %.2g per K\n", ε, dT)
	// Output: 0.4467, -1.9e-05 per K
}
