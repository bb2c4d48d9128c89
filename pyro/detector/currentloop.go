package detector

import (
	"errors"
	"fmt"

	"candent/pyro"
)

// CurrentLoop is a 4 to 20 mA output that is linear in temperature. Currents from 3.8 to
// 20.5 mA measure, those up to 3.6 and from 21 mA on say that the instrument has failed
// (common practice, no source). It is safe for concurrent use.
type CurrentLoop struct {
	Low, High pyro.Temperature // at 4 and at 20 mA
	// ClampLow and ClampHigh are the currents in mA at which the output stops, where the
	// temperature goes on. Zero: 3.8 and 20.5.
	ClampLow, ClampHigh float64
	// Resolution is the step in mA of the converter behind the loop. Zero: none to speak of.
	Resolution float64
}

// LoopState says what a current means.
type LoopState int

const (
	// LoopUndefined: neither a measuring current nor a declared failure.
	LoopUndefined LoopState = iota
	// LoopMeasuring: a temperature.
	LoopMeasuring
	// LoopAtLow: at the low end of the output; the temperature is an upper bound.
	LoopAtLow
	// LoopAtHigh: at the high end of the output; the temperature is a lower bound.
	LoopAtHigh
	// LoopFailureLow: 3.6 mA or less, a failure or a broken wire.
	LoopFailureLow
	// LoopFailureHigh: 21 mA or more, a failure or a short circuit.
	LoopFailureHigh
)

func (s LoopState) String() string {
	return [...]string{"neither measuring nor failure", "measuring", "at low end", "at high end", "failure (low current)", "failure (high current)"}[s]
}

// Currents in mA.
const (
	loopZero, loopFull          = 4, 20
	loopFailLow, loopFailHigh   = 3.6, 21
	loopClampLow, loopClampHigh = 3.8, 20.5
	loopRounding                = 1e-9 // of currents that are decimal numbers
)

// rectangular is the standard deviation of a step of 1, 1/√12.
const rectangular = 0.28867513459481287

// ErrCurrentLoop is what errors of CurrentLoop wrap.
var ErrCurrentLoop = errors.New("detector: current loop")

// Check refuses a range that does not rise, clamps outside 3.6 to 4 and 20 to 21 mA, and a
// resolution that is none.
func (c CurrentLoop) Check() error {
	lo, hi := c.clamps()
	switch {
	case !(c.Low >= 0) || !(c.High > c.Low) || !(c.High <= pyro.BandMax):
		return fmt.Errorf("%w: %v at 4 mA and %v at 20 mA: the range must rise, and lie below %v", ErrCurrentLoop, c.Low, c.High, pyro.BandMax)
	case !(lo > loopFailLow && lo <= loopZero) || !(hi >= loopFull && hi < loopFailHigh):
		return fmt.Errorf("%w: output that stops at %g and %g mA: the first must lie in 3.6 to 4, the second in 20 to 21", ErrCurrentLoop, lo, hi)
	case !(c.Resolution >= 0 && c.Resolution <= 1):
		return fmt.Errorf("%w: resolution %g mA must lie in 0 to 1", ErrCurrentLoop, c.Resolution)
	}
	return nil
}

func (c CurrentLoop) clamps() (lo, hi float64) {
	lo, hi = c.ClampLow, c.ClampHigh
	if lo == 0 {
		lo = loopClampLow
	}
	if hi == 0 {
		hi = loopClampHigh
	}
	return lo, hi
}

// State returns what a current in mA means. One within half a step of the resolution of a
// clamp is at that end.
func (c CurrentLoop) State(mA float64) LoopState {
	lo, hi := c.clamps()
	near := max(c.Resolution/2, loopRounding)
	switch {
	case mA <= loopFailLow+loopRounding:
		return LoopFailureLow
	case mA >= loopFailHigh-loopRounding:
		return LoopFailureHigh
	case mA > lo+near && mA < hi-near:
		return LoopMeasuring
	case mA <= lo+near && mA >= min(lo, loopClampLow)-near:
		return LoopAtLow
	case mA >= hi-near && mA <= max(hi, loopClampHigh)+near:
		return LoopAtHigh
	}
	return LoopUndefined
}

// Temperature returns the temperature that a current in mA stands for,
//
//	T = Low + (High − Low)·(I − 4 mA)/16 mA
//
// At an end of the output it is that of the end, a bound. In any other state but
// LoopMeasuring there is none: it is 0 and means nothing.
func (c CurrentLoop) Temperature(mA float64) (pyro.Temperature, LoopState) {
	lo, hi := c.clamps()
	s := c.State(mA)
	switch s {
	case LoopAtLow:
		mA = lo
	case LoopAtHigh:
		mA = hi
	case LoopMeasuring:
	default:
		return 0, s
	}
	return c.Low + (c.High-c.Low)*pyro.Temperature((mA-loopZero)/(loopFull-loopZero)), s
}

// Current returns the current in mA for a temperature, the inverse of Temperature; beyond
// the ends of the output it is that of the end, and the state says so.
func (c CurrentLoop) Current(t pyro.Temperature) (mA float64, s LoopState) {
	lo, hi := c.clamps()
	mA = loopZero + (loopFull-loopZero)*float64((t-c.Low)/(c.High-c.Low))
	mA = min(max(mA, lo), hi) // NaN stays
	return mA, c.State(mA)
}

// StdK returns the standard uncertainty in K that the resolution leaves: a rectangle of one
// step, step/√12. In a steady log it is the same in each reading and does not average away.
func (c CurrentLoop) StdK() float64 {
	return rectangular * c.Resolution * float64(c.High-c.Low) / (loopFull - loopZero)
}
