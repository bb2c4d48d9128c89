package fit_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

func TestBadReadingsSayWhichAndWhatToDo(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 4)
	given, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey()})
	if err != nil {
		t.Fatal(err)
	}
	relative, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Noise: fit.Relative(0.01)})
	if err != nil {
		t.Fatal(err)
	}
	ok := []float64{1e9, 2e9, 3e9, 4e9}
	with := func(i int, v float64) []float64 {
		y := append([]float64(nil), ok...)
		y[i] = v
		return y
	}
	for _, c := range []struct {
		name    string
		e       *fit.Estimator
		r       fit.Readings
		channel int // −1: no single one
		words   string
	}{
		{"NaN", given, fit.Readings{Signal: with(2, math.NaN()), Std: ok}, 2, "leave the channel out"},
		{"Inf", given, fit.Readings{Signal: with(1, math.Inf(1)), Std: ok}, 1, "leave the channel out"},
		{"σ of 0", given, fit.Readings{Signal: ok, Std: with(3, 0)}, 3, "must be positive"},
		{"negative σ", given, fit.Readings{Signal: ok, Std: with(0, -1)}, 0, "must be positive"},
		{"NaN σ", given, fit.Readings{Signal: ok, Std: with(0, math.NaN())}, 0, "must be positive"},
		{"infinite σ", given, fit.Readings{Signal: ok, Std: with(0, math.Inf(1))}, 0, "leave out"},
		{"empty", given, fit.Readings{}, -1, "0 signals for 4 bands"},
		{"too few", given, fit.Readings{Signal: ok[:3], Std: ok[:3]}, -1, "3 signals for 4 bands"},
		{"σ missing", given, fit.Readings{Signal: ok}, -1, "give one for each reading, or declare Noise"},
		{"σ twice", relative, fit.Readings{Signal: ok, Std: ok}, -1, "leave Std nil"},
		{"all zero", given, fit.Readings{Signal: make([]float64, 4), Std: ok}, -1, "every signal is 0"},
		{"zero under relative noise", relative, fit.Readings{Signal: with(1, 0)}, 1, "declare a floor"},
	} {
		_, err := c.e.Estimate(c.r)
		if !errors.Is(err, fit.ErrReadings) || !strings.Contains(err.Error(), c.words) {
			t.Errorf("%s: %v", c.name, err)
		}
		var one *fit.ReadingError
		if c.channel >= 0 && (!errors.As(err, &one) || one.Channel != c.channel) {
			t.Errorf("%s: %v does not name channel %d", c.name, err, c.channel)
		}
	}
}

func TestBadAssumptionsAreRefused(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 4)
	open, err := pyro.Tabulated([]pyro.Wavelength{0.7 * µm, 0.9 * µm}, []float64{1, 1}, pyro.PerWatt)
	if err != nil {
		t.Fatal(err)
	}
	grey := emissivity.Grey()
	for name, c := range map[string]struct {
		bands []*pyro.Band
		a     fit.Assume
	}{
		"no bands":                 {nil, fit.Assume{Emissivity: grey}},
		"a nil band":               {[]*pyro.Band{nil}, fit.Assume{Emissivity: grey}},
		"one band, nothing known":  {bands[:1], fit.Assume{}},
		"order 4":                  {bands, fit.Assume{Emissivity: emissivity.Polynomial(4)}},
		"noise in per cent":        {bands, fit.Assume{Emissivity: grey, Noise: fit.Relative(1)}},
		"no noise at all":          {bands, fit.Assume{Emissivity: grey, Noise: fit.Relative(0)}},
		"range upside down":        {bands, fit.Assume{Emissivity: grey, Range: fit.Range{Min: 2000, Max: 1000}}},
		"range in °C from 0":       {bands, fit.Assume{Emissivity: grey, Range: fit.Range{Min: 0, Max: 1000}}},
		"temperature out of range": {bands, fit.Assume{Emissivity: grey, Temperature: fit.TemperaturePrior{Value: 25, StdK: 1}}},
		"covariance of wrong size": {bands, fit.Assume{Emissivity: grey, Noise: fit.Covariance(make([]float64, 9))}},
		"covariance of zeros":      {bands, fit.Assume{Emissivity: grey, Noise: fit.Covariance(make([]float64, 16))}},
		"everything masked":        {bands, fit.Assume{Emissivity: grey, Masks: []fit.Mask{{Name: "all", Lo: 0.1 * µm, Hi: 2 * µm}}}},
		"shared of wrong length":   {bands, fit.Assume{Emissivity: grey, Shared: []fit.Shared{fit.SharedScale("x", 0.1, 3)}}},
		"shared of nothing":        {bands, fit.Assume{Emissivity: grey, Shared: []fit.Shared{{Name: "x"}}}},
		"probability in per cent":  {bands, fit.Assume{Emissivity: grey, Probability: 95}},
		"loss of shape 0":          {bands, fit.Assume{Emissivity: grey, Loss: fit.Huber(0)}},
		"a table that ends open":   {[]*pyro.Band{open}, fit.Assume{Emissivity: grey}},
	} {
		if _, err := fit.New(c.bands, c.a); !errors.Is(err, fit.ErrAssume) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// TestWrongUnitsAreSuspected: readings too small or too large by 1e3 or more, where the
// spectrum's shape fixes T, give an emissivity that no surface has.
func TestWrongUnitsAreSuspected(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 8)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Noise: fit.Relative(0.005)})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range []float64{1e-9, 1e-6, 1e-3, 1e3, 1e6, 1e9} {
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = f * 0.7 * b.Radiance(1500)
		}
		_, err := e.Estimate(fit.Readings{Signal: y})
		var unit *fit.UnitError
		if !errors.As(err, &unit) || math.Abs(unit.Level/(0.7*f)-1) > 0.05 {
			t.Errorf("readings times %g: %v", f, err)
		}
	}
	for _, f := range []float64{0.05, 0.5, 1, 1.4} { // possible surfaces, and a calibration that is off
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = f * 0.7 * b.Radiance(1500)
		}
		if _, err := e.Estimate(fit.Readings{Signal: y}); err != nil {
			t.Errorf("level %g: %v", 0.7*f, err)
		}
	}
}

// TestNegativeAndZeroReadingsAreUsed: with a σ they are data like others.
func TestNegativeAndZeroReadingsAreUsed(t *testing.T) {
	bands := lines(t, 0.5, 1.0, 6)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey()})
	if err != nil {
		t.Fatal(err)
	}
	y, u := make([]float64, len(bands)), make([]float64, len(bands))
	for i, b := range bands {
		y[i], u[i] = 0.7*b.Radiance(1100), 0.01*bands[5].Radiance(1100)
	}
	y[0], y[1] = -0.3*u[0], 0
	r, err := e.Estimate(fit.Readings{Signal: y, Std: u})
	if err != nil {
		t.Fatal(err)
	}
	iv, _ := r.Interval()
	if iv.LowOpen || iv.Low > 1100 || iv.High < 1100 {
		t.Errorf("%v", r)
	}
	// Without the two the upper end is looser: they say that nothing shines at 0.5 and 0.6 µm.
	few, err := fit.New(bands[2:], fit.Assume{Emissivity: emissivity.Grey()})
	if err != nil {
		t.Fatal(err)
	}
	s, err := few.Estimate(fit.Readings{Signal: y[2:], Std: u[2:]})
	if err != nil {
		t.Fatal(err)
	}
	if w, _ := s.Interval(); !(iv.High < w.High) {
		t.Errorf("with the weak channels up to %v, without up to %v", iv.High, w.High)
	}
}
