package detector

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
)

// ErrDetector is what every error of a description wraps.
var ErrDetector = errors.New("detector")

// Channel describes how one band's radiance X becomes a signal s,
//
//	s = f( d + g·t·X ) + noise
//
// with f the detector's linearity, d the dark level, g the gain and t the exposure. The zero
// value reads radiance itself. What is nil is 0 for the dark level, 1 for gain and exposure.
type Channel struct {
	Dark     *pyro.Input // d, in the signal's unit
	Gain     *pyro.Input // g, signal per W m⁻² sr⁻¹ m⁻¹; or per unit of the Curve
	Exposure *pyro.Input // t, relative to that of the calibration; a range switch is one too

	// Curve is the band's calibration curve, whose unit is then that of X; the band's width
	// and centre follow from it, and the responsivity of the band itself is not used. Cov is
	// the covariance of (ΔC/C, A, B), B in m·K.
	Curve     *Curve
	CurveCov  [3][3]float64
	CurveName string // how budgets list it; empty: "calibration curve"

	// Wavelength lists what the centre of the band is uncertain by. CalibratedAt is the
	// temperature of the blackbody at which Gain was found: there a shifted band reads right,
	// since the shift went through the calibration too. 0: the gain is the responsivity's.
	Wavelength []WavelengthError
	// Width is the standard deviation of the responsivity, in metres, where it is uncertain: a
	// rectangular band's is its full width/√12, a Gaussian's its FWHM/2.3548. Its value must be
	// that of the band; its uncertainty acts to second order of the width, in Wien's limit.
	Width        *pyro.Input
	CalibratedAt pyro.Temperature

	Linearity Response // f; nil: linear
	// Resolution is the step of a rounded signal: it brings a rectangular uncertainty, which
	// does not average away while the signal is steady.
	Resolution float64
	// Saturation and Floor end the range: a signal at or beyond one is a bound, not a value.
	// 0 means that there is none.
	Saturation, Floor float64
	// Variance of the signal's noise, Constant + PerSignal·(s − d). Zero: that of the reading.
	Noise NoiseModel
}

// Response is a detector's linearity: True takes a signal to what a linear detector would
// have given, with its slope.
type Response interface {
	True(signal float64) (value, slope float64)
}

// NoiseModel is a variance a + b·S, in the signal's unit squared: electronics and photons.
type NoiseModel struct{ Constant, PerSignal float64 }

// WavelengthError moves the band's centre by PerUnit·Input, in metres.
type WavelengthError struct {
	Input   *pyro.Input
	PerUnit float64
}

// Axis lists the errors of a spectrometer's wavelength axis at λ: an offset in metres and a
// scale factor's departure from 1, each shared by all channels. Either may be nil.
func Axis(offset, scale *pyro.Input, λ pyro.Wavelength) []WavelengthError {
	var list []WavelengthError
	if offset != nil {
		list = append(list, WavelengthError{offset, 1})
	}
	if scale != nil {
		list = append(list, WavelengthError{scale, float64(λ)})
	}
	return list
}

// Check refuses what can't be a channel.
func (c *Channel) Check() error {
	for _, i := range []*pyro.Input{c.Dark, c.Gain, c.Exposure} {
		if i == nil {
			continue
		}
		if err := i.Check(); err != nil {
			return fmt.Errorf("%w: %w", ErrDetector, err)
		}
		if i != c.Dark && !(i.Value > 0) {
			return fmt.Errorf("%w: %s = %g must be positive", ErrDetector, i.Name, i.Value)
		}
	}
	if c.Width != nil {
		if err := c.Width.Check(); err != nil {
			return fmt.Errorf("%w: %w", ErrDetector, err)
		}
		if !(c.Width.Value > 0 && c.Width.Value < 1e-4) {
			return fmt.Errorf("%w: %s = %g: a width in metres", ErrDetector, c.Width.Name, c.Width.Value)
		}
	}
	for _, w := range c.Wavelength {
		if err := w.Input.Check(); err != nil {
			return fmt.Errorf("%w: %w", ErrDetector, err)
		}
	}
	bad := func(v float64) bool { return !(v >= 0) || math.IsInf(v, 0) }
	switch {
	case bad(c.Resolution) || bad(c.Noise.Constant) || bad(c.Noise.PerSignal):
		return fmt.Errorf("%w: resolution %g and noise %g + %g·S: finite and not negative", ErrDetector, c.Resolution, c.Noise.Constant, c.Noise.PerSignal)
	case c.Saturation != 0 && !(c.Saturation > c.Floor):
		return fmt.Errorf("%w: saturation at %g, floor at %g: the first must be the higher", ErrDetector, c.Saturation, c.Floor)
	case c.CalibratedAt != 0 && !(c.CalibratedAt >= 200 && c.CalibratedAt <= 6000):
		return fmt.Errorf("%w: calibrated at %v: is it in °C?", ErrDetector, c.CalibratedAt)
	case c.Curve != nil && (!(c.Curve.A > 0) || !(c.Curve.C > 0)):
		return fmt.Errorf("%w: calibration curve %+v: A and C must be positive", ErrDetector, *c.Curve)
	}
	return nil
}
