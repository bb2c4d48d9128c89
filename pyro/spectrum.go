package pyro

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// Spectrum is a known function of wavelength: the transmittance of a window, the radiance of
// a lamp, the emissivity of a wall.
type Spectrum interface{ At(λ Wavelength) float64 }

// Curve is a Spectrum tabulated at points, straight lines between. Outside the table it is
// NaN: what isn't known is not made up. It is immutable and safe for concurrent use.
type Curve struct {
	λ      []Wavelength
	values []float64
}

// ErrCurve is what every error of a curve's description wraps.
var ErrCurve = errors.New("pyro: curve")

// PointError is the error of one point of a table.
type PointError struct {
	Index  int // from 0
	At     Wavelength
	Value  float64
	Reason string
}

func (e *PointError) Error() string {
	return fmt.Sprintf("pyro: curve: point %d (%v, %g): %s", e.Index, e.At, e.Value, e.Reason)
}

// Unwrap returns ErrCurve.
func (e *PointError) Unwrap() error { return ErrCurve }

// NewCurve returns the curve through two points or more. Wavelengths must rise and values
// be finite; a bad point is a *PointError. It keeps copies.
func NewCurve(λ []Wavelength, values []float64) (*Curve, error) {
	if len(λ) < 2 || len(λ) != len(values) {
		return nil, fmt.Errorf("%w: table of %d wavelengths and %d values: two or more of each are needed", ErrCurve, len(λ), len(values))
	}
	for i := range λ {
		bad := func(reason string) error { return &PointError{Index: i, At: λ[i], Value: values[i], Reason: reason} }
		switch {
		case checkWavelength(λ[i]) != nil:
			return nil, bad("the wavelength is outside 0.01 to 1000 µm; is the unit right?")
		case i > 0 && λ[i] <= λ[i-1]:
			return nil, bad("the wavelength does not rise above the one before: sort the table")
		case math.IsNaN(values[i]) || math.IsInf(values[i], 0):
			return nil, bad("the value is not finite: leave the point out")
		}
	}
	return &Curve{λ: slices.Clone(λ), values: slices.Clone(values)}, nil
}

// At returns the value at λ, NaN outside the table.
func (c *Curve) At(λ Wavelength) float64 {
	i, found := slices.BinarySearch(c.λ, λ)
	switch {
	case found:
		return c.values[i]
	case i == 0 || i == len(c.λ) || math.IsNaN(float64(λ)):
		return math.NaN()
	}
	f := float64((λ - c.λ[i-1]) / (c.λ[i] - c.λ[i-1]))
	return (1-f)*c.values[i-1] + f*c.values[i]
}

// Range returns the first and the last tabulated wavelength.
func (c *Curve) Range() (lo, hi Wavelength) { return c.λ[0], c.λ[len(c.λ)-1] }
