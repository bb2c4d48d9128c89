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
	// ln Q on a grid of equal steps in 1/T, hottest first.
	invT, logQ []float64
	inverse    *inverseTable // nil where ln Q turns round, or is too bent for it
}

// inverseTable holds v = 1/T as a function of y = ln Q by cubic Hermite interpolation over
// equal steps of y.
type inverseTable struct {
	from, by float64
	v, slope []float64 // at the steps; slope is dv/dy times the step
}

const (
	inverseSteps = 1024
	inverseBound = 2e-13 // relative, of v half-way between steps, or there is no table
)

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

// pairSteps is the number of grid intervals that are searched for turning points.
const pairSteps = 512

// Range returns the temperatures that the pair is compiled for.
func (p *Pair) Range() (lo, hi Temperature) {
	return Temperature(1 / p.invT[pairSteps]), Temperature(1 / p.invT[0])
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
	p := &Pair{short: short, long: long, invT: make([]float64, pairSteps+1), logQ: make([]float64, pairSteps+1)}
	for i := range p.invT {
		f := float64(i) / pairSteps
		p.invT[i] = (1-f)/float64(hi) + f/float64(lo)
		p.logQ[i] = p.logRatio(Temperature(1 / p.invT[i]))
		if math.IsInf(p.logQ[i], 0) || math.IsNaN(p.logQ[i]) {
			return nil, fmt.Errorf("%w: at %v the shorter band's radiance is not a float64: raise the low end of the range", ErrPair, Temperature(1/p.invT[i]))
		}
	}
	p.inverse = p.compileInverse()
	return p, nil
}

// compileInverse tabulates 1/T against ln Q, where that is one smooth function.
func (p *Pair) compileInverse() *inverseTable {
	if !p.Monotonic() {
		return nil
	}
	first, last := p.logQ[0], p.logQ[pairSteps]
	t := &inverseTable{from: first, by: (last - first) / inverseSteps, v: make([]float64, inverseSteps+1), slope: make([]float64, inverseSteps+1)}
	at := func(y float64) float64 { return 1 / float64(p.search(y)) }
	for i := range t.v {
		y := first + t.by*float64(i)
		switch i {
		case 0:
			t.v[i] = p.invT[0]
		case inverseSteps:
			t.v[i] = p.invT[pairSteps]
		default:
			t.v[i] = at(y)
		}
		T := Temperature(1 / t.v[i])
		t.slope[i] = -t.by * t.v[i] / p.LogSlope(T) // dv/dy = −v/(d lnQ/d lnT)
	}
	for i := range inverseSteps {
		y := first + t.by*(float64(i)+0.5)
		v, _, _ := t.at(y)
		if want := at(y); !(math.Abs(v-want) <= inverseBound*want) {
			return nil
		}
	}
	return t
}

// at returns v and dv/dy at y; ok is false outside the table, but for rounding at its ends.
func (t *inverseTable) at(y float64) (v, slope float64, ok bool) {
	u := (y - t.from) / t.by
	if !(u > -1e-9 && u < inverseSteps+1e-9) {
		return 0, 0, false
	}
	i := min(max(int(u), 0), inverseSteps-1)
	z := u - float64(i)
	a, b, c, d := t.v[i], t.slope[i], t.v[i+1], t.slope[i+1]
	rise := c - a
	c2, c3 := 3*rise-2*b-d, b+d-2*rise
	return a + z*(b+z*(c2+z*c3)), (b + z*(2*c2+3*z*c3)) / t.by, true
}

// search finds the temperature of ln Q = y on a monotonic grid.
func (p *Pair) search(y float64) Temperature {
	falling := p.logQ[0] > p.logQ[pairSteps]
	i, _ := slices.BinarySearchFunc(p.logQ, y, func(q, y float64) int {
		if (q > y) == falling {
			return -1
		}
		return 1
	})
	return p.solve(min(max(i-1, 0), pairSteps-1), y)
}

func (p *Pair) logRatio(t Temperature) float64 {
	return math.Log(p.short.Radiance(t) / p.long.Radiance(t))
}

// Ratio returns Q(t), the ratio that a grey surface at t gives.
func (p *Pair) Ratio(t Temperature) float64 { return p.short.Radiance(t) / p.long.Radiance(t) }

// LogSlope returns d lnQ/d lnT at t. It is negative where the ratio falls with
// temperature, which overlapping bands can do.
func (p *Pair) LogSlope(t Temperature) float64 { return p.short.LogSlope(t) - p.long.LogSlope(t) }

// EffectiveWavelength returns the effective wavelength of the ratio at t: the Λ at
// which c₂/(Λt) equals d lnQ/d lnT. For two lines in Wien's limit it is λ₁λ₂/(λ₂−λ₁).
// One per cent of emissivity ratio is worth 0.01·Λt²/c₂.
func (p *Pair) EffectiveWavelength(t Temperature) Wavelength {
	return Wavelength(C2 / (float64(t) * p.LogSlope(t)))
}

// Monotonic reports whether each ratio belongs to one temperature at most.
func (p *Pair) Monotonic() bool {
	rising := p.logQ[0] > p.logQ[pairSteps]
	for i := range pairSteps {
		if (p.logQ[i] > p.logQ[i+1]) != rising {
			return false
		}
	}
	return true
}

// Temperature returns the temperature at which the reading ratio (short over long,
// both in W m⁻² sr⁻¹ m⁻¹ or both relative to the same blackbody scale) belongs to a
// surface of the given emissivity ratio ε_short/ε_long. An unreachable ratio wraps
// ErrRatioLow or ErrRatioHigh, one with several temperatures is an *AmbiguousRatio.
func (p *Pair) Temperature(ratio, emissivityRatio float64) (Temperature, error) {
	if !(ratio > 0) || math.IsInf(ratio, 0) || !(emissivityRatio > 0) || math.IsInf(emissivityRatio, 0) {
		return 0, fmt.Errorf("%w: ratio %g with emissivity ratio %g: both must be positive and finite", ErrPair, ratio, emissivityRatio)
	}
	want := math.Log(ratio / emissivityRatio)
	if p.inverse != nil {
		if v, _, ok := p.inverse.at(want); ok {
			return Temperature(1 / v), nil
		}
		return 0, p.unreachable(ratio, emissivityRatio, want)
	}
	var found []Temperature
	for i := range pairSteps {
		a, b := p.logQ[i], p.logQ[i+1]
		if (a-want)*(b-want) > 0 || b == want && i+1 < pairSteps {
			continue // no crossing; a root on a grid point belongs to the interval after it
		}
		found = append(found, p.solve(i, want))
	}
	switch len(found) {
	case 1:
		return found[0], nil
	case 0:
		return 0, p.unreachable(ratio, emissivityRatio, want)
	}
	slices.Sort(found)
	return 0, &AmbiguousRatio{Ratio: ratio, Temperatures: found}
}

// solve finds ln Q = want inside grid interval i by Newton in 1/T, kept in the interval.
func (p *Pair) solve(i int, want float64) Temperature {
	lo, hi := p.invT[i], p.invT[i+1]
	a, b := p.logQ[i], p.logQ[i+1]
	v := lo
	if a != b {
		v = lo + (hi-lo)*(want-a)/(b-a)
	}
	for range 20 {
		t := Temperature(1 / v)
		slope := -float64(t) * p.LogSlope(t) // d lnQ/d(1/T)
		next := v - (p.logRatio(t)-want)/slope
		if !(next >= lo && next <= hi) {
			next = min(max(next, lo), hi)
		}
		done := math.Abs(next-v) <= 0x1p-52*v
		v = next
		if done {
			break
		}
	}
	return Temperature(1 / v)
}

func (p *Pair) unreachable(ratio, emissivityRatio, want float64) error {
	lo, hi := slices.Min(p.logQ), slices.Max(p.logQ)
	tHot, tCold := Temperature(1/p.invT[0]), Temperature(1/p.invT[pairSteps])
	if want < lo {
		return fmt.Errorf("%w: ratio %g over emissivity ratio %g lies below %.4g, the least between %v and %v: the target is colder, the short channel has lost its signal, or the channels are swapped",
			ErrRatioLow, ratio, emissivityRatio, math.Exp(lo), tCold, tHot)
	}
	limit := math.Pow(float64(p.long.Mean())/float64(p.short.Mean()), 4)
	why := "the target is hotter, the long channel is saturated, or the channels are swapped"
	if math.Exp(want) >= limit {
		why = fmt.Sprintf("it is above the Rayleigh–Jeans limit %.4g of these wavelengths, which no temperature reaches: the long channel is saturated, or the channels are swapped", limit)
	}
	return fmt.Errorf("%w: ratio %g over emissivity ratio %g lies above %.4g, the most between %v and %v: %s",
		ErrRatioHigh, ratio, emissivityRatio, math.Exp(hi), tCold, tHot, why)
}

// Estimate returns what Temperature and Uncertainty do, in one step for control loops.
// It costs about as much as six exponentials, for wide bands too, and allocates nothing.
func (p *Pair) Estimate(ratio, emissivityRatio, ratioRel, emissivityRatioRel float64) (t Temperature, stdK float64, err error) {
	if p.inverse != nil && ratio > 0 && emissivityRatio > 0 {
		if v, slope, ok := p.inverse.at(math.Log(ratio / emissivityRatio)); ok {
			t = Temperature(1 / v)
			return t, math.Abs(slope) / (v * v) * math.Sqrt(ratioRel*ratioRel+emissivityRatioRel*emissivityRatioRel), nil
		}
	}
	if t, err = p.Temperature(ratio, emissivityRatio); err != nil {
		return 0, 0, err
	}
	return t, p.Uncertainty(t, ratioRel, emissivityRatioRel), nil
}

// Uncertainty returns the standard uncertainty in K at t that follows from relative
// standard uncertainties of the reading ratio and of the emissivity ratio, taken as
// independent: T/|d lnQ/d lnT| times their root sum of squares.
func (p *Pair) Uncertainty(t Temperature, ratioRel, emissivityRatioRel float64) float64 {
	return float64(t) / math.Abs(p.LogSlope(t)) * math.Hypot(ratioRel, emissivityRatioRel)
}
