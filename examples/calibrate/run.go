package main

import (
	"bufio"
	_ "embed"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"

	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
	"candent/pyro/detector"
)

//go:embed demo-points.csv
var demoPoints string

//go:embed demo-log.csv
var demoLog string

type job struct {
	in, log, band, unit, plot string
	gainOnly, json            bool
}

// curve is what fit.Calibration and fit.GainCalibration have in common.
type curve interface {
	Read(signal, std float64) (fit.Reading, error)
	Departures() []float64
	ChiSquared() (chi2 float64, degreesOfFreedom int)
}

// calibrated is the table with its curve.
type calibrated struct {
	*table
	curve curve
}

// run does the job and returns how many rows of the log could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer, progress *show.Progress) (failed int, err error) {
	unit, err := show.ParseUnit(j.unit)
	if err != nil {
		return 0, err
	}
	if j.in == "" && j.log != "" {
		return 0, errors.New("-log without -in: a log needs its own calibration, not the demo's")
	}
	var band *pyro.Band
	if j.band != "" {
		if band, err = show.Band("band-nm", j.band); err != nil {
			return 0, err
		}
	}
	c, err := calibrate(j, band, stdin)
	if err != nil {
		return 0, err
	}
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	if j.json {
		err = writeCurveJSON(out, c)
	} else {
		err = writeCurve(out, c, unit)
	}
	if err != nil {
		return 0, err
	}
	var drawn series
	if j.in == "" || j.log != "" {
		if failed, err = readLog(j, c, stdin, out, unit, &drawn, progress); err != nil {
			return failed, err
		}
	}
	if j.plot != "" {
		return failed, draw(j.plot, c, drawn, unit)
	}
	return failed, nil
}

func calibrate(j job, band *pyro.Band, stdin io.Reader) (*calibrated, error) {
	in, name, err := show.Open(j.in, demoPoints, stdin)
	if err != nil {
		return nil, err
	}
	defer in.Close()
	t, err := readTable(in, name, band)
	if err != nil {
		return nil, err
	}
	c := &calibrated{table: t}
	if j.gainOnly {
		c.curve, err = fit.CalibrateGain(t.points, band)
	} else {
		c.curve, err = fit.Calibrate(t.points, band)
	}
	return c, t.where(name, err)
}

// reading is one row of the log.
type reading struct {
	fit.Reading
	label   string
	timeS   *float64
	ownK    float64 // standard uncertainty of the row's own signal
	sharedK float64 // that of the curve, the same error in all rows
	hasStd  bool
	notes   []string
}

// logReader turns rows of the log into readings.
type logReader struct {
	c           *calibrated
	signal, std readings.Column
}

func readLog(j job, c *calibrated, stdin io.Reader, out io.Writer, unit show.Unit, drawn *series, progress *show.Progress) (failed int, err error) {
	if j.log == "-" && j.in == "-" {
		return 0, errors.New("-in - and -log -: standard input can be one of them")
	}
	in, name, err := show.Open(j.log, demoLog, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	if j.log == "" {
		name = "demo-log.csv"
	}
	log, err := readings.NewLog(in, readings.Settings{Name: name})
	if err != nil {
		return 0, err
	}
	r := logReader{c: c}
	if c.shown != nil {
		r.signal, err = log.RequireTemperature("indicated")
	} else {
		r.signal, err = log.Require("signal")
		r.std = log.Column("signal_std")
	}
	if err != nil {
		return 0, err
	}
	if c.shown == nil && (r.signal.Unit != c.unit || r.std.Found && r.std.Unit != c.unit) {
		return 0, fmt.Errorf("%s: the signal is in %q, that of the calibration in %q", name, r.signal.Unit, c.unit)
	}
	if !j.json {
		writeLogHead(out, c, name, unit)
	}
	for count := 1; ; count++ {
		progress.Step(count)
		row, err := log.Next()
		if errors.Is(err, io.EOF) {
			progress.Done()
			return failed, nil
		}
		var res reading
		label := ""
		if err == nil {
			label = row.Label
			res, err = r.read(row)
		} else if bad := (*readings.RowError)(nil); errors.As(err, &bad) {
			label = bad.ID
		}
		switch {
		case err != nil:
			failed++
			err = show.WriteError(out, j.json, label, err)
		case j.json:
			err = writeRowJSON(out, res)
		default:
			err = writeRow(out, res, unit)
		}
		if err != nil {
			return failed, err
		}
		if j.plot != "" && res.T > 0 {
			drawn.add(res, count, unit)
		}
	}
}

func (r *logReader) read(row *readings.LogRow) (res reading, err error) {
	signal, std, err := r.signalOf(row)
	if err != nil {
		return res, err
	}
	if res.Reading, err = r.c.curve.Read(signal, std); err != nil {
		return reading{}, err
	}
	alone, err := r.c.curve.Read(signal, 0)
	if err != nil {
		return reading{}, err
	}
	res.label, res.sharedK, res.hasStd = row.Label, alone.StdK, !r.c.noStd
	res.ownK = math.Sqrt(max(res.StdK*res.StdK-alone.StdK*alone.StdK, 0))
	if row.HasTimeS {
		t := row.TimeS
		res.timeS = &t
	}
	if res.Extrapolated {
		res.notes = append(res.notes, "extrapolated")
	}
	if r.c.shown == nil && !r.std.Found {
		res.notes = append(res.notes, "no uncertainty of the signal was given")
	}
	return res, nil
}

// signalOf returns a row's signal. An indication becomes the radiance of a blackbody at it:
// what the indicator took itself to see, over the emissivity that it was set to. The last
// digit is its uncertainty.
func (r *logReader) signalOf(row *readings.LogRow) (signal, std float64, err error) {
	if r.c.shown == nil {
		if signal, err = row.Number(r.signal); err != nil {
			return 0, 0, err
		}
		std, err = row.Optional(r.std, 0)
		return signal, std, err
	}
	t, err := row.Temperature(r.signal)
	if err != nil {
		return 0, 0, err
	}
	d := *r.c.shown
	signal, err = d.Radiance(t)
	if errors.Is(err, detector.ErrCensored) {
		err = nil // its range isn't known here
	}
	step := show.Resolution(strings.TrimSpace(row.Text(r.signal)))
	if r.signal.Unit == "F" {
		step *= 5.0 / 9
	}
	return signal, d.Slope(t) * step * show.Rectangular, err
}
