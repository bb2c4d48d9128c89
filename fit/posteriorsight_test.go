package fit_test

import (
	"errors"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// With a spread of nothing a process is a given curve: behind walls, a window, a detector, its
// posterior is the profile of the model that has the same curve, inputs' uncertainties
// included, to what the second order of their effects leaves.
func TestPosteriorBehindASight(t *testing.T) {
	curve := law(func(um float64) float64 { return 0.55 - 0.1*(um-1.2) })
	bands := lines(t, 0.9, 1.6, 8)
	s := scene{T: 1500, ε: curve, walls: one(1250), τ: func(float64) float64 { return 0.9 }}
	y := make([]float64, len(bands))
	detectors := make([]detector.Channel, len(bands))
	gain, axis := input("gain", 3, 0.02), input("axis", 0, 0.5e-9)
	for i, b := range bands {
		y[i] = 3 * s.read(b, 0)
		detectors[i] = detector.Channel{Gain: gain, Wavelength: detector.Axis(axis, nil, b.Mean())}
	}
	known := 1.0 // of what is shared, in its standard uncertainties
	run := func(surface emissivity.Surface) *fit.Result {
		gain.Std, axis.Std = 0.02*known, 0.5e-9*known
		return estimate(t, bands, fit.Assume{
			Emissivity:   surface,
			Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall", Value: 1200, Std: 10, PerReading: true}),
			Path:         []sightline.Layer{sightline.Window(input("window", 0.9, 0.01*known))},
			Detectors:    detectors,
			Range:        fit.Range{Min: 800, Max: 2500},
		}, fit.Readings{Signal: y, Std: scaled(y, 0.004), Inputs: []float64{1250}})
	}
	T1, u1 := determined(t, run(emissivity.Given{Spectrum: curve}))
	T2, u2 := determined(t, run(emissivity.About("the curve", curve, 0)))
	close(t, "T", T2, T1, 0.02*u1)
	close(t, "u", u2, u1, 0.02*u1)

	// The surface that nobody knows, behind the same: wider, and the truth inside.
	r := run(emissivity.Unknown())
	_, u3 := determined(t, r)
	iv, _ := r.Interval()
	if !(u3 > u1) || iv.Low > 1500 || iv.High < 1500 {
		t.Errorf("%v", r)
	}
	t.Log(r)
	// What is shared matters: without it the given curve's u is smaller, in both ways alike.
	known = 0
	_, v1 := determined(t, run(emissivity.Given{Spectrum: curve}))
	_, v2 := determined(t, run(emissivity.About("the curve", curve, 0)))
	close(t, "u without what is shared", v2, v1, 0.02*v1)
	if !(v1 < 0.9*u1) {
		t.Errorf("u %g K with what is shared, %g K without", u1, v1)
	}
}

// A spread of the temperature over the field is refused, not passed over.
func TestAProcessRefusesASpreadTemperature(t *testing.T) {
	_, err := fit.New(lines(t, 0.9, 1.6, 6), fit.Assume{Emissivity: emissivity.Unknown(), Field: sightline.Field{Spread: input("spread", 20, 5)}})
	if !errors.Is(err, fit.ErrAssume) {
		t.Errorf("%v", err)
	}
}

// A surface that sees its like: the process is of its own emissivity, not the apparent one.
func TestPosteriorOfPiecesThatSeeEachOther(t *testing.T) {
	curve := law(func(um float64) float64 { return 0.5 })
	bands := lines(t, 0.9, 1.6, 6)
	s := scene{T: 1400, ε: curve, walls: []struct{ factor, T float64 }{{0.7, 1000}}, self: 0.3}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = s.read(b, 0)
	}
	r := estimate(t, bands, fit.Assume{Emissivity: emissivity.About("the curve", curve, 0), Range: fit.Range{Min: 800, Max: 2500},
		Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{{Name: "roof", Factor: input("F", 0.7, 0), Temperature: input("roof", 1000, 0)}}}},
		fit.Readings{Signal: y, Std: scaled(y, 0.004)})
	T, u := determined(t, r)
	close(t, "T", T, 1400, 0.02*u)
}
