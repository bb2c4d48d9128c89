package detector

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// Linearity is how a raw signal stands to the one that is proportional to radiation. It is
// immutable; nil is a detector that is linear everywhere.
type Linearity struct {
	lo, hi      float64 // of the raw signal
	c2, c3      float64
	raw, linear []float64 // tabulated, instead of c2 and c3
}

// ErrLinearity is what every error of a linearity's description wraps.
var ErrLinearity = errors.New("detector: linearity")

// PolynomialLinearity returns
//
//	true = s + c₂s² + c₃s³,   lo ≤ s ≤ hi
//
// with s the raw signal less the dark level and c₂, c₃ in its unit to the power −1 and −2.
// It refuses one that does not rise over all of the declared range.
func PolynomialLinearity(c2, c3, lo, hi float64) (*Linearity, error) {
	l := &Linearity{lo: lo, hi: hi, c2: c2, c3: c3}
	switch finite := !math.IsNaN(c2+c3+lo+hi) && !math.IsInf(c2+c3+lo+hi, 0); {
	case !finite:
		return nil, fmt.Errorf("%w: c₂ %g, c₃ %g from %g to %g must be finite", ErrLinearity, c2, c3, lo, hi)
	case lo >= hi:
		return nil, fmt.Errorf("%w: range %g to %g must rise", ErrLinearity, lo, hi)
	}
	// The slope 1 + 2c₂s + 3c₃s² is least at an end or at its vertex.
	at := []float64{lo, hi}
	if v := -c2 / (3 * c3); v > lo && v < hi {
		at = append(at, v)
	}
	for _, s := range at {
		if slope := l.slope(s); !(slope > 0) {
			return nil, fmt.Errorf("%w: at a raw signal of %g the slope is %.3g: it must rise over all of %g to %g; declare a narrower range", ErrLinearity, s, slope, lo, hi)
		}
	}
	return l, nil
}

// TabulatedLinearity returns the linearity through points of the raw and the true signal,
// straight lines between. Both must rise; a bad point is a *TableError. It keeps copies.
func TabulatedLinearity(raw, linear []float64) (*Linearity, error) {
	if len(raw) < 2 || len(raw) != len(linear) {
		return nil, fmt.Errorf("%w: table of %d raw and %d true signals: two or more of each are needed", ErrLinearity, len(raw), len(linear))
	}
	for i := range raw {
		bad := func(reason string) error { return &TableError{i, raw[i], linear[i], reason, ErrLinearity} }
		switch v := raw[i] + linear[i]; {
		case math.IsNaN(v) || math.IsInf(v, 0):
			return nil, bad("it is not finite: leave the point out")
		case i > 0 && raw[i] <= raw[i-1]:
			return nil, bad("the raw signal does not rise above the one before: sort the table")
		case i > 0 && linear[i] <= linear[i-1]:
			return nil, bad("the true signal does not rise above the one before: end the table where the detector saturates")
		}
	}
	return &Linearity{lo: raw[0], hi: raw[len(raw)-1], raw: slices.Clone(raw), linear: slices.Clone(linear)}, nil
}

// Range returns the raw signals over which the linearity is declared.
func (l *Linearity) Range() (lo, hi float64) {
	if l == nil {
		return math.Inf(-1), math.Inf(1)
	}
	return l.lo, l.hi
}

// True returns the signal that is proportional to radiation, and its slope against the raw
// one. Both are NaN outside the declared range.
func (l *Linearity) True(raw float64) (value, slope float64) {
	switch {
	case l == nil:
		return raw, 1
	case !(raw >= l.lo && raw <= l.hi):
		return math.NaN(), math.NaN()
	case l.raw == nil:
		return l.value(raw), l.slope(raw)
	}
	i := segment(l.raw, raw)
	slope = (l.linear[i+1] - l.linear[i]) / (l.raw[i+1] - l.raw[i])
	return l.linear[i] + slope*(raw-l.raw[i]), slope
}

// Raw returns the raw signal of a true one, the inverse of True; NaN outside the range.
func (l *Linearity) Raw(value float64) float64 {
	switch {
	case l == nil:
		return value
	case l.raw != nil:
		if !(value >= l.linear[0] && value <= l.linear[len(l.linear)-1]) {
			return math.NaN()
		}
		i := segment(l.linear, value)
		f := (value - l.linear[i]) / (l.linear[i+1] - l.linear[i])
		return l.raw[i] + f*(l.raw[i+1]-l.raw[i])
	}
	lo, hi := l.lo, l.hi
	if !(value >= l.value(lo) && value <= l.value(hi)) {
		return math.NaN()
	}
	// Newton, with bisection where a step would leave the bracket; 2 × 53 halvings suffice.
	s := min(max(value, lo), hi)
	for range 106 {
		f := l.value(s) - value
		if f > 0 {
			hi = s
		} else {
			lo = s
		}
		next := s - f/l.slope(s)
		if !(next >= lo && next <= hi) {
			next = lo + (hi-lo)/2
		}
		if next == s {
			break
		}
		s = next
	}
	return s
}

func (l *Linearity) value(s float64) float64 { return s * (1 + s*(l.c2+s*l.c3)) }
func (l *Linearity) slope(s float64) float64 { return 1 + s*(2*l.c2+3*l.c3*s) }

// segment returns i with x[i] ≤ v ≤ x[i+1] for a v inside a rising x.
func segment(x []float64, v float64) int {
	i, _ := slices.BinarySearch(x, v)
	return min(max(i-1, 0), len(x)-2)
}
