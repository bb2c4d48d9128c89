package fit

import (
	"fmt"
	"strings"

	"candent/pyro"
)

// sightWords says what is assumed of the way of the light, a line each.
func (e *Estimator) sightWords() []string {
	a := &e.assume
	value := func(i *pyro.Input) string {
		unit := ""
		if i.Unit != "" {
			unit = " " + i.Unit
		}
		s := fmt.Sprintf("%.6g%s", i.Value, unit)
		if i.PerReading {
			s = "new with each reading"
		}
		if i.Std > 0 {
			s += fmt.Sprintf(" ± %.2g%s", i.Std, unit)
		}
		return s
	}
	var lines []string
	p := func(format string, args ...any) { lines = append(lines, fmt.Sprintf(format, args...)) }
	if a.Surroundings.Empty() {
		p("surroundings  nothing shines in")
	}
	for i := range a.Surroundings.Zones {
		z := &a.Surroundings.Zones[i]
		var parts []string
		if z.Factor != nil {
			parts = append(parts, "view factor "+value(z.Factor))
		}
		switch {
		case z.Temperature != nil:
			parts = append(parts, value(z.Temperature))
		case z.Radiance != nil:
			parts = append(parts, "its radiance known as a spectrum")
		default:
			parts = append(parts, "read by a second instrument")
		}
		p("surroundings  %s: %s", z.Name, strings.Join(parts, ", "))
	}
	if len(a.Surroundings.Zones) > 0 && !(len(a.Surroundings.Zones) == 1 && a.Surroundings.Zones[0].Factor == nil) {
		p("surroundings  the rest: %v", a.Surroundings.Remainder)
	}
	if len(a.Path) == 0 {
		p("path          clear")
	}
	for i := range a.Path {
		l := &a.Path[i]
		var parts []string
		for _, in := range []*pyro.Input{l.Transmittance, l.Slope, l.Length, l.Emittance, l.Temperature} {
			if in != nil {
				parts = append(parts, in.Name+" "+value(in))
			}
		}
		p("path          %s", strings.Join(append([]string{l.Name}, parts...), ", "))
	}
	if a.Field.Whole() {
		p("field         filled by the target")
	}
	for _, in := range []*pyro.Input{a.Field.Fraction, a.Field.Rest, a.Field.Spread} {
		if in != nil {
			p("field         %s %s", in.Name, value(in))
		}
	}
	if a.Detectors != nil {
		p("detectors     declared, one for each band")
	}
	if a.Stray != nil {
		p("stray light   %s", value(a.Stray))
	}
	return lines
}
