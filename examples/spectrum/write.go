package main

import (
	"encoding/json"
	"fmt"
	"io"
	"strings"

	"candent/examples/internal/show"
	"candent/fit"
)

// writeText writes what a person wants to read.
func writeText(out io.Writer, e estimated, unit show.Unit) error {
	var b strings.Builder
	r := e.result
	fmt.Fprintf(&b, "%s\n", name(e.spectrum.ID))
	iv, _ := r.Interval()
	t, state := r.Temperature()
	u, hasU := r.Uncertainty()
	percent, oneSided := 100*iv.Probability, 50*(1+iv.Probability)
	switch state {
	case fit.Determined:
		if hasU {
			v, std := fit.WithUncertainty(unit.In(t), u)
			fmt.Fprintf(&b, "  temperature  %s %v, standard uncertainty %s K\n", v, unit, std)
		} else {
			words := []string{}
			for _, basin := range r.Basins() {
				words = append(words, fmt.Sprintf("%.1f %v", unit.In(basin), unit))
			}
			fmt.Fprintf(&b, "  temperature  χ² is least at %s; no standard uncertainty would be fair\n", strings.Join(words, " and at "))
		}
		kind := ""
		if r.IntervalKind() == fit.PosteriorInterval {
			kind = ", posterior"
		}
		fmt.Fprintf(&b, "  interval     %.1f to %.1f %v (%.4g %%%s)\n", unit.In(iv.Low), unit.In(iv.High), unit, percent, kind)
	case fit.Bounded:
		switch {
		case iv.HighOpen:
			fmt.Fprintf(&b, "  temperature  at least %.1f %v (%.4g %%)\n", unit.In(iv.Low), unit, oneSided)
		case iv.LowOpen:
			fmt.Fprintf(&b, "  temperature  at most %.1f %v (%.4g %%)\n", unit.In(iv.High), unit, oneSided)
		default:
			fmt.Fprintf(&b, "  temperature  between %.1f and %.1f %v (%.4g %%)\n", unit.In(iv.Low), unit.In(iv.High), unit, percent)
		}
	default:
		fmt.Fprintf(&b, "  temperature  undetermined\n")
	}
	fmt.Fprintf(&b, "  assumed      %s\n", r.Assumption())
	if share, ok := r.EmissivityShare(); ok && share > 0.5 {
		fmt.Fprintf(&b, "  share        %s of u² is the emissivity assumption\n", show.Percent(share))
	}
	n := len(e.spectrum.Wavelengths)
	shown := -1
	for _, i := range []int{0, n / 2, n - 1} {
		ε, std, hasStd, ok := r.Emissivity(i)
		if !ok || i == shown {
			continue
		}
		shown = i
		what := "emissivity"
		if r.Relative() {
			what = "amplitude "
		}
		fmt.Fprintf(&b, "  %s   %.4g", what, ε)
		if hasStd {
			fmt.Fprintf(&b, " ± %.2g", std)
		}
		fmt.Fprintf(&b, " at %.4g\n", e.spectrum.Wavelengths[i])
	}
	for _, note := range e.notes() {
		fmt.Fprintf(&b, "  note         %s\n", note)
	}
	_, err := fmt.Fprintln(out, b.String())
	return err
}

// line is one JSON object a line: the result's own, with the spectrum's id, the notes of
// this program and the interval named by its probability.
type line struct {
	ID         string       `json:"id"`
	T          *float64     `json:"temperature_K,omitempty"`
	Std        *float64     `json:"std_K,omitempty"`
	Interval   *[2]*float64 `json:"interval95_K,omitempty"`
	State      string       `json:"state"`
	Basins     []float64    `json:"basins_K,omitempty"`
	Wavelength []float64    `json:"wavelength_um,omitempty"`
	Emissivity []float64    `json:"emissivity,omitempty"`
	EmissStd   []float64    `json:"emissivity_std,omitempty"`
	Amplitude  []float64    `json:"amplitude,omitempty"`
	AmplStd    []float64    `json:"amplitude_std,omitempty"`
	ChiSquared *float64     `json:"chi_squared,omitempty"`
	Freedom    *int         `json:"degrees_of_freedom,omitempty"`
	Model      string       `json:"model"`
	Notes      []string     `json:"notes"`
}

func writeJSON(out io.Writer, e estimated) error {
	text, err := json.Marshal(e.result)
	if err != nil {
		return err
	}
	var own struct {
		line
		Interval *[2]*float64 `json:"interval_K"`
	}
	if err := json.Unmarshal(text, &own); err != nil {
		return err
	}
	l := own.line
	l.ID, l.Interval, l.Notes = e.spectrum.ID, own.Interval, e.notes()
	if l.Notes == nil {
		l.Notes = []string{}
	}
	return json.NewEncoder(out).Encode(l)
}
