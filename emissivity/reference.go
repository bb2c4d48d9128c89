package emissivity

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// reference is one measurement of a curve: points from to to−1 of what is known share a scale.
type reference struct {
	from, to int
	common   float64
}

// KnownCurve returns the process with its curve known from one measurement, such as that of a
// reflectometer at a reference temperature: values with their own standard uncertainties, and a
// relative standard uncertainty common that all of them share. As many calls of KnownAt would
// take the points for independent, and twenty of them with 3 % of scale error for a level known
// to 0.7 %. common is also the place for how far the level may have moved between the reference
// temperature and the present one.
//
// ln of the value at point a is ln ε plus an error of covariance
//
//	(Std_a/Value_a)² δ_ab + common²
//
// beside the process's roughness per channel.
func (p Process) KnownCurve(known []Known, common float64) Process {
	if len(known) == 0 {
		return p.fail("a known curve without points")
	}
	if !(common >= 0 && common <= 1) {
		return p.fail("a known curve with a common relative standard uncertainty of %g: it is a fraction, from 0 to 1", common)
	}
	from := len(p.known)
	for i, k := range known {
		before := p.err
		if p = p.KnownAt(k.Wavelength, k.Value, k.Std); p.err != nil && before == nil {
			p.err = fmt.Errorf("point %d of a known curve: %w", i, p.err)
			return p
		}
	}
	p.references = append(slices.Clip(p.references), reference{from, len(p.known), common})
	return p
}

// KnownCovariance returns the covariance of the errors of ln ε at points a and b of KnownPoints,
// without the roughness per channel.
func (p Process) KnownCovariance(a, b int) float64 {
	v := 0.0
	if a == b {
		u := p.known[a].Std / p.known[a].Value
		v = u * u
	}
	for _, r := range p.references {
		if r.from <= min(a, b) && max(a, b) < r.to {
			v += r.common * r.common
		}
	}
	return v
}

// knownWords lists what is known: single points, then curves.
func (p Process) knownWords() []string {
	var words []string
	for i, k := range p.known {
		if !slices.ContainsFunc(p.references, func(r reference) bool { return r.from <= i && i < r.to }) {
			words = append(words, fmt.Sprintf("ε %.3g ± %.2g at %v", k.Value, k.Std, k.Wavelength))
		}
	}
	for _, r := range p.references {
		lo, hi := pyro.Wavelength(math.Inf(1)), pyro.Wavelength(0)
		for _, k := range p.known[r.from:r.to] {
			lo, hi = min(lo, k.Wavelength), max(hi, k.Wavelength)
		}
		words = append(words, fmt.Sprintf("a curve of %d points from %v to %v, ± %.2g %% in common", r.to-r.from, lo, hi, 100*r.common))
	}
	return words
}
