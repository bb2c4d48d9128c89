package main

import (
	"bufio"
	_ "embed"
	"encoding/json"
	"errors"
	"fmt"
	"io"

	"candent/emissivity"
	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

//go:embed demo.csv
var demo string

type job struct {
	in, band, unit, plot              string
	ε, εStd, gain, gainRel            float64
	window, windowStd, wallStd, noise float64
	json                              bool
}

// estimators are the right one, and the one that ignores the walls.
type estimators struct{ right, blind *fit.Estimator }

func compile(j job) (e estimators, err error) {
	band, err := show.Band("band-nm", j.band)
	if err != nil {
		return e, err
	}
	family := emissivity.Grey().WithPrior("level", j.ε, j.εStd)
	if j.εStd == 0 {
		family = emissivity.Grey().Fix("level", j.ε)
	}
	a := fit.Assume{
		Emissivity:   family,
		Noise:        fit.Relative(j.noise),
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall temperature", Unit: "K", Value: 1400, Std: j.wallStd, PerReading: true}),
		Path:         []sightline.Layer{sightline.Window(&pyro.Input{Name: "window", Value: j.window, Std: j.windowStd})},
		Detectors: []detector.Channel{{
			Gain:     &pyro.Input{Name: "gain", Value: j.gain, Std: j.gain * j.gainRel},
			Exposure: &pyro.Input{Name: "exposure", Value: 1, PerReading: true},
		}},
		Range: fit.Range{Min: 500, Max: 2500},
	}
	if e.right, err = fit.New([]*pyro.Band{band}, a); err != nil {
		return e, err
	}
	a.Surroundings = sightline.Surroundings{}
	e.blind, err = fit.New([]*pyro.Band{band}, a)
	return e, err
}

// reading is one row's answers; blind is nil where ignoring the walls gives none.
type reading struct {
	label string
	wall  pyro.Temperature
	right *fit.Result
	blind *pyro.Temperature
}

func (e estimators) read(label string, signal, wall, exposure float64) (reading, error) {
	r := reading{label: label, wall: pyro.Temperature(wall)}
	var err error
	if r.right, err = e.right.Estimate(fit.Readings{Signal: []float64{signal}, Inputs: []float64{wall, exposure}}); err != nil {
		return r, err
	}
	if b, err := e.blind.Estimate(fit.Readings{Signal: []float64{signal}, Inputs: []float64{exposure}}); err == nil {
		if t, state := b.Temperature(); state == fit.Determined {
			r.blind = &t
		}
	}
	return r, nil
}

// readRow takes a row's numbers and reads the load by them.
func (e estimators) readRow(row *readings.LogRow, signal, wall, exposure readings.Column) (reading, error) {
	s, err := row.Number(signal)
	if err != nil {
		return reading{}, err
	}
	w, err := row.Temperature(wall)
	if err != nil {
		return reading{}, err
	}
	x, err := row.Optional(exposure, 1)
	if err != nil {
		return reading{}, err
	}
	return e.read(row.Label, s, float64(w), x)
}

// run does the job and returns how many rows could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer) (failed int, err error) {
	unit, err := show.ParseUnit(j.unit)
	if err != nil {
		return 0, err
	}
	e, err := compile(j)
	if err != nil {
		return 0, err
	}
	in, name, err := show.Open(j.in, demo, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	log, err := readings.NewLog(in, readings.Settings{Name: name})
	if err != nil {
		return 0, err
	}
	signal, err := log.Require("signal")
	if err != nil {
		return 0, err
	}
	wall, err := log.RequireTemperature("wall")
	if err != nil {
		return 0, err
	}
	exposure := log.Column("exposure")
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	if !j.json {
		writeHead(out, j, unit)
	}
	var all []reading
	for {
		row, err := log.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		label := ""
		var r reading
		if err == nil {
			label = row.Label
			r, err = e.readRow(row, signal, wall, exposure)
		} else if bad := (*readings.RowError)(nil); errors.As(err, &bad) {
			label = bad.ID
		}
		switch {
		case err != nil:
			failed++
			err = show.WriteError(out, j.json, label, err)
		case j.json:
			all = append(all, r)
			err = writeJSON(out, r)
		default:
			all = append(all, r)
			err = writeText(out, r, unit)
		}
		if err != nil {
			return failed, err
		}
	}
	if !j.json {
		writeMean(out, all, unit)
	}
	if j.plot != "" {
		return failed, draw(j.plot, all, unit)
	}
	return failed, nil
}

func writeHead(out io.Writer, j job, unit show.Unit) {
	fmt.Fprintf(out, "Load seen in a furnace, band %s nm\n", j.band)
	fmt.Fprintf(out, "Assumed: emissivity %g ± %g, an enclosure as hot as its wall reading ± %g K, window %g ± %g,\n", j.ε, j.εStd, j.wallStd, j.window, j.windowStd)
	fmt.Fprintf(out, "gain ± %.2g %%, noise %.2g %%, a load that is opaque and fills the field.\n\n", 100*j.gainRel, 100*j.noise)
	fmt.Fprintf(out, "%-22s %9s   %9s %7s   %-24s %s\n", "row", "wall/"+unit.String(), "load/"+unit.String(), "u/K", "95 % interval/"+unit.String(), "walls ignored/"+unit.String())
}

func writeText(out io.Writer, r reading, unit show.Unit) error {
	iv, _ := r.right.Interval()
	end := func(t pyro.Temperature, open bool) string {
		if open {
			return "open"
		}
		return fmt.Sprintf("%.0f", unit.In(t))
	}
	load, u := "-", "-"
	if t, state := r.right.Temperature(); state == fit.Determined {
		load = fmt.Sprintf("%.0f", unit.In(t))
		if std, ok := r.right.Uncertainty(); ok {
			load, u = fit.WithUncertainty(unit.In(t), std)
		}
	}
	interval := end(iv.Low, iv.LowOpen) + " to " + end(iv.High, iv.HighOpen)
	if iv.LowOpen && !iv.HighOpen {
		interval = "at most " + end(iv.High, false)
	}
	blind := "-"
	if r.blind != nil {
		blind = fmt.Sprintf("%.0f", unit.In(*r.blind))
	}
	_, err := fmt.Fprintf(out, "%-22s %9.0f   %9s %7s   %-24s %s\n", r.label, unit.In(r.wall), load, u, interval, blind)
	return err
}

// writeMean writes the mean over the rows that have an uncertainty, and where it comes from.
func writeMean(out io.Writer, all []reading, unit show.Unit) {
	var list []*fit.Result
	for _, r := range all {
		if _, ok := r.right.Uncertainty(); ok {
			list = append(list, r.right)
		}
	}
	if len(list) == 0 {
		return
	}
	m, err := fit.Average(list)
	if err != nil {
		return
	}
	t, u := fit.WithUncertainty(unit.In(m.T), m.StdK)
	fmt.Fprintf(out, "\nMean of %d rows: %s %v, u = %s K, of which %.1f K is new with each reading and %.1f K is shared:\n", m.Readings, t, unit, u, m.RepeatabilityK, m.SharedK)
	fmt.Fprintf(out, "averaging removes the first part only.\n\n")
	last := list[len(list)-1]
	fmt.Fprintf(out, "Where u of the last row comes from\n  %-20s %-8s %s\n", "input", "share", "effect of one u more")
	for _, s := range last.Budget() {
		effect, kept := "", ""
		if s.EffectK != 0 {
			effect = fmt.Sprintf("%+.1f K", s.EffectK)
		}
		if s.Shared {
			kept = "shared by all rows"
		}
		line := fmt.Sprintf("  %-20s %-8s %-21s %s", s.Name, fmt.Sprintf("%.1f K", s.StdK), effect, kept)
		fmt.Fprintln(out, trimRight(line))
	}
	fmt.Fprint(out, "\nA reading is no safety interlock.\n")
}

func trimRight(s string) string {
	for len(s) > 0 && s[len(s)-1] == ' ' {
		s = s[:len(s)-1]
	}
	return s
}

func writeJSON(out io.Writer, r reading) error {
	type share struct {
		Input string  `json:"input"`
		Share float64 `json:"share_K"`
	}
	line := struct {
		Label         string      `json:"label"`
		T             *float64    `json:"temperature_K"`
		Std           *float64    `json:"std_K"`
		Interval      [2]*float64 `json:"interval95_K"`
		State         string      `json:"state"`
		Repeatability *float64    `json:"repeatability_K"`
		Shared        *float64    `json:"shared_K"`
		Budget        []share     `json:"budget"`
		Ignored       *float64    `json:"walls_ignored_K"`
		Notes         []string    `json:"notes"`
	}{Label: r.label, State: r.right.State().String(), Budget: []share{}, Notes: r.right.Notes()}
	if t, state := r.right.Temperature(); state == fit.Determined {
		line.T = rounded(float64(t))
	}
	if u, ok := r.right.Uncertainty(); ok {
		line.Std = rounded(u)
	}
	if iv, ok := r.right.Interval(); ok {
		if !iv.LowOpen {
			line.Interval[0] = rounded(float64(iv.Low))
		}
		if !iv.HighOpen {
			line.Interval[1] = rounded(float64(iv.High))
		}
	}
	if a, b, ok := r.right.Split(); ok {
		line.Repeatability, line.Shared = rounded(a), rounded(b)
	}
	for _, s := range r.right.Budget() {
		line.Budget = append(line.Budget, share{s.Name, show.Round(s.StdK)})
	}
	if r.blind != nil {
		line.Ignored = rounded(float64(*r.blind))
	}
	if line.Notes == nil {
		line.Notes = []string{}
	}
	return json.NewEncoder(out).Encode(line)
}

func rounded(v float64) *float64 { return show.Rounded(&v) }
