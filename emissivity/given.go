package emissivity

import (
	"fmt"
	"math"

	"candent/pyro"
)

// Given is a known curve, as a model without parameters, the same at every temperature:
// one side of a Mixture, say.
type Given struct{ Spectrum pyro.Spectrum }

// String implements Surface.
func (Given) String() string { return "given emissivity" }

// Err implements Surface.
func (g Given) Err() error {
	if g.Spectrum == nil {
		return fmt.Errorf("%w: given emissivity without a spectrum", ErrModel)
	}
	return nil
}

// Parameters implements Model: there are none.
func (Given) Parameters() []Parameter { return nil }

// Emissivity implements Model.
func (g Given) Emissivity(grad, θ []float64, λ pyro.Wavelength, _ pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, 0)
	ε = g.Spectrum.At(λ)
	if math.IsNaN(ε) {
		return ε, ε
	}
	return ε, 0
}

// Constant is a Spectrum of one value everywhere: a refractive index, or an emissivity of
// a grey part.
type Constant float64

// At implements pyro.Spectrum.
func (c Constant) At(pyro.Wavelength) float64 { return float64(c) }
