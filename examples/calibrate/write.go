package main

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strings"

	"candent/examples/internal/show"
	"candent/fit"
	"candent/pyro"
)

// pointStd returns the standard uncertainty of a point in K, of temperature and signal.
func (c *calibrated) pointStd(i int) float64 {
	p := c.points[i]
	r, err := c.curve.Read(p.Signal, p.Std)
	bare, err2 := c.curve.Read(p.Signal, 0)
	if err != nil || err2 != nil {
		return p.StdK
	}
	return math.Sqrt(p.StdK*p.StdK + max(r.StdK*r.StdK-bare.StdK*bare.StdK, 0))
}

// signal returns the signal of the curve at t.
func (c *calibrated) signal(t pyro.Temperature) float64 {
	switch k := c.curve.(type) {
	case *fit.Calibration:
		return k.Curve.Signal(t)
	case *fit.GainCalibration:
		return k.Signal(t)
	}
	return math.NaN()
}

// ends returns the temperatures of the coldest and the hottest point.
func (c *calibrated) ends() (lo, hi pyro.Temperature) {
	lo, hi = c.points[0].T, c.points[0].T
	for _, p := range c.points {
		lo, hi = min(lo, p.T), max(hi, p.T)
	}
	return lo, hi
}

// digits prints an uncertainty.
func digits(u float64) string {
	_, std := fit.WithUncertainty(0, u)
	return std
}

func plural(n int, word string) string {
	if n == 1 {
		return "one " + word
	}
	return fmt.Sprintf("%d %ss", n, word)
}

func writeCurve(out io.Writer, c *calibrated, unit show.Unit) error {
	var b strings.Builder
	chi2, dof := c.curve.ChiSquared()
	switch k := c.curve.(type) {
	case *fit.Calibration:
		fmt.Fprintf(&b, "Sakuma–Hattori curve through %s\n\n", plural(len(c.points), "point"))
		fmt.Fprintf(&b, "  S = C/(exp(c₂/(A T + B)) − 1), S in %s, T in K\n", signalUnit(c.unit))
		fmt.Fprintf(&b, "  A = %.8g µm, B = %.6g µm K, C = %.8g\n", k.Curve.A*1e6, k.Curve.B*1e6, k.Curve.C)
		if len(c.points) < 3 {
			fmt.Fprintf(&b, "  A and B were predicted from the band; how far that is off is not in the uncertainties\n")
		}
	case *fit.GainCalibration:
		fmt.Fprintf(&b, "Gain of a band of known responsivity from %s\n\n", plural(len(c.points), "point"))
		fmt.Fprintf(&b, "  S = g · mean spectral radiance of the band, S in %s\n", signalUnit(c.unit))
		fmt.Fprintf(&b, "  g = %.8g", k.Gain)
		if !c.noStd {
			fmt.Fprintf(&b, " ± %.2g", k.Std)
		}
		fmt.Fprintf(&b, " per W/(m² sr m)\n")
	}
	switch {
	case c.noStd:
		fmt.Fprintf(&b, "  no uncertainties were given: the curve has none\n")
	case dof > 0:
		fmt.Fprintf(&b, "  χ² = %.2g with %s of freedom%s\n", chi2, plural(dof, "degree"), judge(chi2, dof))
	default:
		fmt.Fprintf(&b, "  exact through the points: nothing is left to test it by\n")
	}
	for _, note := range c.assumed {
		fmt.Fprintf(&b, "  %s\n", note)
	}
	fmt.Fprintf(&b, "\n%-12s %9s %12s %9s %11s\n", "point", "T / "+unit.String(), "signal", "u / K", "read − T / K")
	for i, d := range c.curve.Departures() {
		u := "-"
		if !c.noStd {
			u = digits(c.pointStd(i))
		}
		fmt.Fprintf(&b, "%-12s %9.2f %12.5g %9s %+11.2f\n", c.name(i), unit.In(c.points[i].T), c.points[i].Signal, u, d)
	}
	fmt.Fprintf(&b, "\nThe curve (u: standard uncertainty of the curve alone, shared by all that is read with it)\n\n")
	fmt.Fprintf(&b, "%-12s %9s %12s %9s\n", "", "T / "+unit.String(), "signal", "u / K")
	for _, t := range c.ladder() {
		r, err := c.curve.Read(c.signal(t), 0)
		if err != nil {
			continue
		}
		u, mark := "-", ""
		if !c.noStd {
			u = digits(r.StdK)
		}
		if r.Extrapolated {
			mark = "extrapolated"
		}
		fmt.Fprintf(&b, "%-12s %9.0f %12.5g %9s\n", mark, unit.In(t), c.signal(t), u)
	}
	_, err := io.WriteString(out, b.String())
	return err
}

func signalUnit(unit string) string {
	if unit == "" {
		return "its unit"
	}
	return unit
}

// judge says what χ² means. The limits are about those of 1 % on either side.
func judge(chi2 float64, dof int) string {
	f := float64(dof)
	switch spread := 2.6 * math.Sqrt(2/f); {
	case chi2/f > 1+spread+2/f:
		return ": the points scatter more than their uncertainties say"
	case dof > 2 && chi2/f < 0.1:
		return ": the points scatter much less than their uncertainties say, as errors that they share do"
	}
	return ""
}

func (c *calibrated) name(i int) string {
	if c.labels[i] != "" {
		return c.labels[i]
	}
	return fmt.Sprintf("line %d", c.lines[i])
}

// ladder returns round temperatures from below the points to above them.
func (c *calibrated) ladder() []pyro.Temperature {
	lo, hi := c.ends()
	step := 100.0
	for float64(hi-lo)/step > 12 {
		step *= 2
	}
	var t []pyro.Temperature
	from := math.Floor((lo.Celsius()-step)/step) * step
	for v := from; v <= hi.Celsius()+2*step; v += step {
		if at := pyro.Celsius(v); at >= pyro.BandMin && at <= pyro.BandMax {
			t = append(t, at)
		}
	}
	return t
}

func writeLogHead(out io.Writer, c *calibrated, name string, unit show.Unit) {
	what := "read as a blackbody's"
	if c.shown != nil {
		what = "corrected; it holds for the emissivity that the indicator was set to"
	}
	fmt.Fprintf(out, "\nThe log %s, %s\n\n%-22s %9s %8s %10s   %s\n", name, what, "row", "T / "+unit.String(), "u / K", "of curve", "95 % interval / "+unit.String())
}

func writeRow(out io.Writer, r reading, unit show.Unit) error {
	note := strings.Join(r.notes, "; ")
	line := fmt.Sprintf("%-22s %9.1f %8s %10s   %-22s %s", r.label, unit.In(r.T), "-", "-", "none: no σ given", note)
	if r.hasStd {
		v, u := fit.WithUncertainty(unit.In(r.T), r.StdK)
		lo, hi := r.interval()
		line = fmt.Sprintf("%-22s %9s %8s %10s   %-22s %s", r.label, v, u, digits(r.sharedK), fmt.Sprintf("%.1f to %.1f", unit.In(lo), unit.In(hi)), note)
	}
	_, err := fmt.Fprintln(out, strings.TrimRight(line, " "))
	return err
}

func (r reading) interval() (lo, hi pyro.Temperature) {
	d := pyro.Temperature(show.Normal95 * r.StdK)
	return r.T - d, r.T + d
}

type pointJSON struct {
	Label     string   `json:"label,omitempty"`
	T         float64  `json:"temperature_K"`
	Std       *float64 `json:"std_K,omitempty"`
	Signal    float64  `json:"signal"`
	Departure float64  `json:"departure_K"`
}

func writeCurveJSON(out io.Writer, c *calibrated) error {
	chi2, dof := c.curve.ChiSquared()
	line := struct {
		Curve      string         `json:"curve"`
		A          *float64       `json:"A_m,omitempty"`
		B          *float64       `json:"B_m_K,omitempty"`
		C          *float64       `json:"C,omitempty"`
		Covariance *[3][3]float64 `json:"covariance_relativeC_A_B,omitempty"`
		Gain       *float64       `json:"gain,omitempty"`
		GainStd    *float64       `json:"gain_std,omitempty"`
		Unit       string         `json:"signal_unit"`
		ChiSquared *float64       `json:"chi_squared,omitempty"`
		Freedom    int            `json:"degrees_of_freedom"`
		Points     []pointJSON    `json:"points"`
		Notes      []string       `json:"notes"`
	}{Unit: c.unit, Freedom: dof, Notes: []string{}}
	rounded := func(v float64) *float64 { return show.Rounded(&v) }
	switch k := c.curve.(type) {
	case *fit.Calibration:
		line.Curve = "Sakuma-Hattori"
		line.A, line.B, line.C = rounded(k.Curve.A), rounded(k.Curve.B), rounded(k.Curve.C)
		if cov, ok := k.Covariance(); ok {
			for i := range cov {
				for l := range cov[i] {
					cov[i][l] = show.Round(cov[i][l])
				}
			}
			line.Covariance = &cov
		}
		if len(c.points) < 3 {
			line.Notes = append(line.Notes, "A and B were predicted from the band")
		}
	case *fit.GainCalibration:
		line.Curve, line.Gain = "gain", rounded(k.Gain)
		if !c.noStd {
			line.GainStd = rounded(k.Std)
		}
	}
	if !c.noStd && dof > 0 {
		line.ChiSquared = rounded(chi2)
	}
	line.Notes = append(line.Notes, c.assumed...)
	for i, d := range c.curve.Departures() {
		p := pointJSON{Label: c.labels[i], T: show.Round(float64(c.points[i].T)), Signal: show.Round(c.points[i].Signal), Departure: show.Round(d)}
		if !c.noStd {
			p.Std = rounded(c.pointStd(i))
		}
		line.Points = append(line.Points, p)
	}
	return json.NewEncoder(out).Encode(line)
}

func writeRowJSON(out io.Writer, r reading) error {
	line := struct {
		Time         *float64    `json:"time_s,omitempty"`
		Label        *string     `json:"label,omitempty"`
		T            float64     `json:"temperature_K"`
		Std          *float64    `json:"std_K,omitempty"`
		Interval     *[2]float64 `json:"interval95_K,omitempty"`
		Own          *float64    `json:"repeatability_K,omitempty"`
		Shared       *float64    `json:"shared_K,omitempty"`
		Extrapolated bool        `json:"extrapolated"`
		Notes        []string    `json:"notes"`
	}{Time: r.timeS, T: show.Round(float64(r.T)), Extrapolated: r.Extrapolated, Notes: append([]string{}, r.notes...)}
	if r.timeS == nil {
		line.Label = &r.label
	}
	if r.hasStd {
		lo, hi := r.interval()
		line.Std, line.Own, line.Shared = show.Rounded(&r.StdK), show.Rounded(&r.ownK), show.Rounded(&r.sharedK)
		line.Interval = &[2]float64{show.Round(float64(lo)), show.Round(float64(hi))}
	}
	return json.NewEncoder(out).Encode(line)
}
