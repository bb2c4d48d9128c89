package fit

import (
	"fmt"
	"strings"

	"candent/pyro"
)

// LearnReport is what Learn found.
type LearnReport struct {
	Curves, Points int
	From, To       pyro.Wavelength // that the curves cover
	Centre         pyro.Wavelength // at which the level holds
	LogLikelihood  float64         // marginal, at the maximum
	Parameters     []LearnedParameter
	Lengths        []LearnedLength // of the mixture
	Warnings       []string
}

// LearnedParameter is a hyperparameter with its standard uncertainty from the curvature of the
// likelihood.
type LearnedParameter struct {
	Name    string // level, slope, spread, length, roughness
	Value   float64
	Std     float64
	LogStd  float64 // of ln Value; 0 for the slope
	HasStd  bool
	AtBound bool // the search ended at an end of the range: there is no uncertainty
}

// LearnedLength is one length of the mixture.
type LearnedLength struct {
	Length, Weight float64
	Spread         float64 // with Factor in it
	Freedom        float64 // degrees of freedom that the spread rests on
	Factor         float64 // Student's, on the spread
}

// Parameter returns the hyperparameter of that name, and whether there is one.
func (r *LearnReport) Parameter(name string) (LearnedParameter, bool) {
	for _, p := range r.Parameters {
		if p.Name == name {
			return p, true
		}
	}
	return LearnedParameter{}, false
}

func (r *LearnReport) warn(format string, args ...any) {
	r.Warnings = append(r.Warnings, fmt.Sprintf(format, args...))
}

// String prints the report for a person.
func (r *LearnReport) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "learned from %d curves, %d points from %.4g to %.4g; ln likelihood %.2f\n", r.Curves, r.Points, r.From, r.To, r.LogLikelihood)
	for _, p := range r.Parameters {
		switch {
		case p.AtBound:
			fmt.Fprintf(&b, "  %-10s %.3g, at an end of its search\n", p.Name, p.Value)
		case !p.HasStd:
			fmt.Fprintf(&b, "  %-10s %.3g\n", p.Name, p.Value)
		default:
			value, std := WithUncertainty(p.Value, p.Std)
			fmt.Fprintf(&b, "  %-10s %s ± %s", p.Name, value, std)
			if p.Name == "level" {
				fmt.Fprintf(&b, " at %.4g", r.Centre)
			}
			b.WriteByte('\n')
		}
	}
	for _, l := range r.Lengths {
		fmt.Fprintf(&b, "  %4.1f %% with length %.3g in ln λ, spread %.3g (Student's factor %.3g in it)\n", 100*l.Weight, l.Length, l.Spread, l.Factor)
	}
	for _, w := range r.Warnings {
		fmt.Fprintf(&b, "  warning: %s\n", w)
	}
	return b.String()
}
