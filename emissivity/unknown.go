package emissivity

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"candent/pyro"
)

// ErrProcess is what every error of a process's description wraps.
var ErrProcess = errors.New("emissivity: process")

// Term is a random part of ln ε, stationary in ln λ, with standard deviation Std and the
// Matérn covariance of order 5/2: for wavelengths λ, µ and r = √5·|ln(λ/µ)|/Length,
//
//	Std² · (1 + r + r²/3) · e⁻ʳ
//
// (C. E. Rasmussen, C. K. I. Williams, Gaussian Processes for Machine Learning, 2006,
// eq. 4.17). Its curves have two derivatives. The zero value is no term.
type Term struct{ Std, Length float64 }

func (t Term) covariance(x float64) float64 {
	if t.Std == 0 {
		return 0
	}
	r := math.Sqrt(5) * math.Abs(x) / t.Length
	return t.Std * t.Std * (1 + r + r*r/3) * math.Exp(-r)
}

// Component is one Gaussian process of a mixture: ln ε is Gaussian, with
//
//	mean        ln Level + Slope·ln(λ/Centre)   (+ the logarithm of a given curve)
//	covariance  Spread² + SlopeSpread²·ln(λ/Centre)·ln(µ/Centre) + Smooth + Rough
//
// and, besides, an independent part of standard deviation Roughness in each channel: what a
// band sees of lines finer than any term. The curve without that part is held to ε ≤ 1.
type Component struct {
	Weight      float64 // share of the mixture; they need not add up to 1
	Level       float64 // median of ε at Centre, before ε ≤ 1 is asked
	Slope       float64 // d ln ε/d ln λ
	Centre      pyro.Wavelength
	Spread      float64 // of the level at all wavelengths alike; +Inf: the level is unknown
	SlopeSpread float64
	Smooth      Term
	Rough       Term
	Roughness   float64
}

// Process is a surface whose curve nobody knows: ln ε(λ) is a mixture of Gaussian
// processes, with ε ≤ 1. A result that rests on it is a posterior.
//
// ε ≤ 1 is a truncation: of each component the curves that rise above 1 at the channels are
// struck out and the rest is normalised, so that weights are those of what is left. A link
// that bends ε under 1 was not taken: it would make the noise of dark surfaces depend on
// the temperature, and a curve's level mean something else near 1.
//
// Values are immutable: methods return changed copies.
type Process struct {
	name       string
	components []Component
	curve      pyro.Spectrum
	known      []Known
	references []reference
	relative   bool
	wide       bool
	err        error
}

// NewProcess returns a mixture of the components under a name.
func NewProcess(name string, components ...Component) Process {
	p := Process{name: name, components: slices.Clone(components)}
	if len(components) == 0 {
		return p.fail("%s has no component", name)
	}
	total := 0.0
	for i, c := range components {
		for _, f := range []struct {
			name  string
			value float64
			max   float64
		}{
			{"Weight", c.Weight, math.MaxFloat64}, {"SlopeSpread", c.SlopeSpread, 20},
			{"Smooth.Std", c.Smooth.Std, 20}, {"Rough.Std", c.Rough.Std, 20}, {"Roughness", c.Roughness, 1},
			{"Smooth.Length", c.Smooth.Length, math.MaxFloat64}, {"Rough.Length", c.Rough.Length, math.MaxFloat64},
			{"|Slope|", math.Abs(c.Slope), 20}, {"Centre", float64(c.Centre), math.MaxFloat64},
		} {
			if !(f.value >= 0 && f.value <= f.max) {
				return p.fail("component %d of %s: %s = %g: it must be finite, not negative and not above %.3g", i, name, f.name, f.value, f.max)
			}
		}
		switch {
		case !(c.Level > 0 && c.Level <= 3):
			return p.fail("component %d of %s: level %g: it is an emissivity, above 0 (and a median before ε ≤ 1 is asked, at most 3)", i, name, c.Level)
		case !(c.Spread >= 0 && c.Spread <= 20) && !math.IsInf(c.Spread, 1):
			return p.fail("component %d of %s: spread %g: it is a standard deviation of ln ε, or +Inf", i, name, c.Spread)
		case c.Smooth.Std > 0 && c.Smooth.Length == 0, c.Rough.Std > 0 && c.Rough.Length == 0:
			return p.fail("component %d of %s: a term needs a length in ln λ", i, name)
		case (c.Slope != 0 || c.SlopeSpread != 0) && c.Centre == 0:
			return p.fail("component %d of %s: a slope needs the wavelength Centre at which the level holds", i, name)
		case math.IsInf(c.Spread, 1) != math.IsInf(components[0].Spread, 1):
			return p.fail("%s: either every component knows its level, or none", name)
		}
		total += c.Weight
	}
	if !(total > 0) || math.IsInf(total, 0) {
		return p.fail("the weights of %s add up to %g", name, total)
	}
	for i := range p.components {
		p.components[i].Weight /= total
	}
	if math.IsInf(components[0].Spread, 1) {
		p.relative = true
	}
	return p
}

// The frozen default.
const (
	darkShare, darkLevel, darkSpread    = 0.40, 0.80, 0.20
	metalShare, metalLevel, metalSpread = 0.60, 0.42, 0.45
	filmShare                           = 0.10 // of either, with the rough term
	filmStd, filmLength                 = 0.15, 0.12
	channelRoughness                    = 0.008
)

var smoothLengths = [...]float64{0.5, 1, 2}

// Unknown is the surface that nobody characterised: 40 % dark (level 0.80, spread 0.20) and
// 60 % metal-like (level 0.42, spread 0.45), each over smooth lengths 0.5, 1 and 2 in equal
// shares, with 0.008 of roughness per channel; a tenth of either has a rough term (0.15,
// length 0.12) beside, for films that interfere. The spread is the standard deviation of the
// smooth term: the level is one draw with the curve. All figures are judgements, frozen
// before the curves it is tested on were seen, the tenth included.
//
// It claims surfaces of ε ≥ 0.2. Bright metals are not among them: name the kind.
func Unknown() Process {
	var list []Component
	for _, base := range []struct{ share, level, spread float64 }{{darkShare, darkLevel, darkSpread}, {metalShare, metalLevel, metalSpread}} {
		for _, film := range []bool{false, true} {
			for _, length := range smoothLengths {
				c := Component{Weight: base.share / float64(len(smoothLengths)) * (1 - filmShare), Level: base.level,
					Smooth: Term{base.spread, length}, Roughness: channelRoughness}
				if film {
					c.Weight *= filmShare / (1 - filmShare)
					c.Rough = Term{filmStd, filmLength}
				}
				list = append(list, c)
			}
		}
	}
	p := NewProcess("unknown surface", list...)
	p.wide = true
	return p
}

// About is a surface of a kind whose curve is tabulated: ln ε is that of the curve with the
// standard deviation spread, correlated over a length of 1 in ln λ, and a tenth of the spread
// as roughness per channel (judgements both, after the spread of nominally equal metals,
// whose specimens differ by a factor common to neighbouring wavelengths). With a spread of 0
// the curve is taken as exact.
func About(name string, curve pyro.Spectrum, spread float64) Process {
	c := Component{Weight: 1, Level: 1}
	if spread != 0 {
		c.Smooth, c.Roughness = Term{spread, 1}, spread/10
	}
	p := NewProcess(name, c)
	if curve == nil {
		return p.fail("%s: no curve", name)
	}
	p.curve = curve
	return p
}

// KnownAt returns the process with its emissivity at λ known as value ± std, a datum beside
// the readings that acts on ln ε with std/value: keep that below about 0.2.
func (p Process) KnownAt(λ pyro.Wavelength, value, std float64) Process {
	if !(value > 0 && value <= 1) || !(std > 0) || math.IsInf(std, 0) || !(λ > 0) {
		return p.fail("emissivity %g ± %g at %v: it must lie above 0 and not above 1, with a positive standard uncertainty", value, std, λ)
	}
	if p.relative {
		return p.fail("an emissivity known at %v says nothing about a relative level", λ)
	}
	p.known = append(slices.Clip(p.known), Known{λ, value, std})
	p.wide = false
	return p
}

// Relative returns the process with its level declared relative: the readings carry an
// unknown common gain, ε ≤ 1 is not asked, and what comes out is an amplitude.
func (p Process) Relative() Process {
	if len(p.known) > 0 {
		return p.fail("an emissivity known at %v says nothing about a relative level", p.known[0].Wavelength)
	}
	p.relative = true
	p.components = slices.Clone(p.components)
	for i := range p.components {
		p.components[i].Spread = math.Inf(1)
	}
	return p
}

// AcceptWide returns the process with its wide range declared acceptable where one or two
// bands alone must do: the interval is then little more than that range.
func (p Process) AcceptWide() Process {
	p.wide = false
	return p
}

// IsWide reports whether the process is one for all surfaces that nobody declared
// acceptable for one or two bands.
func (p Process) IsWide() bool { return p.wide }

// IsRelative reports whether the level is declared relative.
func (p Process) IsRelative() bool { return p.relative }

// Components returns the mixture, its weights adding up to 1.
func (p Process) Components() []Component { return slices.Clone(p.components) }

// KnownPoints returns the emissivities known at single wavelengths.
func (p Process) KnownPoints() []Known { return slices.Clone(p.known) }

// Err returns what is wrong with the description, or nil.
func (p Process) Err() error { return p.err }

// LogMean returns the mean of ln ε at λ in component c; NaN where a given curve ends.
func (p Process) LogMean(c int, λ pyro.Wavelength) float64 {
	k := &p.components[c]
	m := math.Log(k.Level)
	if k.Slope != 0 {
		m += k.Slope * math.Log(float64(λ/k.Centre))
	}
	if p.curve != nil {
		m += math.Log(p.curve.At(λ))
	}
	return m
}

// Covariance returns the covariance of ln ε at λ and µ in component c, without the
// roughness per channel and without a spread that is infinite.
func (p Process) Covariance(c int, λ, µ pyro.Wavelength) float64 {
	k := &p.components[c]
	v := k.Smooth.covariance(math.Log(float64(λ / µ)))
	v += k.Rough.covariance(math.Log(float64(λ / µ)))
	if !math.IsInf(k.Spread, 1) {
		v += k.Spread * k.Spread
	}
	if k.SlopeSpread != 0 {
		v += k.SlopeSpread * k.SlopeSpread * math.Log(float64(λ/k.Centre)) * math.Log(float64(µ/k.Centre))
	}
	return v
}

// Range returns the central 95 % of the emissivity at λ that the process assumes, ε ≤ 1 at
// that wavelength included; 0 and +Inf where the level is relative.
func (p Process) Range(λ pyro.Wavelength) (lo, hi float64) {
	if p.relative {
		return 0, math.Inf(1)
	}
	below := func(x float64) float64 { // P(ln ε < x)
		sum := 0.0
		for i := range p.components {
			m, s := p.LogMean(i, λ), math.Sqrt(p.Covariance(i, λ, λ))
			if s == 0 {
				if m <= x {
					sum += p.components[i].Weight
				}
				continue
			}
			sum += p.components[i].Weight * normal((x-m)/s) / normal(-m/s)
		}
		return sum
	}
	quantile := func(q float64) float64 {
		a, b := -40.0, 0.0
		for range 60 {
			if m := (a + b) / 2; below(m) < q {
				a = m
			} else {
				b = m
			}
		}
		return math.Exp(b)
	}
	return quantile(0.025), quantile(0.975)
}

// normal is the standard normal distribution function.
func normal(z float64) float64 { return math.Erfc(-z/math.Sqrt2) / 2 }

// String names the process and what is known beside it.
func (p Process) String() string {
	var b strings.Builder
	b.WriteString(p.name)
	if p.relative {
		b.WriteString(" of relative level")
	}
	for _, words := range p.knownWords() {
		b.WriteString(", " + words)
	}
	return b.String()
}

func (p Process) fail(format string, args ...any) Process {
	if p.err == nil {
		p.err = fmt.Errorf("%w: "+format, append([]any{ErrProcess}, args...)...)
	}
	return p
}
