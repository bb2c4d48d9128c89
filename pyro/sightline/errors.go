package sightline

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
)

// ErrSightline is what every error of a description wraps.
var ErrSightline = errors.New("sightline")

// Coldest and Hottest bound what a temperature in a furnace can be. Below Coldest a figure
// is taken for one in °C.
const (
	Coldest = 200 * pyro.Kelvin
	Hottest = 6000 * pyro.Kelvin
)

// checkTemperature refuses an input that can't be a temperature in K.
func checkTemperature(what string, i *pyro.Input) error {
	if err := i.Check(); err != nil {
		return fmt.Errorf("%w: %s: %w", ErrSightline, what, err)
	}
	return CheckTemperature(i.Name, i.Value)
}

// CheckTemperature refuses a figure that can't be a temperature in K.
func CheckTemperature(name string, kelvin float64) error {
	if !(kelvin >= float64(Coldest) && kelvin <= float64(Hottest)) {
		return fmt.Errorf("%w: %s = %g K is outside %v to %v: is it in °C?", ErrSightline, name, kelvin, Coldest, Hottest)
	}
	return nil
}

// checkFraction refuses an input that is no fraction; least is 0, or above 0 by positive.
func checkFraction(what string, i *pyro.Input, positive bool) error {
	if err := i.Check(); err != nil {
		return fmt.Errorf("%w: %s: %w", ErrSightline, what, err)
	}
	if !(i.Value >= 0 && i.Value <= 1) || positive && i.Value == 0 {
		return fmt.Errorf("%w: %s %q = %g: it must lie between 0 and 1 (a fraction, not per cent)", ErrSightline, what, i.Name, i.Value)
	}
	return nil
}

// checkSpectrum refuses a curve with holes in it or values outside least to most, at λ.
func checkSpectrum(what, name string, s pyro.Spectrum, λ pyro.Wavelength, least, most float64) error {
	if s == nil {
		return nil
	}
	if v := s.At(λ); math.IsNaN(v) || v < least || v > most {
		return fmt.Errorf("%w: %s of %q at %v is %g: the curve must cover every band with values from %g to %g", ErrSightline, what, name, λ, v, least, most)
	}
	return nil
}

// Value gives the value that an input has in a reading.
type Value func(*pyro.Input) float64

// Nominal is the value that an input was declared with.
func Nominal(i *pyro.Input) float64 { return i.Value }

// or returns the value of an input, or a default where there is none.
func (v Value) or(i *pyro.Input, none float64) float64 {
	if i == nil {
		return none
	}
	return v(i)
}
