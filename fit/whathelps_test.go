package fit_test

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// hearth is four bands past hot walls with uncertain inputs of all sorts, their uncertainties f
// times those declared, and readings without noise.
func hearth(t *testing.T, f float64) ([]*pyro.Band, fit.Assume, fit.Readings) {
	t.Helper()
	bands := lines(t, 0.9, 1.6, 4)
	gain, axis, dark := input("gain", 1.1, f*0.004), input("axis", 0, f*0.2e-9), input("dark", 1e6, f*2e5)
	detectors := make([]detector.Channel, len(bands))
	for i, b := range bands {
		detectors[i] = detector.Channel{Gain: gain, Dark: dark, Wavelength: detector.Axis(axis, nil, b.Mean())}
	}
	shared := fit.Shared{Name: "lens", Relative: []float64{f * 0.004, f * 0.003, f * 0.002, f * 0.002}}
	a := fit.Assume{
		Emissivity: emissivity.Grey().WithPrior("level", 0.75, f*0.01).KnownAt(1.2*µm, 0.75, f*0.02),
		Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{
			{Name: "roof", Factor: input("view factor", 0.7, f*0.01), Temperature: input("wall", 1300, f*4)}}},
		Path:      []sightline.Layer{sightline.Fouling(input("window", 0.9, f*0.005), input("slope", 0.1, f*0.02), 1.2*µm)},
		Field:     sightline.Field{Fraction: input("fill", 0.85, f*0.006), Rest: input("rest", 1200, f*6)},
		Detectors: detectors,
		Shared:    []fit.Shared{shared},
		Range:     fit.Range{Min: 900, Max: 2200},
	}
	s := scene{T: 1500, ε: func(float64) float64 { return 0.75 }, walls: []struct{ factor, T float64 }{{0.7, 1300}}, self: 0.3,
		fill: 0.85, rest: 1200, τ: func(um float64) float64 { return 0.9 * math.Pow(um/1.2, 0.1) }}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 1e6 + 1.1*s.read(b, 0)
	}
	return bands, a, fit.Readings{Signal: y, Std: scaled(y, f*0.003)}
}

func whatHelps(t *testing.T, bands []*pyro.Band, a fit.Assume, r fit.Readings, ask fit.Ask) *fit.Advice {
	t.Helper()
	e, err := fit.New(bands, a)
	if err != nil {
		t.Fatal(err)
	}
	advice, err := e.WhatHelps(r, ask)
	if err != nil {
		t.Fatal(err)
	}
	return advice
}

// TestHalvingAgainstTheBudget: with s an input's share, halving it leaves u'² = u² − ¾s², but
// for what is of second order in the uncertainties, where one band leaves nothing to weigh.
func TestHalvingAgainstTheBudget(t *testing.T) {
	worst := map[float64]float64{}
	for _, f := range []float64{1, 0.1} {
		bands, a, r := hearth(t, f)
		bands, r.Signal, r.Std = bands[:1], r.Signal[:1], r.Std[:1]
		a.Detectors, a.Shared = a.Detectors[:1], []fit.Shared{{Name: "lens", Relative: a.Shared[0].Relative[:1]}}
		now := estimate(t, bands, a, r)
		T, u := determined(t, now)
		close(t, "T", T, 1500, 1e-6)
		after := map[string]float64{}
		for _, h := range whatHelps(t, bands, a, r, fit.Ask{}).Helps {
			if h.Kind == fit.HalveInput {
				after[h.Name] = h.After.StdK
			}
		}
		budget := now.Budget()
		if len(budget) != 13 || len(after) != len(budget) {
			t.Errorf("%d shares, %d answers: %v", len(budget), len(after), after)
		}
		for _, s := range budget {
			got, ok := after[s.Name]
			if !ok {
				t.Errorf("nothing about %s", s.Name)
				continue
			}
			want := math.Sqrt(u*u - 0.75*s.StdK*s.StdK)
			if s.Name == "prior on level" || strings.HasPrefix(s.Name, "emissivity known") {
				continue // two data on one parameter weigh each other: below
			}
			worst[f] = max(worst[f], math.Abs(got/want-1))
			if f == 1 {
				t.Logf("%-30s u %.4f K, halved %.4f K, by the budget %.4f K", s.Name, u, got, want)
			}
		}
	}
	if worst[1] > 2e-3 || worst[0.1] > worst[1]/50+1e-9 {
		t.Errorf("off by %.2g, and by %.2g with a tenth of the uncertainties: want second order", worst[1], worst[0.1])
	}

	// Two data on the level, of precision 1/0.01² and 1/0.02²: with the first halved.
	bands, a, r := hearth(t, 0.01)
	bands, r.Signal, r.Std, a.Detectors, a.Shared = bands[:1], r.Signal[:1], r.Std[:1], a.Detectors[:1], nil
	now := estimate(t, bands, a, r)
	_, u := determined(t, now)
	level := 0.0
	for _, s := range now.Budget() {
		if s.Name == "prior on level" || strings.HasPrefix(s.Name, "emissivity known") {
			level = math.Hypot(level, s.StdK)
		}
	}
	for _, h := range whatHelps(t, bands, a, r, fit.Ask{}).Helps {
		if h.Kind == fit.HalveInput && h.Name == "prior on level" {
			const ratio = (1 + 1.0/4) / (4 + 1.0/4)
			close(t, "prior on level halved beside a known point", h.After.StdK, math.Sqrt(u*u-(1-ratio)*level*level), 1e-4*u)
		}
	}
}

// TestHalvingWhatElseThereIs: a model's prior, a calibration curve, the step of a signal, a
// temperature known beforehand; and an input that is free has nothing to halve.
func TestHalvingWhatElseThereIs(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	table, err := emissivity.NewTabulated([]pyro.Wavelength{0.8 * µm, 1 * µm}, []pyro.Temperature{1000, 2000}, [][]float64{{0.6, 0.6}, {0.6, 0.6}}, 0.01)
	if err != nil {
		t.Fatal(err)
	}
	curve := &detector.Curve{A: 0.9e-6, B: 0, C: 1e6}
	y := 0.6 * curve.Signal(1500)
	a := fit.Assume{
		Emissivity:  table,
		Temperature: fit.TemperaturePrior{Value: 1500, StdK: 4},
		Detectors:   []detector.Channel{{Curve: curve, CurveCov: [3][3]float64{{1e-4, 0, 0}, {0, 1e-18, 0}, {0, 0, 0}}, Resolution: 0.03 * y}},
		Range:       fit.Range{Min: 1100, Max: 1900},
	}
	r := fit.Readings{Signal: []float64{y}, Std: []float64{0.005 * y}}
	now := estimate(t, bands, a, r)
	_, u := determined(t, now)
	// Beside the temperature, the data are in series: u⁻² = 4⁻² + (Σ s²)⁻², in which s is a share
	// times u² over what the series alone would leave, squared.
	series := 1 / (1/(u*u) - 1.0/16)
	want := map[string]float64{"temperature known beforehand": 1 / math.Sqrt(1/series+4.0/16)}
	for _, s := range now.Budget() {
		if s.Name != "temperature known beforehand" {
			own := s.StdK * series / (u * u)
			want[s.Name] = 1 / math.Sqrt(1/(series-0.75*own*own)+1.0/16)
		}
	}
	for _, h := range whatHelps(t, bands, a, r, fit.Ask{}).Helps {
		if h.Kind == fit.HalveInput {
			close(t, h.Name, h.After.StdK, want[h.Name], 2e-3*u)
			delete(want, h.Name)
		}
	}
	if len(want) > 0 {
		t.Errorf("no answers: %v", want)
	}

	bands = lines(t, 0.7, 1, 6)
	y2 := truth{"grey", emissivity.Grey(), []float64{0.6}}.signals(bands, 0.85*µm, 1523)
	detectors := make([]detector.Channel, 6)
	gain := input("gain", 1, math.Inf(1))
	for i := range detectors {
		detectors[i].Gain = gain
	}
	advice := whatHelps(t, bands, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 0.6), Detectors: detectors}, fit.Readings{Signal: y2, Std: scaled(y2, 0.01)}, fit.Ask{})
	if slices.ContainsFunc(advice.Helps, func(h fit.Help) bool { return h.Name == "gain" }) || !strings.Contains(advice.String(), "gain is free") {
		t.Errorf("%v", advice)
	}
}

// TestOneInputInSeveralPlaces: an input that detectors share stays shared when it is halved.
func TestOneInputInSeveralPlaces(t *testing.T) {
	bands, a, r := hearth(t, 1)
	got := map[string]float64{}
	for _, h := range whatHelps(t, bands, a, r, fit.Ask{}).Helps {
		if h.Kind == fit.HalveInput {
			got[h.Name] = h.After.StdK
		}
	}
	for _, name := range []string{"gain", "axis", "dark", "wall", "view factor", "window", "slope", "fill", "rest"} {
		// The same assumptions declared anew with the input halved.
		bands, b, r := hearth(t, 1)
		z := &b.Surroundings.Zones[0]
		for _, in := range []*pyro.Input{b.Detectors[0].Gain, b.Detectors[0].Dark, b.Detectors[0].Wavelength[0].Input, z.Factor, z.Temperature,
			b.Path[0].Transmittance, b.Path[0].Slope, b.Field.Fraction, b.Field.Rest} {
			if in.Name == name {
				in.Std /= 2
			}
		}
		_, u := determined(t, estimate(t, bands, b, r))
		close(t, name, got[name], u, 1e-9*u)
	}
	if a.Detectors[0].Gain.Std != 0.004 || a.Path[0].Transmittance.Std != 0.005 {
		t.Error("the inputs handed in were changed")
	}
}

// TestNoiseOfFourReadings: every kind of noise is halved.
func TestNoiseOfFourReadings(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 6)
	y := truth{"grey", emissivity.Grey(), []float64{0.6}}.signals(bands, 0.85*µm, 1523)
	cov := make([]float64, 36)
	for i := range y {
		y[i] *= 1 + 0.004*(1-2*float64(i%2))
	}
	for i := range y {
		for k := range y {
			cov[6*i+k] = 0.2 * 1e-4 * y[i] * y[k]
		}
		cov[7*i] = 1e-4 * y[i] * y[i]
	}
	shot := make([]detector.Channel, 6)
	for i := range shot {
		shot[i].Noise = detector.NoiseModel{PerSignal: 1e-4 * y[i]}
	}
	for _, c := range []struct {
		name      string
		noise     fit.Noise
		std       []float64
		detectors []detector.Channel
	}{
		{"with each reading", fit.PerReading(), scaled(y, 0.01), nil}, {"relative", fit.Relative(0.01), nil, nil}, {"with a floor", fit.RelativeWithFloor(0.01, 0.01*y[0]), nil, nil},
		{"covariance", fit.Covariance(cov), nil, nil}, {"of unknown size", fit.Relative(0.01).UpToFactor(), nil, nil}, {"of the detectors", fit.PerReading(), nil, shot},
	} {
		a := fit.Assume{Emissivity: emissivity.Grey(), Noise: c.noise, Detectors: c.detectors}
		advice := whatHelps(t, bands, a, fit.Readings{Signal: y, Std: c.std}, fit.Ask{})
		at := slices.IndexFunc(advice.Helps, func(h fit.Help) bool { return h.Kind == fit.HalveInput && h.Name == "readings" })
		if at < 0 {
			t.Errorf("%s: no answer: %v", c.name, advice)
			continue
		}
		// The weights depend on the model, which moves by a fraction of u.
		close(t, c.name, advice.Helps[at].After.StdK, advice.Before.StdK/2, 0.01*advice.Before.StdK)
	}
}

// TestOrderOfHelp: the least uncertainty comes first, and no help is left out.
func TestOrderOfHelp(t *testing.T) {
	bands, a, r := hearth(t, 1)
	advice := whatHelps(t, bands, a, r, fit.Ask{Bands: lines(t, 0.65, 2.2, 2), ContactStdK: 0.5})
	if !slices.IsSortedFunc(advice.Helps, func(a, b fit.Help) int {
		if d := a.After.Width() - b.After.Width(); d != 0 {
			return int(math.Copysign(1, d))
		}
		return 0
	}) {
		t.Errorf("not in order: %v", advice)
	}
	count := map[fit.HelpKind]int{}
	for _, h := range advice.Helps {
		count[h.Kind]++
	}
	if count[fit.AddBand] != 2 || count[fit.KnowEmissivity] != 1 || count[fit.ContactReading] != 1 || count[fit.HalveInput] != 13 || count[fit.NameKind] != 0 {
		t.Errorf("%v: %v", count, advice)
	}
	if h := advice.Helps[0]; h.Kind != fit.ContactReading || math.Abs(h.After.StdK-0.5) > 0.05 {
		t.Errorf("a contact reading ± 0.5 K comes first: %+v", h)
	}
	for _, h := range advice.Helps { // a further noise-free reading never raises u
		if h.After.StdK > advice.Before.StdK*(1+1e-6) {
			t.Errorf("%s raises u from %.4f K to %.4f K", h.Action, advice.Before.StdK, h.After.StdK)
		}
	}
}

// TestAnAddedBandReadsWhatTheEstimatePredicts: the predicted reading changes neither the
// temperature nor its χ², and its u is that of the band declared from the start.
func TestAnAddedBandReadsWhatTheEstimatePredicts(t *testing.T) {
	flat, err := pyro.FlatTop(1.95*µm, 2.05*µm)
	if err != nil {
		t.Fatal(err)
	}
	// The engine takes the spread of a wide band to second order; the scene's is integrated.
	for extra, tolerance := range map[*pyro.Band]struct{ T, u float64 }{lines(t, 2, 2, 1)[0]: {1e-3, 1e-5}, flat: {0.05, 1e-3}} {
		bands, a, r := hearth(t, 1)
		advice := whatHelps(t, bands, a, r, fit.Ask{Bands: []*pyro.Band{extra}})
		at := slices.IndexFunc(advice.Helps, func(h fit.Help) bool { return h.Kind == fit.AddBand })
		if at < 0 {
			t.Fatalf("no answer: %v", advice)
		}
		h := advice.Helps[at]
		close(t, "T", float64(h.After.T), 1500, 1e-3)

		a.Detectors = append(a.Detectors, detector.Channel{Gain: a.Detectors[0].Gain, Dark: a.Detectors[0].Dark, Wavelength: a.Detectors[0].Wavelength})
		a.Shared = []fit.Shared{{Name: "lens", Relative: append(slices.Clone(a.Shared[0].Relative), 0.00275)}}
		s := scene{T: 1500, ε: func(float64) float64 { return 0.75 }, walls: []struct{ factor, T float64 }{{0.7, 1300}}, self: 0.3,
			fill: 0.85, rest: 1200, τ: func(um float64) float64 { return 0.9 * math.Pow(um/1.2, 0.1) }}
		rel, net := 0.0, 1.1*s.read(extra, 0)
		for i, v := range r.Signal {
			rel += r.Std[i] / (v - 1e6) / 4
		}
		r.Signal, r.Std = append(r.Signal, 1e6+net), append(r.Std, rel*net)
		T, u := determined(t, estimate(t, append(bands, extra), a, r))
		close(t, "T of the band declared", T, 1500, tolerance.T)
		close(t, "u of the band declared", h.After.StdK, u, tolerance.u*u)
	}
}

// TestAnAddedBandForAProcess: between the channels of a level curve nothing moves.
func TestAnAddedBandForAProcess(t *testing.T) {
	bands := lines(t, 0.8, 1.6, 3)
	y := truth{"grey", emissivity.Grey(), []float64{0.5}}.signals(bands, 1.2*µm, 1600)
	r := fit.Readings{Signal: y, Std: scaled(y, 0.005)}
	a := fit.Assume{Emissivity: emissivity.Unknown()}
	advice := whatHelps(t, bands, a, r, fit.Ask{Bands: lines(t, 1, 1, 1)})
	at := slices.IndexFunc(advice.Helps, func(h fit.Help) bool { return h.Kind == fit.AddBand })
	if at < 0 {
		t.Fatalf("no answer: %v", advice)
	}
	h := advice.Helps[at]
	if u := advice.Before.StdK; h.After.StdK > 1.01*u || h.After.StdK < 0.8*u || math.Abs(float64(h.After.T-advice.Before.T)) > 0.3*u {
		t.Errorf("%v, then %v", advice.Before, h.After)
	}
}

// TestKindsThatTheReadingsContradict are not offered.
func TestKindsThatTheReadingsContradict(t *testing.T) {
	bands := lines(t, 0.6, 1.6, 16)
	y := make([]float64, len(bands))
	for i, b := range bands { // fringes, which only a film has
		um := b.Mean().Micrometres()
		y[i] = (0.5 + 0.06*math.Sin(9/um)) * b.Radiance(1600)
	}
	advice := whatHelps(t, bands, fit.Assume{Emissivity: emissivity.AnySurface()}, fit.Readings{Signal: y, Std: scaled(y, 0.005)}, fit.Ask{})
	text := advice.String()
	var offered []string
	for _, h := range advice.Helps {
		if h.Kind == fit.NameKind {
			offered = append(offered, h.Name)
		}
	}
	if !slices.Contains(offered, "growing-oxide") || slices.Contains(offered, "carbon") || slices.Contains(offered, "dark-scale") {
		t.Errorf("offered: %v\n%s", offered, text)
	}
	if !strings.Contains(text, "readings contradict them") || !strings.Contains(text, "carbon") {
		t.Errorf("does not say what was left out:\n%s", text)
	}

	// A kind's name on its own process is no question.
	for _, h := range whatHelps(t, bands[:3], fit.Assume{Emissivity: emissivity.Carbon()}, fit.Readings{Signal: y[:3], Std: scaled(y[:3], 0.05)}, fit.Ask{}).Helps {
		if h.Kind == fit.NameKind {
			t.Errorf("carbon is asked for its kind: %+v", h)
		}
	}
}

// TestUndeterminedReadings: what would make them determined, and by how much.
func TestUndeterminedReadings(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	y := []float64{0.5 * bands[0].Radiance(1500)}
	r := fit.Readings{Signal: y, Std: scaled(y, 0.005)}
	advice := whatHelps(t, bands, fit.Assume{Emissivity: emissivity.Grey()}, r, fit.Ask{Bands: lines(t, 1.6, 1.6, 1)})
	if advice.Before.State == fit.Determined {
		t.Fatalf("%v", advice.Before)
	}
	find := func(k fit.HelpKind) fit.Help {
		t.Helper()
		for _, h := range advice.Helps {
			if h.Kind == k {
				return h
			}
		}
		t.Fatalf("%v: no answer\n%v", k, advice)
		return fit.Help{}
	}
	// u = λT²/c₂ · √(0.05² + 0.005²)
	h := find(fit.KnowEmissivity)
	want := 0.9e-6 * 1500 * 1500 / pyro.C2 * math.Hypot(0.05, 0.005)
	close(t, "u with a known emissivity", h.After.StdK, want, 0.005*want)
	close(t, "T with a known emissivity", float64(h.After.T), 1500, 0.1)
	if h.Note == "" {
		t.Error("does not say that 0.5 is a stand-in")
	}
	h = find(fit.ContactReading)
	close(t, "u with a contact reading", h.After.StdK, 3, 0.01)
	if h = find(fit.AddBand); h.After.State != fit.Determined || !h.After.HasStd {
		t.Errorf("a second band: %+v", h)
	}
	carbon := slices.IndexFunc(advice.Helps, func(h fit.Help) bool { return h.Name == "carbon" })
	if carbon < 0 || advice.Helps[carbon].After.State != fit.Determined {
		t.Errorf("naming carbon: %v", advice)
	}
	if text := advice.String(); !strings.Contains(text, "determined: 1500.0 K ± 7.1 K") {
		t.Errorf("%s", text)
	}
	last := advice.Helps[len(advice.Helps)-1]
	if last.Kind != fit.HalveInput || !math.IsInf(last.After.Width(), 1) {
		t.Errorf("less noise, which determines nothing, comes last: %+v", last)
	}

	// Nothing tells the level of a relative signal: no stand-in, and no invented number.
	advice = whatHelps(t, bands, fit.Assume{Emissivity: emissivity.Grey().Relative()}, r, fit.Ask{Bands: lines(t, 1.6, 1.6, 1)})
	for _, h := range advice.Helps {
		if h.After.State == fit.Determined {
			t.Errorf("determined by %s: %v", h.Action, h.After)
		}
	}
	if text := advice.String(); !strings.Contains(text, "no estimate says what it would read") || strings.Contains(text, "NaN") || strings.Contains(text, "Inf") {
		t.Errorf("%s", text)
	}
}

func TestWhatHelpsRefusesNonsense(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 6)
	y := truth{"grey", emissivity.Grey(), []float64{0.6}}.signals(bands, 0.85*µm, 1523)
	good := fit.Readings{Signal: y, Std: scaled(y, 0.01)}
	free, known := fit.Assume{Emissivity: emissivity.Grey()}, fit.Assume{Emissivity: emissivity.Grey(), Temperature: fit.TemperaturePrior{Value: 1500}}
	for _, c := range []struct {
		name string
		a    fit.Assume
		r    fit.Readings
		ask  fit.Ask
		want error
	}{
		{"contact reading of negative uncertainty", free, good, fit.Ask{ContactStdK: -1}, fit.ErrAssume},
		{"contact reading of no certainty", free, good, fit.Ask{ContactStdK: math.Inf(1)}, fit.ErrAssume},
		{"emissivity in per cent", free, good, fit.Ask{EmissivityRel: 5}, fit.ErrAssume},
		{"emissivity NaN", free, good, fit.Ask{EmissivityRel: math.NaN()}, fit.ErrAssume},
		{"no band", free, good, fit.Ask{Bands: []*pyro.Band{nil}}, fit.ErrAssume},
		{"temperature held", known, good, fit.Ask{}, fit.ErrAssume},
		{"too few readings", free, fit.Readings{Signal: y[:3], Std: good.Std[:3]}, fit.Ask{}, fit.ErrReadings},
		{"readings without uncertainty", free, fit.Readings{Signal: y}, fit.Ask{}, fit.ErrReadings},
	} {
		e, err := fit.New(bands, c.a)
		if err != nil {
			t.Fatal(err)
		}
		if advice, err := e.WhatHelps(c.r, c.ask); !errors.Is(err, c.want) || advice != nil {
			t.Errorf("%s: %v, %v", c.name, advice, err)
		}
	}
	// A band that a mask leaves out is a note, not an end.
	masked := free
	masked.Masks = []fit.Mask{{Name: "lamp", Lo: 1.15 * µm, Hi: 1.25 * µm}}
	if advice := whatHelps(t, bands, masked, good, fit.Ask{Bands: lines(t, 1.2, 1.2, 1)}); !strings.Contains(advice.String(), "a mask leaves it out") {
		t.Errorf("%v", advice)
	}
}

// TestContradictedReadings: the table says so before anyone acts on it.
func TestContradictedReadings(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 6)
	y := truth{"linear", emissivity.Polynomial(1), []float64{0.55, -0.3}}.signals(bands, 0.85*µm, 1523)
	advice := whatHelps(t, bands, fit.Assume{Emissivity: emissivity.Grey()}, fit.Readings{Signal: y, Std: scaled(y, 0.001)}, fit.Ask{})
	if !strings.Contains(advice.String(), "find out why first") {
		t.Errorf("%v", advice)
	}
}

func ExampleEstimator_WhatHelps() {
	band, err := pyro.FlatTop(1550*pyro.Nanometre, 1650*pyro.Nanometre)
	if err != nil {
		panic(err)
	}
	kiln, err := fit.New([]*pyro.Band{band}, fit.Assume{
		Emissivity:   emissivity.Grey().WithPrior("level", 0.85, 0.05),
		Noise:        fit.Relative(0.002),
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall temperature", Unit: "K", Value: 1400, Std: 15, PerReading: true}),
		Path:         []sightline.Layer{sightline.Window(&pyro.Input{Name: "window", Value: 0.90, Std: 0.02})},
	})
	if err != nil {
		panic(err)
	}
	advice, err := kiln.WhatHelps(fit.Readings{Signal: []float64{1.1e10}, Inputs: []float64{1412}}, fit.Ask{})
	if err != nil {
		panic(err)
	}
	fmt.Print(advice)
	// Output:
	// As it stands: 1295 K ± 11 K; grey emissivity assumed with what is known of it, not tested
	//
	// What would help                               u(T) then
	// one contact reading of 1295 K ± 3 K           2.9 K
	// prior on level to ± 0.025                     8.0 K
	// an emissivity measured at 1.6 µm, 0.85 ± 5 %  8.7 K
	// window to ± 0.01                              9.8 K
	// wall temperature to ± 7.5 K                   10 K
	//
	// Next to nothing would come of
	//   - the mean of four readings, with half the noise
	//
	// Notes
	//   - where no kind is named, the grey emissivity is taken for that of the surface: what another does to the temperature is in none of these figures
}
