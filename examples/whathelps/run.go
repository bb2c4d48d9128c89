package main

import (
	"bufio"
	_ "embed"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strings"

	"candent/emissivity"
	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
)

//go:embed demo.csv
var demo string

type job struct {
	in, surface, add           string
	scale, contact, emissivity float64 // in per cent, K, per cent
	acceptWide, json           bool
}

// explanation stands below the tables.
const explanation = `Each line estimates the same readings again as if one more thing were known. Something that has
yet to be measured is taken to confirm the estimate; the kind of a surface moves it instead. What
stands first is what to find out next, if it can be found out.

A reading is no safety interlock.
`

// run does the job and returns how many spectra could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer) (failed int, err error) {
	surface, err := show.Surface(j.surface)
	if err != nil {
		return 0, err
	}
	if p, ok := surface.(emissivity.Process); ok && j.acceptWide {
		surface = p.AcceptWide()
	}
	ask := fit.Ask{ContactStdK: j.contact, EmissivityRel: j.emissivity / 100}
	if !(j.contact > 0) || !(j.emissivity > 0) || !(j.scale >= 0 && j.scale <= 50) {
		return 0, fmt.Errorf("-contact-K %g, -emissivity-percent %g, -scale-percent %g: the first two must be positive, the last from 0 to 50", j.contact, j.emissivity, j.scale)
	}
	for _, text := range strings.Split(j.add, ",") {
		if text = strings.TrimSpace(text); text == "" {
			continue
		}
		b, err := show.Band("add-nm", text)
		if err != nil {
			return 0, err
		}
		ask.Bands = append(ask.Bands, b)
	}
	in, label, err := show.Open(j.in, demo, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	spectra, err := readings.NewSpectra(in, readings.Settings{Name: label})
	if err != nil {
		return 0, err
	}
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	answered := false
	for {
		s, err := spectra.Next()
		if errors.Is(err, io.EOF) {
			if answered && !j.json {
				fmt.Fprint(out, "\n"+explanation)
			}
			return failed, nil
		}
		id := ""
		var advice *fit.Advice
		if err == nil {
			id = s.ID
			advice, err = consult(s, surface, j.scale/100, ask)
		} else if row := (*readings.RowError)(nil); errors.As(err, &row) {
			id = row.ID
		}
		switch {
		case err != nil:
			failed++
			err = show.WriteError(out, j.json, id, err)
		case j.json:
			err = writeJSON(out, id, surface, advice)
		default:
			if answered {
				fmt.Fprintln(out)
			}
			answered = true
			_, err = fmt.Fprintf(out, "%s\n\n%s", id, indent(advice.String()))
		}
		if err != nil {
			return failed, err
		}
	}
}

// consult asks for one spectrum.
func consult(s *readings.Spectrum, surface emissivity.Surface, scale float64, ask fit.Ask) (*fit.Advice, error) {
	bands, err := show.Lines(s.Wavelengths)
	if err != nil {
		return nil, err
	}
	noise, std, note := show.Noise(s)
	a := fit.Assume{Emissivity: show.For(surface, s), Noise: noise}
	if scale > 0 && !s.Relative {
		a.Shared = []fit.Shared{fit.SharedScale("calibration scale", scale, len(bands))}
	}
	e, err := fit.New(bands, a)
	if err != nil {
		if wide := (*fit.WideError)(nil); errors.As(err, &wide) {
			err = fmt.Errorf("%w. Name one with -emissivity; -accept-wide takes the range as it is", err)
		}
		return nil, err
	}
	advice, err := e.WhatHelps(fit.Readings{Signal: s.Signal, Std: std}, ask)
	if err == nil && note != "" {
		advice.Notes = append(advice.Notes, note)
	}
	return advice, err
}

func indent(text string) string {
	lines := strings.SplitAfter(text, "\n")
	for i, l := range lines {
		if strings.TrimSpace(l) != "" {
			lines[i] = "  " + l
		}
	}
	return strings.Join(lines, "")
}

// known is an outcome as JSON: what is unknown is left out, an open end is null.
type known struct {
	T        *float64     `json:"temperature_K,omitempty"`
	Std      *float64     `json:"std_K,omitempty"`
	Interval *[2]*float64 `json:"interval95_K,omitempty"`
	State    string       `json:"state"`
}

func of(o fit.Outcome) known {
	num := func(v float64) *float64 { return show.Rounded(&v) }
	k := known{State: o.State.String()}
	if o.State == fit.Determined {
		k.T = num(float64(o.T))
	}
	if o.HasStd {
		k.Std = num(o.StdK)
	}
	end := func(t pyro.Temperature, open bool) *float64 {
		if open {
			return nil
		}
		return num(float64(t))
	}
	iv := o.Interval
	k.Interval = &[2]*float64{end(iv.Low, iv.LowOpen), end(iv.High, iv.HighOpen)}
	return k
}

func writeJSON(out io.Writer, id string, surface emissivity.Surface, a *fit.Advice) error {
	type help struct {
		Kind   string `json:"kind"`
		Name   string `json:"name,omitempty"`
		Action string `json:"action"`
		known
		Note string `json:"note,omitempty"`
	}
	line := struct {
		ID    string `json:"id"`
		Model string `json:"model"`
		known
		Helps []help   `json:"helps"`
		Notes []string `json:"notes"`
	}{ID: id, Model: surface.String(), known: of(a.Before), Notes: append([]string{}, a.Notes...)}
	for _, h := range a.Helps {
		line.Helps = append(line.Helps, help{h.Kind.String(), h.Name, h.Action, of(h.After), h.Note})
	}
	return json.NewEncoder(out).Encode(line)
}
