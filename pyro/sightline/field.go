package sightline

import (
	"fmt"

	"candent/pyro"
)

// Field is what the detector sees beside the target. The zero value is a target of one
// temperature that fills it.
type Field struct {
	// Fraction of the field that the target fills, above 0 to 1. nil: 1.
	Fraction *pyro.Input
	// Rest is the temperature of what fills the rest, as of a blackbody. nil: it is cold. A hot
	// spot smaller than the field is a target with a Rest nearly as hot.
	Rest *pyro.Input
	// RestEmissivity of the rest. nil: 1.
	RestEmissivity pyro.Spectrum
	// Spread is the standard deviation, in K, of the temperature over the field or the
	// exposure; what is found is then its mean. To second order in the spread,
	// ⟨L⟩ = L(T̄) + ½ spread²·∂²L/∂T²: right to (c₂·spread/λT²)⁴/8 of L.
	Spread *pyro.Input
}

// Whole reports whether the target of one temperature fills the field.
func (f *Field) Whole() bool { return f.Fraction == nil && f.Rest == nil && f.Spread == nil }

// Check refuses what can't be.
func (f *Field) Check(λ ...pyro.Wavelength) error {
	if f.Fraction != nil {
		if err := checkFraction("the fill of the field", f.Fraction, true); err != nil {
			return err
		}
	}
	if f.Rest != nil {
		if f.Fraction == nil {
			return fmt.Errorf("%w: the rest of the field has a temperature, but the target fills the field: give its Fraction", ErrSightline)
		}
		if err := checkTemperature("the rest of the field", f.Rest); err != nil {
			return err
		}
	}
	if f.RestEmissivity != nil && f.Rest == nil {
		return fmt.Errorf("%w: the rest of the field has an emissivity but no temperature", ErrSightline)
	}
	for _, l := range λ {
		if err := checkSpectrum("emissivity", "rest of the field", f.RestEmissivity, l, 0, 1); err != nil {
			return err
		}
	}
	if f.Spread != nil {
		if err := f.Spread.Check(); err != nil {
			return fmt.Errorf("%w: spread of the temperature: %w", ErrSightline, err)
		}
		if f.Spread.Value < 0 {
			return fmt.Errorf("%w: spread of the temperature %g K is negative", ErrSightline, f.Spread.Value)
		}
	}
	return nil
}
