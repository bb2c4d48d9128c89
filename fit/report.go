package fit

import (
	"encoding/json"
	"fmt"
	"log/slog"
	"math"
	"strconv"
	"strings"
)

// WithUncertainty prints a value and its standard uncertainty, the latter to two
// significant digits and the former to the same place (JCGM 100:2008, 7.2.6).
func WithUncertainty(v, u float64) (value, std string) {
	place := 0
	if u > 0 {
		place = 1 - int(math.Floor(math.Log10(u)))
		if rounded := math.Round(u*math.Pow(10, float64(place))) / math.Pow(10, float64(place)); rounded >= math.Pow(10, float64(2-place)) {
			place-- // 0.0996 is 0.10
		}
	}
	if place > 0 {
		return fmt.Sprintf("%.*f", place, v), fmt.Sprintf("%.*f", place, u)
	}
	unit := math.Pow(10, float64(-place))
	return fmt.Sprintf("%.0f", math.Round(v/unit)*unit), fmt.Sprintf("%.0f", math.Round(u/unit)*unit)
}

// decimals returns how many show a width to three digits.
func decimals(width float64) int {
	if !(width > 0) || math.IsInf(width, 0) {
		return 1
	}
	return min(9, max(0, 2-int(math.Floor(math.Log10(width)))))
}

// Assumption words what the result rests on.
func (r *Result) Assumption() string {
	s := r.e.assume.Emissivity.String() + " assumed"
	if r.posterior != nil {
		s = r.assumedRange()
	}
	known := len(r.e.data) > 0
	for _, fixed := range r.e.fixed {
		known = known || fixed
	}
	if known {
		s += " with what is known of it"
	}
	switch {
	case r.e.deficient != "":
		return s + "; " + r.e.deficient
	case r.contradicted():
		return s + ", contradicted by the readings"
	case r.dof < 1 || !r.fitted || r.e.assume.Noise.unknown || r.e.assume.Loss.kind != square:
		return s + ", not tested"
	}
	return s + "; the readings do not contradict it, which is no proof"
}

// String returns the result in one line, with the assumption it rests on.
func (r *Result) String() string {
	iv, has := r.Interval()
	percent := fmt.Sprintf("%.4g %%", 100*iv.Probability)
	oneSided := fmt.Sprintf("%.4g %%", 100*(1+iv.Probability)/2)
	d := decimals(float64(iv.High - iv.Low))
	var s string
	t, state := r.Temperature()
	u, hasU := r.Uncertainty()
	switch {
	case state == Determined && hasU:
		value, std := WithUncertainty(float64(t), u)
		s = value + " K ± " + std + " K"
		if has {
			s += fmt.Sprintf(" (%s: %.*f to %.*f K)", percent, d, float64(iv.Low), d, float64(iv.High))
		}
	case state == Determined && has:
		s = fmt.Sprintf("%.*f to %.*f K (%s)", d, float64(iv.Low), d, float64(iv.High), percent)
		if basins := r.Basins(); len(basins) > 1 {
			words := make([]string, len(basins))
			for i, b := range basins {
				words[i] = fmt.Sprintf("%.*f", d, float64(b))
			}
			s += ", with minima at " + strings.Join(words, " and ") + " K"
		}
	case state == Bounded && iv.HighOpen:
		s = fmt.Sprintf("at least %.4g K (%s)", float64(iv.Low), oneSided)
	case state == Bounded && !iv.LowOpen:
		s = fmt.Sprintf("between %.4g and %.4g K (%s)", float64(iv.Low), float64(iv.High), percent)
	case state == Bounded:
		s = fmt.Sprintf("at most %.4g K (%s)", float64(iv.High), oneSided)
	case r.e.assume.Noise.unknown && r.dof <= 0:
		s = "temperature undetermined: the size of the noise is unknown and nothing is left to estimate it by"
	default:
		s = "temperature undetermined"
	}
	s += "; " + r.Assumption()
	if share, ok := r.EmissivityShare(); ok && share > 0.5 {
		part := fmt.Sprintf("%.0f %%", 100*share)
		if share >= 0.995 {
			part = "more than 99 %"
		}
		s += "; " + part + " of u² is the emissivity assumption"
	}
	if d := r.discrepancy; d != nil {
		s += fmt.Sprintf(" (with a smooth misfit of %.2g %% carried: %s)", 100*d.Std, d.words())
	}
	if state == Determined && hasU {
		middle := r.e.used[len(r.e.used)/2]
		if ε, std, hasStd, ok := r.Emissivity(middle); ok && hasStd {
			v, u := WithUncertainty(ε, std)
			if r.Relative() {
				v, u = fmt.Sprintf("%.3g", ε), fmt.Sprintf("%.2g", std)
			}
			s += fmt.Sprintf("; %s at %.4g %s ± %s", r.curveName(), r.e.bands[middle].Mean(), v, u)
		}
	}
	return s
}

func (r *Result) curveName() string {
	if r.Relative() {
		return "amplitude"
	}
	return "emissivity"
}

// Report returns everything that is known, for a person to read.
func (r *Result) Report() string {
	var b strings.Builder
	p := func(format string, args ...any) { fmt.Fprintf(&b, format+"\n", args...) }
	e := r.e
	p("%v", r)
	p("")
	p("Assumed")
	p("  surface       %v, opaque", e.assume.Emissivity)
	p("  noise         %v", e.assume.Noise)
	p("  range         %.0f K to %.0f K", float64(e.assume.Range.Min), float64(e.assume.Range.Max))
	if t := e.assume.Temperature; t.Value > 0 {
		p("  temperature   %v ± %.3g K beforehand", t.Value, t.StdK)
	}
	for _, d := range e.data {
		p("  known         %s", d.name)
	}
	for _, line := range e.sightWords() {
		p("  %s", line)
	}
	for _, s := range e.assume.Shared {
		p("  shared input  %s", s.Name)
	}
	if n := len(e.bands) - e.n; n > 0 {
		p("  masked        %d of %d channels", n, len(e.bands))
	}
	p("")
	p("Found")
	p("  state         %v", r.State())
	if iv, ok := r.Interval(); ok {
		d := decimals(float64(iv.High - iv.Low))
		lo, hi := fmt.Sprintf("%.*f K", d, float64(iv.Low)), fmt.Sprintf("%.*f K", d, float64(iv.High))
		if iv.LowOpen {
			lo = "open"
		}
		if iv.HighOpen {
			hi = "open"
		}
		p("  interval      %s to %s, %v, %.4g %%", lo, hi, r.IntervalKind(), 100*iv.Probability)
	}
	if r.fitted {
		p("  χ²            %.4g on %d degrees of freedom", r.shownChi2(), r.dof)
	}
	if r.State() == Determined && r.fitted {
		for _, name := range e.parameterNames() {
			switch v, u, state := r.Parameter(name); state {
			case ParameterDetermined:
				value, std := WithUncertainty(v, u)
				p("  %-22s %s ± %s", name, value, std)
			case ParameterUndetermined:
			default:
				p("  %-22s %.6g, %v", name, v, state)
			}
		}
		p("")
		p("  %-14s %-14s %s", "wavelength", r.curveName(), "standard uncertainty")
		for i, band := range e.bands {
			v, u, hasStd, ok := r.Emissivity(i)
			if !ok {
				continue
			}
			std := "none"
			if hasStd {
				std = fmt.Sprintf("%.2g", u)
			}
			p("  %-14s %-14.5g %s", fmt.Sprintf("%.4g", band.Mean()), v, std)
		}
	}
	if budget := r.Budget(); budget != nil {
		p("")
		p("%-42s %-9s %s", "Where u(T) comes from", "share", "effect of one u more")
		for _, s := range budget {
			effect, kept := "", ""
			if s.EffectK != 0 {
				effect = fmt.Sprintf("%+.2g K", s.EffectK)
			}
			if s.Shared {
				kept = "shared by all readings"
			}
			p("%s", strings.TrimRight(fmt.Sprintf("  %-40s %-9s %-21s %s", s.Name, fmt.Sprintf("%.2g K", s.StdK), effect, kept), " "))
		}
	}
	if len(r.notes) > 0 {
		p("")
		p("Notes")
		for _, n := range r.notes {
			p("  - %s", n)
		}
	}
	return b.String()
}

// MarshalJSON writes the result with units in the names; what is unknown is left out and
// an open end of the interval is null.
func (r *Result) MarshalJSON() ([]byte, error) {
	type number = *float64
	num := func(v float64) number {
		v = sevenDigits(v)
		return &v
	}
	out := struct {
		Temperature number     `json:"temperature_K,omitempty"`
		Std         number     `json:"std_K,omitempty"`
		Interval    *[2]number `json:"interval_K,omitempty"`
		Probability number     `json:"interval_probability,omitempty"`
		State       string     `json:"state"`
		Basins      []float64  `json:"basins_K,omitempty"`
		Wavelength  []float64  `json:"wavelength_um,omitempty"`
		Emissivity  []float64  `json:"emissivity,omitempty"`
		EmissStd    []float64  `json:"emissivity_std,omitempty"`
		Amplitude   []float64  `json:"amplitude,omitempty"`
		AmplStd     []float64  `json:"amplitude_std,omitempty"`
		ChiSquared  number     `json:"chi_squared,omitempty"`
		Freedom     *int       `json:"degrees_of_freedom,omitempty"`
		Misfit      number     `json:"smooth_misfit,omitempty"`
		MisfitEnds  *[2]number `json:"smooth_misfit_interval_K,omitempty"`
		Model       string     `json:"model"`
		Notes       []string   `json:"notes,omitempty"`
	}{State: r.State().String(), Model: r.e.assume.Emissivity.String(), Notes: r.Notes()}
	t, state := r.Temperature()
	if state == Determined {
		out.Temperature = num(float64(t))
	}
	if u, ok := r.Uncertainty(); ok {
		out.Std = num(u)
	}
	if iv, ok := r.Interval(); ok {
		out.Interval = &[2]number{}
		if !iv.LowOpen {
			out.Interval[0] = num(float64(iv.Low))
		}
		if !iv.HighOpen {
			out.Interval[1] = num(float64(iv.High))
		}
		out.Probability = num(iv.Probability)
	}
	for _, b := range r.Basins() {
		out.Basins = append(out.Basins, sevenDigits(float64(b)))
	}
	var value, std []float64
	for i, band := range r.e.bands {
		v, u, hasStd, ok := r.Emissivity(i)
		if !ok {
			continue
		}
		out.Wavelength = append(out.Wavelength, sevenDigits(band.Mean().Micrometres()))
		value = append(value, sevenDigits(v))
		if hasStd {
			std = append(std, sevenDigits(u))
		}
	}
	out.Emissivity, out.EmissStd = value, std
	if r.Relative() {
		out.Emissivity, out.EmissStd, out.Amplitude, out.AmplStd = nil, nil, value, std
	}
	if r.fitted {
		out.ChiSquared, out.Freedom = num(r.shownChi2()), &r.dof
	}
	if d := r.discrepancy; d != nil {
		out.Misfit, out.MisfitEnds = num(d.Std), &[2]number{}
		if !d.Interval.LowOpen {
			out.MisfitEnds[0] = num(float64(d.Interval.Low))
		}
		if !d.Interval.HighOpen {
			out.MisfitEnds[1] = num(float64(d.Interval.High))
		}
	}
	return json.Marshal(out)
}

// shownChi2 is χ², or 0 where it is what rounding leaves of an exact fit.
func (r *Result) shownChi2() float64 {
	if r.chi2 < 1e-12 {
		return 0
	}
	return r.chi2
}

// sevenDigits rounds to seven significant digits, more than any reading has.
func sevenDigits(v float64) float64 {
	r, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 7, 64), 64)
	if err != nil {
		return v
	}
	return r
}

// LogValue lets slog print the result as a group.
func (r *Result) LogValue() slog.Value {
	attrs := []slog.Attr{slog.String("state", r.State().String()), slog.String("assumed", r.e.assume.Emissivity.String())}
	if t, state := r.Temperature(); state == Determined {
		attrs = append(attrs, slog.Float64("temperature_K", float64(t)))
	}
	if u, ok := r.Uncertainty(); ok {
		attrs = append(attrs, slog.Float64("std_K", u))
	}
	if iv, ok := r.Interval(); ok {
		if !iv.LowOpen {
			attrs = append(attrs, slog.Float64("low_K", float64(iv.Low)))
		}
		if !iv.HighOpen {
			attrs = append(attrs, slog.Float64("high_K", float64(iv.High)))
		}
	}
	return slog.GroupValue(attrs...)
}
