package fit_test

import (
	"errors"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

func hasNote(r *fit.Result, words string) bool {
	for _, n := range r.Notes() {
		if strings.Contains(n, words) {
			return true
		}
	}
	return false
}

// The fill of the field cancels in a ratio only where the rest of the field is dark enough.
func TestWhetherTheFillCancels(t *testing.T) {
	bands := lines(t, 0.8, 1.0, 2)
	for _, c := range []struct {
		rest float64
		says string
	}{{600, "cancels in the ratio"}, {1400, "does not cancel"}} {
		s := scene{T: 1500, ε: func(float64) float64 { return 0.5 }, fill: 0.7, rest: c.rest}
		y := []float64{s.read(bands[0], 0), s.read(bands[1], 0)}
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().Relative(),
			Field: sightline.Field{Fraction: input("fill", 0.7, 0.2), Rest: input("rest", c.rest, 10)}}, fit.Readings{Signal: y, Std: scaled(y, 0.005)})
		if !hasNote(r, c.says) {
			t.Errorf("rest at %g K: %q", c.rest, r.Notes())
		}
	}
}

// A grating passes its second order: a note says so where the channels span an octave.
func TestTheSecondOrderIsMentioned(t *testing.T) {
	for _, c := range []struct {
		hi   float64
		note bool
	}{{0.95, false}, {1.2, true}} {
		bands := lines(t, 0.5, c.hi, 6)
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = 0.5 * b.Radiance(1800)
		}
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey(), Stray: input("stray light", 0.001, 0.001)}, fit.Readings{Signal: y, Std: scaled(y, 0.01)})
		if got := hasNote(r, "second order"); got != c.note {
			t.Errorf("to %g µm: note %v in %q", c.hi, got, r.Notes())
		}
	}
}

// A wall's figure of 1150 without a unit, beside a load of 1300 K, may be in °C: the sign of
// its effect would turn round. With its unit declared there is nothing to ask.
func TestAWallInCelsiusIsSuspected(t *testing.T) {
	bands := lines(t, 1.6, 1.6, 1)
	s := scene{T: 1300, ε: func(float64) float64 { return 0.8 }, walls: one(1150)}
	y := []float64{s.radiance(1.6)}
	for unit, suspected := range map[string]bool{"": true, "K": false} {
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.8, 0.02),
			Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall", Unit: unit, Value: 1150, Std: 10})}, fit.Readings{Signal: y, Std: scaled(y, 0.005)})
		if got := hasNote(r, "in °C"); got != suspected {
			t.Errorf("unit %q: %q", unit, r.Notes())
		}
	}
}

// A bound among the readings is named.
func TestBoundsAreNamed(t *testing.T) {
	bands := lines(t, 0.9, 1.0, 2)
	limit := 0.5 * bands[0].Radiance(1500)
	constant := detector.NoiseModel{Constant: 1e-6 * limit * limit}
	r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.5, 0.05), Range: fit.Range{Min: 600, Max: 3000},
		Detectors: []detector.Channel{{Saturation: limit, Noise: constant}, {Noise: constant}}},
		fit.Readings{Signal: []float64{limit, 0.5 * bands[1].Radiance(1600)}})
	if !hasNote(r, "upper end") {
		t.Errorf("%q", r.Notes())
	}
}

func TestAverageRefusesWhatHasNoUncertainty(t *testing.T) {
	bands := lines(t, 0.9, 1.0, 2)
	y := []float64{0.5 * bands[0].Radiance(1500), 0.5 * bands[1].Radiance(1500)}
	read := func(f emissivity.Family) *fit.Result {
		return estimate(t, bands, fit.Assume{Emissivity: f}, fit.Readings{Signal: y, Std: scaled(y, 0.01)})
	}
	good, other := read(emissivity.Grey().WithPrior("level", 0.5, 0.05)), read(emissivity.Grey().WithPrior("level", 0.5, 0.1))
	open := estimate(t, bands[:1], fit.Assume{Emissivity: emissivity.Grey()}, fit.Readings{Signal: y[:1], Std: scaled(y[:1], 0.01)})
	for name, list := range map[string][]*fit.Result{"none": nil, "one without": {good, open}, "of two estimators": {good, other}} {
		if _, err := fit.Average(list); !errors.Is(err, fit.ErrMean) {
			t.Errorf("%s: %v", name, err)
		}
	}
	m, err := fit.Average([]*fit.Result{good, good, good, good})
	if err != nil {
		t.Fatal(err)
	}
	one, u := determined(t, good)
	a, b, _ := good.Split()
	close(t, "mean", float64(m.T), one, 1e-9)
	close(t, "repeatability of four", m.RepeatabilityK, a/2, 1e-9)
	close(t, "what they share", m.SharedK, b, 1e-9)
	if !(m.StdK < u) || m.Readings != 4 {
		t.Errorf("%+v of u = %g", m, u)
	}
	lo, hi := m.Interval(0.95)
	close(t, "interval", float64(hi-lo), 2*1.959963984540054*m.StdK, 1e-9)
}
