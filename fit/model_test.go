package fit_test

import (
	"math"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/sightline"
)

// Noise-free spectra of each physical model give temperature and parameters back.
func TestModelsRoundTrip(t *testing.T) {
	n, k := law(func(um float64) float64 { return 2.3 }), law(func(um float64) float64 { return 0.02 })
	metalN, metalK := law(func(um float64) float64 { return 2.5 + um }), law(func(um float64) float64 { return 3 + 1.5*um })
	film := emissivity.Film{N: n, K: k, SubstrateN: metalN, SubstrateK: metalK, Thickest: 1.5}
	for _, c := range []struct {
		name   string
		model  emissivity.Model
		θ      []float64
		lo, hi float64
		tight  float64
	}{
		{"Hagen–Rubens", emissivity.Fix(emissivity.HagenRubens{Reference: 1500}, "temperature_coefficient", 0.0009), []float64{60, 0.0009}, 5, 14, 1e-8},
		{"Drude", emissivity.Drude{}, []float64{40000, 600}, 2, 14, 1e-5},
		{"soot", emissivity.Soot{}, []float64{0.6, 1.39}, 0.5, 1.0, 1e-7},
		{"film", film, []float64{0.43}, 0.6, 2.2, 1e-8},
	} {
		t.Run(c.name, func(t *testing.T) {
			names := c.model.Parameters()
			bands := lines(t, c.lo, c.hi, 12)
			y := make([]float64, len(bands))
			for i, b := range bands {
				ε, _ := c.model.Emissivity(nil, c.θ, b.Mean(), 1500)
				y[i] = ε * planck(float64(b.Mean())*1e6, 1500)
			}
			r := estimate(t, bands, fit.Assume{Emissivity: c.model, Range: fit.Range{Min: 600, Max: 3500}}, fit.Readings{Signal: y, Std: scaled(y, 0.002)})
			T, state := r.Temperature()
			if state != fit.Determined {
				t.Fatalf("%v", r)
			}
			close(t, "T", float64(T)/1500, 1, c.tight)
			for k, p := range names {
				v, _, state := r.Parameter(p.Name)
				if state == fit.ParameterUndetermined {
					t.Errorf("%s: %v", p.Name, state)
				}
				close(t, p.Name, v/c.θ[k], 1, 1e3*c.tight)
			}
			t.Log(r)
		})
	}
}

// A surface that is wholly known leaves T alone to be found, past walls too; wide bands
// average it.
func TestAGivenSurface(t *testing.T) {
	curve := law(func(um float64) float64 { return 0.3 + 0.2*um*um })
	for _, half := range []float64{0, 0.05} {
		bands := lines(t, 0.9, 1.5, 4)
		if half > 0 {
			for i, b := range bands {
				var err error
				um := float64(b.Mean()) * 1e6
				if bands[i], err = pyro.FlatTop(pyro.Wavelength(um-half)*µm, pyro.Wavelength(um+half)*µm); err != nil {
					t.Fatal(err)
				}
			}
		}
		s := scene{T: 1400, ε: curve, walls: one(1200)}
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = s.read(b, half)
		}
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Given{Spectrum: curve}, Surroundings: sightline.Enclosure(input("wall", 1200, 5))},
			fit.Readings{Signal: y, Std: scaled(y, 0.002)})
		T, _ := determined(t, r)
		close(t, "T", T/1400, 1, 1e-8)
		if !strings.Contains(r.String(), "assumed") {
			t.Errorf("%v", r)
		}
	}
}

// A resistivity and its coefficient can't be told apart at one temperature: that is said.
func TestAModelWithTooManyParametersIsUndetermined(t *testing.T) {
	bands := lines(t, 5, 14, 8)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.1 * planck(float64(b.Mean())*1e6, 1200)
	}
	r := estimate(t, bands, fit.Assume{Emissivity: emissivity.HagenRubens{Reference: 300}}, fit.Readings{Signal: y, Std: scaled(y, 0.01)})
	if r.State() == fit.Determined || !strings.Contains(r.Undetermined(), "resistivity") {
		t.Errorf("%v: %q", r, r.Undetermined())
	}
	if math.IsNaN(func() float64 { c, _ := r.ChiSquared(); return c }()) {
		t.Error("χ² is NaN")
	}
}
