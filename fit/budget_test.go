package fit_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// TestBudgetAgainstMovedInputs moves each input by its standard uncertainty, up and down, and
// estimates again: half the difference is its signed share, to second order.
func TestBudgetAgainstMovedInputs(t *testing.T) {
	type values struct{ wall, rest, gain, axis, window, slope, fill, level, dark, self float64 }
	u := values{wall: 4, rest: 6, gain: 0.004, axis: 0.2e-9, window: 0.005, slope: 0.02, fill: 0.006, level: 0.01, dark: 2e5, self: 0.01}
	at := values{wall: 1300, rest: 1200, gain: 1.1, axis: 0, window: 0.9, slope: 0.1, fill: 0.85, level: 0.75, dark: 1e6, self: 0.7}
	bands := lines(t, 0.9, 1.6, 4)
	var y []float64
	run := func(v values) *fit.Result {
		detectors := make([]detector.Channel, len(bands))
		gain, axis, dark := input("gain", v.gain, u.gain), input("axis", v.axis, u.axis), input("dark", v.dark, u.dark)
		for i, b := range bands {
			detectors[i] = detector.Channel{Gain: gain, Dark: dark, Wavelength: detector.Axis(axis, nil, b.Mean())}
		}
		a := fit.Assume{
			Emissivity: emissivity.Grey().WithPrior("level", v.level, u.level),
			Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{
				{Name: "roof", Factor: input("view factor", v.self, u.self), Temperature: input("wall", v.wall, u.wall)}}},
			Path:      []sightline.Layer{sightline.Fouling(input("window", v.window, u.window), input("slope", v.slope, u.slope), 1.2*µm)},
			Field:     sightline.Field{Fraction: input("fill", v.fill, u.fill), Rest: input("rest", v.rest, u.rest)},
			Detectors: detectors,
			Range:     fit.Range{Min: 900, Max: 2200},
		}
		if y == nil {
			s := scene{T: 1500, ε: func(float64) float64 { return v.level }, walls: []struct{ factor, T float64 }{{v.self, v.wall}}, self: 1 - v.self,
				fill: v.fill, rest: v.rest, τ: func(um float64) float64 { return v.window * math.Pow(um/1.2, v.slope) }}
			for _, b := range bands {
				y = append(y, v.dark+v.gain*s.read(b, 0))
			}
		}
		return estimate(t, bands, a, fit.Readings{Signal: y, Std: scaled(y, 0.003)})
	}
	r := run(at)
	T0, u0 := determined(t, r)
	close(t, "T", T0, 1500, 1e-6)
	share := map[string]fit.Share{}
	squares := 0.0
	for _, s := range r.Budget() {
		share[s.Name] = s
		squares += s.StdK * s.StdK
	}
	close(t, "root of the squares", math.Sqrt(squares), u0, 1e-9*u0)
	for name, move := range map[string]func(*values, float64){
		"wall": func(v *values, f float64) { v.wall += f * u.wall }, "rest": func(v *values, f float64) { v.rest += f * u.rest },
		"gain": func(v *values, f float64) { v.gain += f * u.gain }, "axis": func(v *values, f float64) { v.axis += f * u.axis },
		"window": func(v *values, f float64) { v.window += f * u.window }, "slope": func(v *values, f float64) { v.slope += f * u.slope },
		"fill": func(v *values, f float64) { v.fill += f * u.fill }, "prior on level": func(v *values, f float64) { v.level += f * u.level },
		"dark": func(v *values, f float64) { v.dark += f * u.dark }, "view factor": func(v *values, f float64) { v.self += f * u.self },
	} {
		// A wavelength axis that is declared moved is moved bands; its effect is tested apart.
		if name == "axis" {
			continue
		}
		up, down := at, at
		move(&up, 1)
		move(&down, -1)
		Tu, _ := determined(t, run(up))
		Td, _ := determined(t, run(down))
		s := share[name]
		// What is left is of the third order of the move, and of its cross terms.
		close(t, name, (Tu-Td)/2, s.EffectK, 0.02*math.Abs(s.EffectK)+1e-4)
		close(t, name+" without sign", s.StdK, math.Abs(s.EffectK), 1e-9)
		t.Logf("%-15s share %+.4f K, estimated again %+.4f K", name, s.EffectK, (Tu-Td)/2)
	}
}

// A band whose centre is off by 1 nm reads too high or too low by what the gain, found at the
// copper point, doesn't take back.
func TestAWavelengthErrorActsTwice(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	y := []float64{planck(0.9, 2000)}
	for _, c := range []struct {
		at   pyro.Temperature
		want func(Δ float64) float64
	}{
		{0, func(Δ float64) float64 { return planck(0.9+Δ, 2000) / planck(0.9, 2000) }},
		{1357.77, func(Δ float64) float64 {
			return planck(0.9+Δ, 2000) / planck(0.9, 2000) * planck(0.9, 1357.77) / planck(0.9+Δ, 1357.77)
		}},
		{2000, func(float64) float64 { return 1 }},
	} {
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 1), Detectors: []detector.Channel{{
			Wavelength: detector.Axis(input("axis", 0, 1e-9), nil, 0.9*µm), CalibratedAt: c.at}}}, fit.Readings{Signal: y, Std: scaled(y, 1e-4)})
		got := 0.0
		for _, s := range r.Budget() {
			if s.Name == "axis" {
				got = s.EffectK
			}
		}
		// If the axis is one nanometre further out, the same signal means another temperature.
		const d = 1e-4
		slope := (math.Log(planck(0.9, 2001)) - math.Log(planck(0.9, 1999))) / 2
		want := -(math.Log(c.want(d*1e0)) - math.Log(c.want(-d))) / (2 * d) * 1e-3 / slope
		close(t, "effect of 1 nm", got, want, 1e-4*math.Abs(want)+1e-9)
	}
}

// A rectangular band that is 2 % wider than believed reads what its gain, found at the copper
// point, doesn't take back.
func TestAnUncertainWidthActsTwice(t *testing.T) {
	read := func(half, T float64) float64 {
		s := scene{T: T, ε: func(float64) float64 { return 1 }}
		b, err := pyro.Line(0.9 * µm)
		if err != nil {
			t.Fatal(err)
		}
		return s.read(b, half)
	}
	const half = 0.02
	for _, at := range []pyro.Temperature{0, 1357.77} {
		band, err := pyro.FlatTop(0.88*µm, 0.92*µm)
		if err != nil {
			t.Fatal(err)
		}
		y := []float64{read(half, 2000)}
		width := half * 1e-6 / math.Sqrt(3)
		r := estimate(t, []*pyro.Band{band}, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 1), Detectors: []detector.Channel{{
			Width: input("width", width, 0.02*width), CalibratedAt: at}}}, fit.Readings{Signal: y, Std: scaled(y, 1e-4)})
		got := 0.0
		for _, s := range r.Budget() {
			if s.Name == "width" {
				got = s.EffectK
			}
		}
		change := math.Log(read(half*1.02, 2000) / read(half, 2000))
		if at > 0 {
			change -= math.Log(read(half*1.02, float64(at)) / read(half, float64(at)))
		}
		slope := (math.Log(read(half, 2001)) - math.Log(read(half, 1999))) / 2
		want := -change / slope
		close(t, "effect of the width", got, want, 0.03*math.Abs(want))
		t.Logf("calibrated at %v: %.4f K, by integration %.4f K", at, got, want)
	}
}

// TestTheWorkedFiniteErrors compares with finite errors computed from Planck's law for one
// wavelength (source: the monochromatic equations solved in double precision, seven digits).
func TestTheWorkedFiniteErrors(t *testing.T) {
	at := func(um, signal, ε, wall float64) float64 {
		t.Helper()
		a := fit.Assume{Emissivity: emissivity.Grey().Fix("level", ε)}
		if wall > 0 {
			a.Surroundings = sightline.Enclosure(input("wall", wall, 0))
		}
		y := []float64{signal}
		T, _ := determined(t, estimate(t, lines(t, um, um, 1), a, fit.Readings{Signal: y, Std: scaled(y, 1e-4)}))
		return T
	}
	for _, c := range []struct{ T, true_, set, um, want float64 }{
		{1273.15, 0.80, 1, 0.9, 1250.9199}, {1273.15, 0.80, 1, 1.6, 1234.1883}, {1273.15, 0.80, 1, 3.9, 1186.3340},
		{1273.15, 0.80, 1, 5, 1168.6727}, {1273.15, 0.80, 1, 10, 1118.4053}, {1273.15, 0.80, 0.85, 0.9, 1267.0326},
		{573.15, 0.3, 1, 2.2, 518.4465}, {573.15, 0.3, 1, 10, 393.5689},
	} {
		close(t, "emissivity set wrong", at(c.um, c.true_*planck(c.um, c.T), c.set, 0), c.want, 0.5e-4)
	}
	for _, c := range []struct{ T, wall, ε, um, want float64 }{
		{323.15, 296.15, 0.95, 10, 325.6316}, {323.15, 296.15, 0.5, 10, 364.1571},
		{1173.15, 1473.15, 0.8, 0.9, 1330.4835}, {1173.15, 1473.15, 0.8, 3.9, 1334.6731},
	} {
		y := c.ε*planck(c.um, c.T) + (1-c.ε)*planck(c.um, c.wall)
		close(t, "surroundings ignored", at(c.um, y, c.ε, 0), c.want, 0.5e-4)
		close(t, "surroundings declared", at(c.um, y, c.ε, c.wall), c.T, 1e-6)
	}
}

// TestWallsBrighterThanThePiece: with the walls at 1250 °C, a piece of emissivity
// 0.70 ± 0.04 near 600 °C hardly matters at 1.6 µm: the reading bounds it from above.
func TestWallsBrighterThanThePiece(t *testing.T) {
	wall := &pyro.Input{Name: "wall", Value: 1523, Std: 25, PerReading: true}
	e, err := fit.New(lines(t, 1.6, 1.6, 1), fit.Assume{
		Emissivity: emissivity.Grey().WithPrior("level", 0.7, 0.04), Surroundings: sightline.Enclosure(wall), Range: fit.Range{Min: 400, Max: 2500}})
	if err != nil {
		t.Fatal(err)
	}
	read := func(y, wall float64) (*fit.Result, error) {
		return e.Estimate(fit.Readings{Signal: []float64{y}, Std: []float64{0.005 * y}, Inputs: []float64{wall}})
	}
	signal := func(T float64) float64 { return 0.7*planck(1.6, T) + 0.3*planck(1.6, 1523) }
	r, err := read(signal(900), 1523)
	if err != nil {
		t.Fatal(err)
	}
	iv, _ := r.Interval()
	if r.State() != fit.Bounded || !iv.LowOpen || float64(iv.High) < 900 || float64(iv.High) > 1523 {
		t.Errorf("a piece of 900 K: %v", r)
	}
	t.Log(r)
	// Under hot walls a larger emissivity raises the temperature; above them it lowers it.
	for _, c := range []struct{ T, sign float64 }{{1450, 1}, {1700, -1}} {
		r, err := read(signal(c.T), 1523)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range r.Budget() {
			if s.Name == "prior on level" && s.EffectK*c.sign <= 0 {
				t.Errorf("piece %g K: a larger emissivity moves T by %+g K", c.T, s.EffectK)
			}
		}
		if r.Budget() == nil {
			t.Errorf("piece %g K: %v", c.T, r)
		}
	}
	// No temperature fits: the walls alone are brighter.
	_, err = read(0.002*planck(1.6, 1523), 1523)
	var walls *fit.WallsError
	if !errors.As(err, &walls) || !strings.Contains(err.Error(), "the walls alone give more than was measured") {
		t.Errorf("walls alone: %v", err)
	}
}

// TestSaturatedSignalsAreBounds: a saturated channel says 'at least', one at the floor 'at most'.
func TestSaturatedSignalsAreBounds(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	limit := planck(0.9, 1600)
	a := fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.8, 0.05), Range: fit.Range{Min: 600, Max: 3000},
		Detectors: []detector.Channel{{Saturation: limit, Floor: limit / 1000, Noise: detector.NoiseModel{Constant: limit * limit * 1e-6}}}}
	e, err := fit.New(bands, a)
	if err != nil {
		t.Fatal(err)
	}
	r, err := e.Estimate(fit.Readings{Signal: []float64{limit}})
	if err != nil {
		t.Fatal(err)
	}
	if iv, _ := r.Interval(); r.State() != fit.Bounded || !iv.HighOpen || iv.Low < 1550 || iv.Low > 1630 {
		t.Errorf("saturated: %v", r)
	}
	t.Log(r)
	if r, err = e.Estimate(fit.Readings{Signal: []float64{limit / 1000}}); err != nil {
		t.Fatal(err)
	}
	if iv, _ := r.Interval(); r.State() != fit.Bounded || !iv.LowOpen || iv.High > 1200 {
		t.Errorf("at the floor: %v", r)
	}
	// Of two channels one saturates: the other reads on, and the bound keeps its part.
	two := lines(t, 0.9, 1.0, 2)
	a.Detectors = []detector.Channel{{Saturation: limit, Noise: detector.NoiseModel{Constant: 1e-6 * limit * limit}}, {Noise: detector.NoiseModel{Constant: 1e-6 * limit * limit}}}
	if e, err = fit.New(two, a); err != nil {
		t.Fatal(err)
	}
	if r, err = e.Estimate(fit.Readings{Signal: []float64{limit, 0.8 * planck(1.0, 1700)}}); err != nil {
		t.Fatal(err)
	}
	T, u := determined(t, r)
	close(t, "T by the other channel", T, 1700, 2*u)
}

// Shot noise a + b·S on the model: bright channels weigh by their own photons.
func TestShotNoise(t *testing.T) {
	bands := lines(t, 0.8, 1.2, 6)
	detectors := make([]detector.Channel, len(bands))
	y := make([]float64, len(bands))
	std := make([]float64, len(bands))
	for i, b := range bands {
		g := 5e4 / planck(1.2, 1500)
		detectors[i] = detector.Channel{Gain: input("gain", g, 0), Noise: detector.NoiseModel{Constant: 25, PerSignal: 1}}
		y[i] = g * 0.6 * planck(float64(b.Mean())*1e6, 1500)
		std[i] = math.Sqrt(25 + y[i])
	}
	a := fit.Assume{Emissivity: emissivity.Grey(), Detectors: detectors}
	T1, u1 := determined(t, estimate(t, bands, a, fit.Readings{Signal: y}))
	T2, u2 := determined(t, estimate(t, bands, a, fit.Readings{Signal: y, Std: std}))
	close(t, "T", T1, T2, 1e-6)
	close(t, "u", u1, u2, 1e-6*u2)
}

func TestBadSightsAreRefused(t *testing.T) {
	bands := lines(t, 0.9, 1.6, 3)
	grey := emissivity.Grey()
	holed, err := pyro.NewCurve([]pyro.Wavelength{0.8 * µm, 1.2 * µm}, []float64{0.9, 0.9})
	if err != nil {
		t.Fatal(err)
	}
	zone := func(f, T float64) sightline.Zone {
		return sightline.Zone{Name: "roof", Factor: input("F", f, 0.01), Temperature: input("roof", T, 5)}
	}
	for name, c := range map[string]struct {
		a    fit.Assume
		says string
	}{
		"a wall in °C":                      {fit.Assume{Surroundings: sightline.Enclosure(input("wall", 25, 5))}, "°C"},
		"a view factor above 1":             {fit.Assume{Surroundings: sightline.Surroundings{Zones: []sightline.Zone{zone(1.2, 1300)}}}, "between 0 and 1"},
		"view factors above 1 in sum":       {fit.Assume{Surroundings: sightline.Surroundings{Zones: []sightline.Zone{zone(0.6, 1300), zone(0.6, 1200)}}}, "exceed 1"},
		"a zone without a radiance":         {fit.Assume{Surroundings: sightline.Surroundings{Zones: []sightline.Zone{{Name: "roof", Factor: input("F", 0.5, 0)}}}}, "one of"},
		"a transmittance in per cent":       {fit.Assume{Path: []sightline.Layer{sightline.Window(input("window", 90, 1))}}, "fraction"},
		"a transmittance of 0":              {fit.Assume{Path: []sightline.Layer{sightline.Window(input("window", 0, 0.1))}}, "between 0 and 1"},
		"a window's table with a hole":      {fit.Assume{Path: []sightline.Layer{{Name: "pane", Shape: holed}}}, "cover every band"},
		"a pane above 1 at one end":         {fit.Assume{Path: []sightline.Layer{sightline.Fouling(input("t", 0.9, 0), input("slope", 2, 0), 0.9*µm)}}, "outside (0, 1]"},
		"a fill of 0":                       {fit.Assume{Field: sightline.Field{Fraction: input("fill", 0, 0.1)}}, "between 0 and 1"},
		"a rest without a fraction":         {fit.Assume{Field: sightline.Field{Rest: input("rest", 1000, 5)}}, "Fraction"},
		"too few detectors":                 {fit.Assume{Detectors: make([]detector.Channel, 2)}, "2 detectors for 3 bands"},
		"a gain of 0":                       {fit.Assume{Detectors: []detector.Channel{{Gain: input("gain", 0, 1)}, {}, {}}}, "positive"},
		"an input without a name":           {fit.Assume{Detectors: []detector.Channel{{Gain: input("", 1, 1)}, {}, {}}}, "name"},
		"calibrated at a temperature in °C": {fit.Assume{Detectors: []detector.Channel{{CalibratedAt: 25}, {}, {}}}, "°C"},
		"stray light in per cent":           {fit.Assume{Stray: input("stray", 3, 1)}, "fraction"},
	} {
		c.a.Emissivity = grey
		if _, err := fit.New(bands, c.a); !errors.Is(err, fit.ErrAssume) || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v", name, err)
		}
	}
	// With each reading: a column in °C, a number too few.
	wall := &pyro.Input{Name: "wall", Value: 1300, Std: 5, PerReading: true}
	e, err := fit.New(bands, fit.Assume{Emissivity: grey, Surroundings: sightline.Enclosure(wall)})
	if err != nil {
		t.Fatal(err)
	}
	y := []float64{1e9, 2e9, 3e9}
	var bad *fit.InputError
	if _, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 0.01), Inputs: []float64{25}}); !errors.As(err, &bad) || bad.Name != "wall" || !strings.Contains(err.Error(), "°C") {
		t.Errorf("a wall column in °C: %v", err)
	}
	if _, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 0.01), Inputs: []float64{1300, 1}}); !errors.Is(err, fit.ErrReadings) {
		t.Errorf("two values for one input: %v", err)
	}
	if _, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 0.01), Inputs: []float64{}}); !errors.Is(err, fit.ErrReadings) {
		t.Errorf("no value for one input: %v", err)
	}
}

// Grey fouling and grey emissivity: only their product is there to be found, and the
// temperature that needs only the shape is not hurt.
func TestGreyFoulingIsNotToldFromEmissivity(t *testing.T) {
	bands := lines(t, 0.9, 1.6, 6)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.4 * planck(float64(b.Mean())*1e6, 1500)
	}
	r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey(), Path: []sightline.Layer{sightline.Window(input("window", 0.8, math.Inf(1)))}},
		fit.Readings{Signal: y, Std: scaled(y, 0.005)})
	if r.State() == fit.Determined || !strings.Contains(r.Undetermined(), "window") || !strings.Contains(r.Undetermined(), "level") {
		t.Errorf("%v", r)
	}
}
