package emissivity

import (
	"errors"

	"candent/pyro"
)

// ErrModel is what every error of a model's description wraps.
var ErrModel = errors.New("emissivity: model")

// Model is a surface of few parameters that no polynomial gives.
type Model interface {
	Surface
	// Parameters describes θ, in order. The slice is the caller's.
	Parameters() []Parameter
	// Emissivity returns ε(λ,T) for the parameters θ and its derivative by T in 1/K and,
	// where grad is not nil, writes ∂ε/∂θₖ to it. Where the model says nothing (outside
	// a table, a negative resistivity) ε and its derivative by T are NaN. The result is
	// not held to 0 < ε ≤ 1. θ must be as long as Parameters, and grad too if it isn't nil, or
	// Emissivity panics. It allocates nothing.
	Emissivity(grad, θ []float64, λ pyro.Wavelength, t pyro.Temperature) (ε, dT float64)
}

// Parameter describes one parameter of a model.
type Parameter struct {
	Name, Unit string  // Unit is empty for a number
	Lo, Hi     float64 // bounds of the search, both finite and included
	Start      float64 // where a search may begin, within the bounds
	Prior      Prior
}

// checkLengths panics where grad or θ have not one element for each of n parameters.
func checkLengths(grad, θ []float64, n int) {
	if len(θ) != n || grad != nil && len(grad) != n {
		panic("emissivity: Emissivity: grad or θ and the parameters differ in length")
	}
}
