package pyro

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// Pair is two bands compiled for two-colour (ratio) thermometry. It is immutable
// and safe for concurrent use. The bands may be narrow or wide and may overlap.
//
//	Q(T) = S_short(T)/S_long(T),   reading ratio = (ε_short/ε_long) · Q(T)
//
// with Planck's law throughout, not Wien's.
type Pair struct {
	short, long *Band
	lo, hi      Temperature
	table       *ratioTable
}

// Errors of a ratio that has no temperature, or more than one, in the pair's range.
var (
	ErrPair      = errors.New("pyro: pair")
	ErrRatioLow  = errors.New("pyro: ratio below the pair's range")
	ErrRatioHigh = errors.New("pyro: ratio above the pair's range")
)

// AmbiguousRatio is the error of a ratio that several temperatures give.
type AmbiguousRatio struct {
	Ratio        float64
	Temperatures []Temperature // rising
}

func (e *AmbiguousRatio) Error() string {
	return fmt.Sprintf("pyro: ratio %g is given by %d temperatures, %v: compile the pair over a range that holds one of them",
		e.Ratio, len(e.Temperatures), e.Temperatures)
}

// NewPair compiles short and long, in that order of mean wavelength, for
// temperatures from lo to hi.
func NewPair(short, long *Band, lo, hi Temperature) (*Pair, error) {
	switch {
	case short == nil || long == nil:
		return nil, fmt.Errorf("%w: a band is nil", ErrPair)
	case !(lo < hi) || !(lo >= BandMin) || !(hi <= BandMax):
		return nil, fmt.Errorf("%w: range %v to %v: it must rise and lie inside %v to %v", ErrPair, lo, hi, BandMin, BandMax)
	case short.Mean() >= long.Mean():
		return nil, fmt.Errorf("%w: bands at %v and %v: the shorter comes first; are the channels swapped?", ErrPair, short.Mean(), long.Mean())
	}
	if err := errors.Join(short.Check(lo), long.Check(lo)); err != nil {
		return nil, err
	}
	p := &Pair{short: short, long: long, lo: lo, hi: hi}
	if q := p.Ratio(lo); !(q > 0) || math.IsInf(q, 0) {
		return nil, fmt.Errorf("%w: at %v the shorter band's radiance is not a float64: raise the low end of the range", ErrPair, lo)
	}
	p.table = newRatioTable(p.logRatio, 1/float64(hi), 1/float64(lo))
	switch {
	case p.table == nil:
		return nil, fmt.Errorf("%w: the ratio turns too sharply between %v and %v to be tabulated: narrow the range", ErrPair, lo, hi)
	case len(p.table.runs) == 1 && math.Abs(p.table.runs[0].last.y-p.table.runs[0].first.y) <= minSpan:
		return nil, fmt.Errorf("%w: the ratio of bands at %v and %v is the same at all temperatures: take bands further apart", ErrPair, short.Mean(), long.Mean())
	}
	return p, nil
}

// minSpan is the least total change of ln Q that a pair is compiled for.
const minSpan = 1e-9

// logRatio returns ln Q at 1/T = v. What is common to all nodes of a band is taken out of
// its sum, so that nothing underflows and close bands cost no digits.
func (p *Pair) logRatio(v float64) float64 {
	a, b := p.short.longest(), p.long.longest()
	return 5*math.Log(b/a) - C2*v*(b-a)/(a*b) + math.Log(p.short.reducedRadiance(v)/p.long.reducedRadiance(v))
}

// Ratio returns Q(t), the ratio that a grey surface at t gives.
func (p *Pair) Ratio(t Temperature) float64 { return p.short.Radiance(t) / p.long.Radiance(t) }

// LogSlope returns d lnQ/d lnT at t. It is negative where the ratio falls with
// temperature, which overlapping bands can do.
func (p *Pair) LogSlope(t Temperature) float64 {
	if t >= p.lo && t <= p.hi {
		return p.table.logSlope(1 / float64(t))
	}
	return p.short.LogSlope(t) - p.long.LogSlope(t)
}

// EffectiveWavelength returns the effective wavelength of the ratio at t: the Λ at
// which c₂/(Λt) equals d lnQ/d lnT. For two lines in Wien's limit it is λ₁λ₂/(λ₂−λ₁).
// One per cent of emissivity ratio is worth 0.01·Λt²/c₂.
func (p *Pair) EffectiveWavelength(t Temperature) Wavelength {
	return Wavelength(C2 / (float64(t) * p.LogSlope(t)))
}

// Short returns the band of shorter wavelength.
func (p *Pair) Short() *Band { return p.short }

// Long returns the band of longer wavelength.
func (p *Pair) Long() *Band { return p.long }

// Range returns the temperatures that the pair was compiled for.
func (p *Pair) Range() (lo, hi Temperature) { return p.lo, p.hi }

// Monotonic reports whether each ratio belongs to one temperature at most.
func (p *Pair) Monotonic() bool { return len(p.table.runs) == 1 }

// Branch is a range of temperatures over which the ratio of a pair only rises or only
// falls, with the ratios that a grey surface gives at its ends. A pair compiled from Lo to
// Hi is monotonic.
type Branch struct {
	Lo, Hi           Temperature
	RatioLo, RatioHi float64
}

// Branches returns the ranges between the temperatures at which the ratio turns round,
// coldest first: the whole range where it never does.
func (p *Pair) Branches() []Branch {
	var all []Branch
	for _, r := range slices.Backward(p.table.runs) {
		all = append(all, Branch{
			Lo: p.clamp(p.table.x(r.last.cell, r.last.z)), Hi: p.clamp(p.table.x(r.first.cell, r.first.z)),
			RatioLo: math.Exp(r.last.y), RatioHi: math.Exp(r.first.y),
		})
	}
	return all
}

// clamp returns 1/v inside the pair's range.
func (p *Pair) clamp(v float64) Temperature { return min(max(Temperature(1/v), p.lo), p.hi) }

// Temperature returns the temperature at which the reading ratio (short over long,
// both in W m⁻² sr⁻¹ m⁻¹ or both relative to the same blackbody scale) belongs to a
// surface of the given emissivity ratio ε_short/ε_long. An unreachable ratio wraps
// ErrRatioLow or ErrRatioHigh, one with several temperatures is an *AmbiguousRatio. A ratio
// that misses the range by rounding belongs to its end.
//
// It is that of the direct quadrature to 1e-13·(1 + (1 + |ln Q|)/|d lnQ/d lnT|), relative.
func (p *Pair) Temperature(ratio, emissivityRatio float64) (Temperature, error) {
	t, _, err := p.solve(ratio, emissivityRatio)
	return t, err
}

// Estimate returns what Temperature and Uncertainty return, in one step for control loops.
func (p *Pair) Estimate(ratio, emissivityRatio, ratioRel, emissivityRatioRel float64) (t Temperature, stdK float64, err error) {
	t, n, err := p.solve(ratio, emissivityRatio)
	if err != nil {
		return 0, 0, err
	}
	return t, uncertainty(t, n, ratioRel, emissivityRatioRel), nil
}

// solve returns the temperature of a ratio and d lnQ/d lnT there.
func (p *Pair) solve(ratio, emissivityRatio float64) (t Temperature, logSlope float64, err error) {
	if !(ratio > 0) || math.IsInf(ratio, 0) || !(emissivityRatio > 0) || math.IsInf(emissivityRatio, 0) {
		return 0, 0, fmt.Errorf("%w: ratio %g with emissivity ratio %g: both must be positive and finite", ErrPair, ratio, emissivityRatio)
	}
	want := math.Log(ratio / emissivityRatio)
	found := 0
	for i := range p.table.runs {
		v, n, ok := p.table.solve(&p.table.runs[i], want)
		if !ok {
			continue
		}
		if at := p.clamp(v); found == 0 || at != t {
			t, logSlope = at, n
			found++
		}
	}
	switch found {
	case 1:
		return t, logSlope, nil
	case 0:
		return 0, 0, p.unreachable(ratio, emissivityRatio, want)
	}
	return 0, 0, p.ambiguous(ratio, want)
}

func (p *Pair) ambiguous(ratio, want float64) error {
	e := &AmbiguousRatio{Ratio: ratio}
	for i := range slices.Backward(p.table.runs) {
		if v, _, ok := p.table.solve(&p.table.runs[i], want); ok {
			e.Temperatures = append(e.Temperatures, p.clamp(v))
		}
	}
	e.Temperatures = slices.Compact(e.Temperatures)
	return e
}

func (p *Pair) unreachable(ratio, emissivityRatio, want float64) error {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, r := range p.table.runs {
		lo, hi = min(lo, r.first.y, r.last.y), max(hi, r.first.y, r.last.y)
	}
	if want < lo {
		return fmt.Errorf("%w: ratio %g over emissivity ratio %g lies below %.4g, the least between %v and %v: the target is colder, the short channel has lost its signal, or the channels are swapped",
			ErrRatioLow, ratio, emissivityRatio, math.Exp(lo), p.lo, p.hi)
	}
	limit := math.Pow(float64(p.long.Mean())/float64(p.short.Mean()), 4)
	why := "the target is hotter, the long channel is saturated, or the channels are swapped"
	if math.Exp(want) >= limit {
		why = fmt.Sprintf("it is above the Rayleigh–Jeans limit %.4g of these wavelengths, which no temperature reaches: the long channel is saturated, or the channels are swapped", limit)
	}
	return fmt.Errorf("%w: ratio %g over emissivity ratio %g lies above %.4g, the most between %v and %v: %s",
		ErrRatioHigh, ratio, emissivityRatio, math.Exp(hi), p.lo, p.hi, why)
}

// Uncertainty returns the standard uncertainty in K at t that follows from relative
// standard uncertainties of the reading ratio and of the emissivity ratio, taken as
// independent: T/|d lnQ/d lnT| times their root sum of squares.
func (p *Pair) Uncertainty(t Temperature, ratioRel, emissivityRatioRel float64) float64 {
	return uncertainty(t, p.LogSlope(t), ratioRel, emissivityRatioRel)
}

func uncertainty(t Temperature, logSlope, ratioRel, emissivityRatioRel float64) float64 {
	return float64(t) / math.Abs(logSlope) * math.Hypot(ratioRel, emissivityRatioRel)
}
