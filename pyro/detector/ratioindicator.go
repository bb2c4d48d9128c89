package detector

import (
	"errors"
	"fmt"

	"candent/pyro"
)

// RatioIndicator is a two-colour instrument that shows a temperature, computed from the
// measured ratio of its bands with an emissivity ratio set on it,
//
//	r = ε_r · Q(T)
//
// Check it once; it is safe for concurrent use.
type RatioIndicator struct {
	Pair            *pyro.Pair
	EmissivityRatio float64 // ε_short/ε_long that it was set to; 1 where it has no such setting

	// Low and High are the ends of what it shows. A value there is a bound.
	Low, High pyro.Temperature
	// Resolution is the step in K of what it shows or of its log; 0 is none to speak of.
	Resolution float64
}

// Check refuses a setting or a range that is none, a range beyond that of the pair, and a
// pair whose ratio turns round in it.
func (d RatioIndicator) Check() error {
	if d.Pair == nil {
		return fmt.Errorf("%w: it has no pair of bands", ErrIndicator)
	}
	if !(d.EmissivityRatio > 0.1 && d.EmissivityRatio < 10) {
		return fmt.Errorf("%w: emissivity ratio setting %g must lie between 0.1 and 10; 1 where it has none, and as a fraction where it is in per cent", ErrIndicator, d.EmissivityRatio)
	}
	if lo, hi := d.Pair.Range(); !(d.Low >= lo) || !(d.High <= hi) {
		return fmt.Errorf("%w: range %v to %v goes beyond %v to %v, for which the pair was compiled", ErrIndicator, d.Low, d.High, lo, hi)
	}
	if !d.Pair.Monotonic() {
		return fmt.Errorf("%w: the pair's ratio turns round: compile it over a branch (Pair.Branches)", ErrIndicator)
	}
	return checkRange(d.Low, d.High, d.Resolution)
}

// Ratio returns the measured ratio that made it show a temperature. At an end of its range
// there is a *CensoredError beside the ratio, which then is a bound; any other error stands
// alone.
func (d RatioIndicator) Ratio(indicated pyro.Temperature) (r float64, err error) {
	if err := d.Check(); err != nil {
		return 0, err
	}
	if err = checkShown(indicated, d.Low, d.High, d.Resolution); err != nil && !errors.Is(err, ErrCensored) {
		return 0, err
	}
	return d.EmissivityRatio * d.Pair.Ratio(indicated), err
}

// LogSlope returns d ln r/dT in 1/K: what 1 K of its reading is worth, relative.
func (d RatioIndicator) LogSlope(indicated pyro.Temperature) float64 {
	return d.Pair.LogSlope(indicated) / float64(indicated)
}

// Indicated returns what it shows at a measured ratio, the inverse of Ratio, not rounded to
// its resolution. Beyond its range it is the end, with a *CensoredError.
func (d RatioIndicator) Indicated(ratio float64) (pyro.Temperature, error) {
	if err := d.Check(); err != nil {
		return 0, err
	}
	t, err := d.Pair.Temperature(ratio, d.EmissivityRatio)
	rises := d.Pair.LogSlope(d.Low) > 0
	switch low, high := errors.Is(err, pyro.ErrRatioLow), errors.Is(err, pyro.ErrRatioHigh); {
	case low && rises, high && !rises:
		t = d.Low
	case low, high:
		t = d.High
	case err != nil:
		return 0, err
	}
	t = min(max(t, d.Low), d.High)
	return t, checkShown(t, d.Low, d.High, d.Resolution)
}

// StdK returns the standard uncertainty in K that the resolution leaves, step/√12.
func (d RatioIndicator) StdK() float64 { return rectangular * d.Resolution }
