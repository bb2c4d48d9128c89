package emissivity

import (
	"math"

	"candent/pyro"
)

// Soot is a luminous flame by the law of Hottel and Broughton, λ in µm:
//
//	ε = 1 − exp(−KL/λ^α)
//
// (H. C. Hottel, F. P. Broughton, Determination of true temperature and total radiation
// from luminous gas flames, Ind. Eng. Chem. Anal. Ed. 4 (1932) 166.) α is 1.39 in the
// visible, and about 0.95 beyond 0.8 µm (the latter from memory). Its prior's standard
// uncertainty of 0.2 is a judgement: half the distance between both.
//
// Parameters: KL, absorption strength times path, in µm^α, and alpha. KL says how much
// soot there is: it is the flame's, not the law's, and comes without a prior; WithPrior sets
// one. The emissivity doesn't depend on T.
type Soot struct {
	// Infrared takes the exponent of wavelengths beyond 0.8 µm. One exponent serves all
	// bands: those on both sides of 0.8 µm want the prior of α widened.
	Infrared bool
}

// String implements Surface.
func (Soot) String() string { return "soot emissivity" }

// Err implements Surface.
func (Soot) Err() error { return nil }

// Parameters implements Model.
func (s Soot) Parameters() []Parameter {
	α := 1.39
	if s.Infrared {
		α = 0.95
	}
	return []Parameter{
		{Name: "KL", Unit: "µm^α", Lo: 1e-4, Hi: 20, Start: 0.5},
		{Name: "alpha", Lo: 0.3, Hi: 2.5, Start: α, Prior: Prior{Value: α, Std: 0.2, Set: true}},
	}
}

// Emissivity implements Model.
func (Soot) Emissivity(grad, θ []float64, λ pyro.Wavelength, _ pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, 2)
	logλ := math.Log(λ.Micrometres())
	power := math.Exp(-θ[1] * logλ)
	depth := θ[0] * power
	ε = -math.Expm1(-depth)
	if grad != nil {
		passed := math.Exp(-depth)
		grad[0] = passed * power
		grad[1] = -passed * depth * logλ
	}
	return ε, 0
}
