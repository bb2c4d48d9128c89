package main

import (
	"bufio"
	_ "embed"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"candent/examples/internal/show"
	"candent/fit/readings"
	"candent/pyro"
	"candent/pyro/detector"
)

//go:embed demo.csv
var demo string

//go:embed demo-ratio.csv
var demoRatio string

type job struct {
	in, band, short, long, span, unit  string
	setting, emissivity, emissivityStd float64
	windowSetting, window, windowStd   float64
	backgroundSetting, background      float64
	backgroundStd, indicatorStd        float64
	ratioSetting, ratio, ratioStd      float64
	repeats                            int
	json                               bool
}

func (j job) twoColour() bool { return j.short != "" || j.long != "" }

// fillDemo takes what the demo's plant has, where nothing was asked for.
func (j *job) fillDemo() {
	set := func(v *float64, to float64) {
		if *v == 0 {
			*v = to
		}
	}
	if j.twoColour() {
		if j.ratio == 0 {
			j.ratio, j.ratioStd = 0.97, 0.01
		}
		return
	}
	if j.band == "" {
		j.band = "900-1100"
	}
	if j.span == "" {
		j.span = "600:1250"
	}
	set(&j.setting, 0.95)
	if j.emissivity == 0 {
		j.emissivity, j.emissivityStd = 0.82, 0.03
	}
}

// reader is the indicator, its log, and the model to estimate with.
type reader struct {
	model *model
	// shown returns a *CensoredError for an indication at an end of the range, and another
	// error for one beyond it.
	shown      func(t pyro.Temperature, step float64) error
	loop       *detector.CurrentLoop
	value      readings.Column
	repeats    detector.Repeats
	limit      int
	runs       []detector.Run
	row        int
	rangeGiven bool
}

// run does the job and returns how many rows could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer, progress *show.Progress) (failed int, err error) {
	if j.in == "" {
		j.fillDemo()
	}
	unit, err := show.ParseUnit(j.unit)
	if err != nil {
		return 0, err
	}
	if j.repeats < 2 {
		return 0, fmt.Errorf("-repeats %d: two is the least that can be a repeat", j.repeats)
	}
	if !(j.indicatorStd >= 0) || math.IsInf(j.indicatorStd, 0) {
		return 0, fmt.Errorf("-indicator-std-K %g must be finite and not negative", j.indicatorStd)
	}
	r := &reader{limit: j.repeats}
	low, high, err := r.parseRange(j.span)
	if err != nil {
		return 0, err
	}
	text := demo
	if j.twoColour() {
		text = demoRatio
		err = r.setTwoColour(j, low, high)
	} else {
		err = r.setOneBand(j, low, high)
	}
	if err != nil {
		return 0, err
	}
	in, name, err := show.Open(j.in, text, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	log, err := readings.NewLog(in, readings.Settings{Name: name})
	if err != nil {
		return 0, err
	}
	if err := r.open(log, low, high); err != nil {
		return 0, err
	}
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	if !j.json {
		writeHead(out, j, r, unit)
	}
	var hottest *estimate
	hottestLabel := ""
	for {
		progress.Step(r.row)
		row, err := log.Next()
		if errors.Is(err, io.EOF) {
			progress.Done()
			if !j.json {
				writeFoot(out, hottest, hottestLabel, r.runs, unit)
			}
			return failed, nil
		}
		var e estimate
		label := ""
		if err == nil {
			label = row.Label
			e, err = r.read(row)
		} else if bad := (*readings.RowError)(nil); errors.As(err, &bad) {
			label = bad.ID
		}
		switch {
		case err != nil:
			failed++
			err = show.WriteError(out, j.json, label, err)
		case j.json:
			err = writeJSON(out, j, row, e)
		default:
			err = writeText(out, label, e, unit)
		}
		if err != nil {
			return failed, err
		}
		if e.determined() && (hottest == nil || e.t > hottest.t) {
			hottest, hottestLabel = &e, label
		}
	}
}

// parseRange parses LO:HI in °C; none is the whole range of the bands.
func (r *reader) parseRange(text string) (low, high pyro.Temperature, err error) {
	if text == "" {
		return pyro.BandMin, pyro.BandMax, nil
	}
	lo, hi, _ := strings.Cut(text, ":")
	a, err1 := strconv.ParseFloat(lo, 64)
	b, err2 := strconv.ParseFloat(hi, 64)
	if err := errors.Join(err1, err2); err != nil || !(a < b) {
		return 0, 0, fmt.Errorf("-range-C %q: two temperatures in °C, the lower first, such as 600:1400", text)
	}
	r.rangeGiven = true
	return pyro.Celsius(a), pyro.Celsius(b), nil
}

func (r *reader) setOneBand(j job, low, high pyro.Temperature) error {
	if j.band == "" || j.setting == 0 || j.emissivity == 0 {
		return errors.New("a log needs -band-nm, -setting (what it was set to; 1 where it has none) and -emissivity (what to estimate with), or -short-nm and -long-nm of a two-colour instrument")
	}
	band, err := show.Band("band-nm", j.band)
	if err != nil {
		return err
	}
	d := detector.Indicator{Band: band, Emissivity: j.setting, Window: j.windowSetting, Background: pyro.Temperature(j.backgroundSetting), Low: low, High: high}
	if err := d.Check(); err != nil {
		return err
	}
	s := scene{
		emissivity: input{fmt.Sprintf("emissivity %g ± %g", j.emissivity, j.emissivityStd), j.emissivity, j.emissivityStd, 1e-3, 1},
		window:     input{"window", j.window, j.windowStd, 1e-3, 1},
		background: input{"background", j.background, j.backgroundStd, 0, float64(pyro.BandMax)},
	}
	if j.window == 0 {
		s.window.value = j.windowSetting
	}
	if j.background < 0 {
		s.background.value = j.backgroundSetting
	}
	if b := s.background.value; b != 0 && !(b >= float64(pyro.BandMin)) {
		return fmt.Errorf("-background-K %g is below %v; is it in °C?", b, pyro.BandMin)
	}
	s.window.name = fmt.Sprintf("window %g ± %g", s.window.value, j.windowStd)
	s.background.name = fmt.Sprintf("background %g K ± %g K", s.background.value, j.backgroundStd)
	for _, in := range []input{s.emissivity, s.window, s.background} {
		if !(in.std >= 0) || math.IsInf(in.std, 0) || in.clamp(in.value) != in.value {
			return fmt.Errorf("%s: the value must lie in %g to %g, its standard uncertainty must be finite and not negative", in.name, in.lo, in.hi)
		}
	}
	r.model = oneBand(d, s, j.indicatorStd)
	r.shown = func(t pyro.Temperature, step float64) error {
		d.Resolution = step
		_, err := d.Radiance(t)
		return err
	}
	return nil
}

func (r *reader) setTwoColour(j job, low, high pyro.Temperature) error {
	if j.ratio == 0 {
		return errors.New("a two-colour log needs -emissivity-ratio, what to estimate with")
	}
	short, err := show.Band("short-nm", j.short)
	if err != nil {
		return err
	}
	long, err := show.Band("long-nm", j.long)
	if err != nil {
		return err
	}
	pair, err := show.WidestPair(short, long)
	if err != nil {
		return err
	}
	lo, hi := pair.Range()
	d := detector.RatioIndicator{Pair: pair, EmissivityRatio: j.ratioSetting, Low: max(low, lo), High: min(high, hi)}
	if err := d.Check(); err != nil {
		return err
	}
	in := input{fmt.Sprintf("emissivity ratio %g ± %g", j.ratio, j.ratioStd), j.ratio, j.ratioStd, 0.1, 10}
	if !(in.std >= 0) || math.IsInf(in.std, 0) || in.clamp(in.value) != in.value {
		return fmt.Errorf("%s: the value must lie in %g to %g, its standard uncertainty must be finite and not negative", in.name, in.lo, in.hi)
	}
	r.model = twoColour(d, in, j.indicatorStd)
	r.shown = func(t pyro.Temperature, step float64) error {
		d.Resolution = step
		_, err := d.Ratio(t)
		return err
	}
	return nil
}

// open finds the log's column of values.
func (r *reader) open(log *readings.Log, low, high pyro.Temperature) (err error) {
	if r.value = log.Column("current"); !r.value.Found {
		r.value, err = log.RequireTemperature("temperature")
		return err
	}
	if r.value.Unit != "mA" {
		return fmt.Errorf("column %s: currents are in mA: current_mA", r.value.Name)
	}
	if !r.rangeGiven {
		return errors.New("a log in mA needs -range-C, the temperatures at 4 and at 20 mA")
	}
	r.loop = &detector.CurrentLoop{Low: low, High: high}
	return r.loop.Check()
}

// read estimates one row.
func (r *reader) read(row *readings.LogRow) (e estimate, err error) {
	v, err := row.Number(r.value)
	if err != nil {
		return e, err
	}
	step := show.Resolution(strings.TrimSpace(row.Text(r.value)))
	var shown pyro.Temperature
	var end *detector.CensoredError
	if r.loop != nil {
		if shown, step, end, err = r.readLoop(v, step); err != nil {
			return e, row.Error(r.value, err)
		}
	} else {
		if shown, err = row.Temperature(r.value); err != nil {
			return e, err
		}
		if r.value.Unit == "F" {
			step *= 5.0 / 9
		}
		if err := r.shown(shown, step); err != nil && !(errors.As(err, &end) && r.rangeGiven) {
			return e, row.Error(r.value, err)
		}
	}
	e, err = r.model.estimate(shown, step, end)
	if err != nil {
		return e, row.Error(r.value, err)
	}
	if end != nil {
		e.notes = append(e.notes, "at the end of the range: a bound")
	}
	r.count(v, &e)
	return e, nil
}

// readLoop returns the indication behind a current.
func (r *reader) readLoop(mA, step float64) (shown pyro.Temperature, stepK float64, end *detector.CensoredError, err error) {
	loop := *r.loop
	loop.Resolution = step
	shown, state := loop.Temperature(mA)
	switch state {
	case detector.LoopMeasuring:
	case detector.LoopAtLow, detector.LoopAtHigh:
		end = &detector.CensoredError{Indicated: shown, AtHigh: state == detector.LoopAtHigh}
	default:
		return 0, 0, nil, fmt.Errorf("%g mA is no reading: %v", mA, state)
	}
	return shown, step * float64(loop.High-loop.Low) / 16, end, nil
}

// count notes a value that has stood for too long.
func (r *reader) count(v float64, e *estimate) {
	r.row++
	n := r.repeats.Next(v)
	switch {
	case n < r.limit:
		return
	case n == r.limit:
		r.runs = append(r.runs, detector.Run{Start: r.row - n + 1, Length: n, Value: v})
	default:
		r.runs[len(r.runs)-1].Length = n
	}
	e.notes = append(e.notes, fmt.Sprintf("the same value %d times running", n))
}
