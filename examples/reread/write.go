package main

import (
	"encoding/json"
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

// assumed names what the result rests on.
func assumed(j job) string {
	if j.twoColour() {
		if j.ratioStd == 0 {
			return fmt.Sprintf("holds only if the emissivity ratio is exactly %g", j.ratio)
		}
		return fmt.Sprintf("holds if the emissivity ratio is %g ± %g", j.ratio, j.ratioStd)
	}
	s := fmt.Sprintf("holds if the emissivity is %g ± %g", j.emissivity, j.emissivityStd)
	if j.emissivityStd == 0 {
		s = fmt.Sprintf("holds only if the emissivity is exactly %g", j.emissivity)
	}
	walls := j.background
	if walls < 0 {
		walls = j.backgroundSetting
	}
	if walls == 0 {
		return s + " and nothing else shines in"
	}
	return s + fmt.Sprintf(" and the surroundings are at %g K ± %g K", walls, j.backgroundStd)
}

func background(t float64) string {
	if t == 0 {
		return "surroundings dark"
	}
	return fmt.Sprintf("surroundings at %g K", t)
}

func writeHead(out io.Writer, j job, r *reader, unit show.Unit) {
	if j.twoColour() {
		fmt.Fprintf(out, "Two-colour log, %s and %s nm, estimated again\n\n", j.short, j.long)
		fmt.Fprintf(out, "  it was set to   emissivity ratio %g\n", j.ratioSetting)
		fmt.Fprintf(out, "  now taken       emissivity ratio %g ± %g\n", j.ratio, j.ratioStd)
	} else {
		fmt.Fprintf(out, "Log of one band, %s nm, estimated again\n\n", j.band)
		fmt.Fprintf(out, "  it was set to   emissivity %g, window %g, %s\n", j.setting, j.windowSetting, background(j.backgroundSetting))
		now := r.model.inputs[2:]
		words := []string{now[0].name, strings.TrimSuffix(now[1].name, " ± 0"), background(now[2].value)}
		if now[2].std > 0 {
			words[2] = fmt.Sprintf("%s ± %g K", words[2], now[2].std)
		}
		fmt.Fprintf(out, "  now taken       %s\n", strings.Join(words, ", "))
	}
	if !r.rangeGiven {
		fmt.Fprintf(out, "  no -range-C: a value at the end of its range would pass for a reading\n")
	}
	if j.indicatorStd == 0 {
		fmt.Fprintf(out, "  the indicator itself is taken for exact; -indicator-std-K changes that\n")
	}
	fmt.Fprintf(out, "\nEach row %s.\nAn error of that is the same in all rows: no average makes it smaller.\n", assumed(j))
	fmt.Fprintf(out, "\n%-16s %11s %9s %6s   %s\n", "row", "shown / "+unit.String(), "T / "+unit.String(), "u / K", "95 % interval / "+unit.String())
}

func writeText(out io.Writer, label string, e estimate, unit show.Unit) error {
	shown := fmt.Sprintf("%.1f", unit.In(e.shown))
	line := ""
	switch {
	case e.determined():
		v, u := fit.WithUncertainty(unit.In(e.t), e.std)
		if e.std == 0 {
			v, u = fmt.Sprintf("%.1f", unit.In(e.t)), "-"
		}
		line = fmt.Sprintf("%-16s %11s %9s %6s   %-24s", label, shown, v, u, fmt.Sprintf("%.1f to %.1f", unit.In(*e.lo), unit.In(*e.hi)))
	case e.lo != nil:
		line = fmt.Sprintf("%-16s %11s %9s %6s   %-24s", label, shown, "-", "-", fmt.Sprintf("at least %.1f (97.5 %%)", unit.In(*e.lo)))
	default:
		line = fmt.Sprintf("%-16s %11s %9s %6s   %-24s", label, shown, "-", "-", fmt.Sprintf("at most %.1f (97.5 %%)", unit.In(*e.hi)))
	}
	_, err := fmt.Fprintln(out, strings.TrimRight(line+" "+strings.Join(e.notes, "; "), " "))
	return err
}

// writeFoot writes the budget of the hottest row, and what stood too long.
func writeFoot(out io.Writer, e *estimate, label string, runs []detector.Run, unit show.Unit) {
	if e != nil {
		fmt.Fprintf(out, "\nBudget at %.1f %v (%s): what one standard uncertainty more of each adds to T\n\n", unit.In(e.t), unit, label)
		for _, s := range e.budget {
			fmt.Fprintf(out, "  %-34s %+8.2f K\n", s.Input, s.K)
		}
		fmt.Fprintf(out, "  %-34s %8.2f K\n", "together (root of the squares)", math.Abs(e.std))
	}
	for i, r := range runs {
		if i == 0 {
			fmt.Fprintln(out)
		}
		fmt.Fprintf(out, "The value %g stands in %d readings running, from reading %d on: held, stuck, or at an end?\n", r.Value, r.Length, r.Start)
	}
}

func writeJSON(out io.Writer, j job, row *readings.LogRow, e estimate) error {
	line := struct {
		Time     *float64    `json:"time_s,omitempty"`
		Label    *string     `json:"label,omitempty"`
		Shown    float64     `json:"indicated_K"`
		T        *float64    `json:"temperature_K,omitempty"`
		Std      *float64    `json:"std_K,omitempty"`
		Interval [2]*float64 `json:"interval95_K"`
		State    string      `json:"state"`
		Budget   []share     `json:"budget"`
		Notes    []string    `json:"notes"`
	}{Shown: show.Round(float64(e.shown)), State: "bounded", Notes: append([]string{assumed(j)}, e.notes...), Budget: []share{}}
	if row.HasTimeS {
		line.Time = &row.TimeS
	} else {
		line.Label = &row.Label
	}
	end := func(t *pyro.Temperature) *float64 { return show.Rounded((*float64)(t)) }
	line.Interval = [2]*float64{end(e.lo), end(e.hi)}
	if e.determined() {
		line.State = "determined"
		line.T, line.Std = end(&e.t), show.Rounded(&e.std)
		for _, s := range e.budget {
			line.Budget = append(line.Budget, share{s.Input, show.Round(s.K)})
		}
	}
	return json.NewEncoder(out).Encode(line)
}
