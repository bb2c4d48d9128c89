package main

import (
	"encoding/json"
	"fmt"
	"io"
	"strings"

	"candent/emissivity"
	"candent/examples/internal/show"
	"candent/fit"
)

// rivals are the surfaces of -compare, beside the one that -emissivity names.
var rivals = []string{"grey", "linear", "exponential", "unknown", "metal", "oxide", "ceramic", "carbon"}

// compare puts a spectrum to the rivals.
func (c *estimators) compare(e estimated) (*fit.Comparison, error) {
	noise, _, _ := show.Noise(e.spectrum)
	bands, err := show.Lines(e.spectrum.Wavelengths)
	if err != nil {
		return nil, err
	}
	list := []emissivity.Surface{e.surface}
	for _, name := range rivals {
		s, err := show.Surface(name)
		if err != nil {
			return nil, err
		}
		if s = show.For(s, e.spectrum); s.String() != e.surface.String() {
			list = append(list, s)
		}
	}
	return fit.Compare(bands, fit.Assume{Noise: noise}, list, e.reading)
}

// writeComparison writes the table below a spectrum's own lines.
func writeComparison(out io.Writer, c *fit.Comparison) error {
	text := strings.TrimRight(c.String(), "\n")
	for _, line := range strings.Split(text, "\n") {
		if line != "" {
			line = "  " + strings.TrimRight(line, " ")
		}
		if _, err := fmt.Fprintln(out, line); err != nil {
			return err
		}
	}
	_, err := fmt.Fprintln(out)
	return err
}

// writeComparisonJSON writes a line of its own for a spectrum.
func writeComparisonJSON(out io.Writer, id string, c *fit.Comparison) error {
	type surface struct {
		Model       string      `json:"model"`
		Error       string      `json:"error,omitempty"`
		T           *float64    `json:"temperature_K,omitempty"`
		Interval    [2]*float64 `json:"interval95_K"`
		ChiSquared  *float64    `json:"chi_squared,omitempty"`
		Freedom     *int        `json:"degrees_of_freedom,omitempty"`
		AICc        *float64    `json:"aicc,omitempty"`
		BIC         *float64    `json:"bic,omitempty"`
		LogEvidence *float64    `json:"log_evidence,omitempty"`
		LeaveOneOut *float64    `json:"leave_one_out,omitempty"`
		Weight      float64     `json:"weight"`
	}
	line := struct {
		ID       string    `json:"id"`
		Compared []surface `json:"compared"`
		Measure  string    `json:"weights_by"`
		Verdict  string    `json:"verdict"`
	}{ID: id, Measure: c.Measure.String(), Verdict: c.Verdict()}
	score := func(s fit.Score) *float64 {
		if !s.OK {
			return nil
		}
		v := show.Round(s.Value)
		return &v
	}
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		s := surface{Model: row.Name}
		if row.Err != nil {
			s.Error = row.Err.Error()
			line.Compared = append(line.Compared, s)
			continue
		}
		if t, state := row.Result.Temperature(); state == fit.Determined {
			v := show.Round(float64(t))
			s.T = &v
		}
		if iv, ok := row.Result.Interval(); ok {
			lo, hi := show.Round(float64(iv.Low)), show.Round(float64(iv.High))
			if !iv.LowOpen {
				s.Interval[0] = &lo
			}
			if !iv.HighOpen {
				s.Interval[1] = &hi
			}
		}
		χ2, dof := show.Round(row.ChiSquared), row.Freedom
		s.ChiSquared, s.Freedom = &χ2, &dof
		s.AICc, s.BIC, s.LogEvidence, s.LeaveOneOut, s.Weight = score(row.AICc), score(row.BIC), score(row.LogEvidence), score(row.LeaveOneOut), show.Round(row.Weight)
		line.Compared = append(line.Compared, s)
	}
	return json.NewEncoder(out).Encode(line)
}
