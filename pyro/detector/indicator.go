package detector

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
)

// Indicator is an instrument of one band that shows a temperature, computed with settings
// of its own from the band's mean spectral radiance S that reaches it,
//
//	S = τ·( ε S_b(T) + (1 − ε) S_b(T_bg) ) + (1 − τ) S_b(T_w)      W m⁻² sr⁻¹ m⁻¹
//
// with S_b the radiance of a blackbody (the last two terms where it has such settings).
// From what it showed and its settings the radiance follows, and from that a temperature
// under better assumptions. Check it once; it is safe for concurrent use.
type Indicator struct {
	Band       *pyro.Band
	Emissivity float64 // ε that it was set to; 1 where it has no such setting
	Window     float64 // transmittance τ that it was set to; 1 where it has none

	// Background and WindowTemperature are T_bg and T_w that it was set to; 0 K is surroundings,
	// or a window, that it takes for dark.
	Background, WindowTemperature pyro.Temperature

	// Low and High are the ends of what it shows. A value there is a bound.
	Low, High pyro.Temperature
	// Resolution is the step in K of what it shows or of its log; 0 is none to speak of.
	Resolution float64
}

// Errors of what an indicator showed.
var (
	ErrIndicator = errors.New("detector: indicator")
	// ErrCensored is wrapped by a *CensoredError.
	ErrCensored = errors.New("detector: value at the end of the range")
)

// CensoredError says that a value stands at the end of the indicator's range: what is
// recovered from it is a bound of what was there.
type CensoredError struct {
	Indicated pyro.Temperature
	AtHigh    bool // what was there may be more; otherwise it may be less
}

func (e *CensoredError) Error() string {
	if e.AtHigh {
		return fmt.Sprintf("%v: %v is the most that it shows: the true value is that or more", ErrCensored, e.Indicated)
	}
	return fmt.Sprintf("%v: %v is the least that it shows: the true value is that or less", ErrCensored, e.Indicated)
}

// Unwrap returns ErrCensored.
func (e *CensoredError) Unwrap() error { return ErrCensored }

// Check refuses settings outside their ranges and an indicator without band or range.
func (d Indicator) Check() error {
	switch {
	case d.Band == nil:
		return fmt.Errorf("%w: it has no band: state the spectral range it was made for", ErrIndicator)
	case !(d.Emissivity > 0 && d.Emissivity <= 1):
		return fmt.Errorf("%w: emissivity setting %g must lie in (0, 1]; 1 where it has none", ErrIndicator, d.Emissivity)
	case !(d.Window > 0 && d.Window <= 1):
		return fmt.Errorf("%w: window setting %g must lie in (0, 1]; 1 where it has none", ErrIndicator, d.Window)
	case !settable(d.Background) || !settable(d.WindowTemperature):
		return fmt.Errorf("%w: background %v and window %v: each must be 0 K (dark) or lie in %v to %v", ErrIndicator, d.Background, d.WindowTemperature, pyro.BandMin, pyro.BandMax)
	}
	return checkRange(d.Low, d.High, d.Resolution)
}

func settable(t pyro.Temperature) bool { return t == 0 || t >= pyro.BandMin && t <= pyro.BandMax }

func checkRange(lo, hi pyro.Temperature, resolution float64) error {
	if !(lo >= pyro.BandMin) || !(hi > lo) || !(hi <= pyro.BandMax) {
		return fmt.Errorf("%w: range %v to %v must rise and lie inside %v to %v", ErrIndicator, lo, hi, pyro.BandMin, pyro.BandMax)
	}
	if !(resolution >= 0) || math.IsInf(resolution, 0) {
		return fmt.Errorf("%w: resolution %g K must be finite and not negative", ErrIndicator, resolution)
	}
	return nil
}

// checkShown refuses a value beyond the range, and says where one is censored.
func checkShown(indicated, lo, hi pyro.Temperature, resolution float64) error {
	near := pyro.Temperature(max(resolution/2, 1e-9*float64(hi)))
	switch {
	case !(indicated >= lo-near && indicated <= hi+near):
		return fmt.Errorf("%w: %v is outside of what it shows, %v to %v; is the unit right?", ErrIndicator, indicated, lo, hi)
	case indicated <= lo+near:
		return &CensoredError{Indicated: indicated}
	case indicated >= hi-near:
		return &CensoredError{Indicated: indicated, AtHigh: true}
	}
	return nil
}

// Radiance returns the band radiance S that made it show a temperature. At an end of its
// range there is a *CensoredError beside the radiance, which then is a bound; any other
// error stands alone.
func (d Indicator) Radiance(indicated pyro.Temperature) (s float64, err error) {
	if err := d.Check(); err != nil {
		return 0, err
	}
	if err = checkShown(indicated, d.Low, d.High, d.Resolution); err != nil && !errors.Is(err, ErrCensored) {
		return 0, err
	}
	return d.Window*d.Emissivity*d.Band.Radiance(indicated) + d.offset(), err
}

// offset is what does not depend on the temperature shown.
func (d Indicator) offset() float64 {
	return d.Window*(1-d.Emissivity)*d.Band.Radiance(d.Background) + (1-d.Window)*d.Band.Radiance(d.WindowTemperature)
}

// Slope returns dS/dT = τ ε S_b′(T) in W m⁻² sr⁻¹ m⁻¹ K⁻¹: what 1 K of its reading is worth.
func (d Indicator) Slope(indicated pyro.Temperature) float64 {
	return d.Window * d.Emissivity * d.Band.RadianceSlope(indicated)
}

// Indicated returns what it shows at a band radiance, the inverse of Radiance, not rounded
// to its resolution. Beyond its range it is the end, with a *CensoredError.
func (d Indicator) Indicated(s float64) (pyro.Temperature, error) {
	if err := d.Check(); err != nil {
		return 0, err
	}
	if math.IsNaN(s) {
		return 0, fmt.Errorf("%w: radiance %g", ErrIndicator, s)
	}
	target := (s - d.offset()) / (d.Window * d.Emissivity)
	t := d.Low
	if target > 0 { // less than the settings alone account for is below any range
		t = min(max(d.Band.RadianceTemperature(target), d.Low), d.High)
	}
	return t, checkShown(t, d.Low, d.High, d.Resolution)
}

// StdK returns the standard uncertainty in K that the resolution leaves, step/√12. In a
// steady log it is the same in each reading and does not average away.
func (d Indicator) StdK() float64 { return rectangular * d.Resolution }
