package emissivity

import (
	"fmt"
	"math"

	"candent/pyro"
)

// freeSpaceOver4π is Z₀/4π in Ω, with Z₀ = 376.730313412 Ω, relative standard uncertainty
// 1.6e-10 (CODATA 2022).
const freeSpaceOver4π = 376.730313412 / (4 * math.Pi)

const microhmCentimetre = 1e-8 // Ω m

// HagenRubens is the normal emissivity of a clean, smooth metal where the electrons
// follow the field, n = k:
//
//	n = √((Z₀/4π)·λ/ρ),  ε = 4n/(2n² + 2n + 1),  ρ = ρ₀·(1 + α(T − T₀))
//
// (E. Hagen, H. Rubens, Über Beziehungen des Reflexions- und Emissionsvermögens der
// Metalle zu ihrem elektrischen Leitvermögen, Ann. Phys. 11 (1903) 873, title from
// memory; here the closed form, of which the textbook series 0.365√(ρ/λ) − 0.0667 ρ/λ + …
// with ρ in Ω cm and λ in cm is the expansion.)
//
// It holds where 1/λ is far below the damping of the electrons: beyond about 5 to 10 µm
// for most metals. Below 3 µm it describes none of them.
//
// Parameters: resistivity ρ₀ in µΩ cm, and temperature_coefficient α in 1/K. Readings at
// one temperature can't tell one from the other: fix the coefficient, or give it a prior.
type HagenRubens struct {
	// Reference is the T₀ of the resistivity. Zero: 293.15 K.
	Reference pyro.Temperature
	// Resistivity, in µΩ cm, where it is known and constant: the model then has no
	// parameter. Zero: free, see Parameters.
	Resistivity float64
}

// String implements Surface.
func (HagenRubens) String() string { return "Hagen–Rubens emissivity" }

// Err implements Surface.
func (h HagenRubens) Err() error {
	if !(h.Reference >= 0) || math.IsInf(float64(h.Reference), 0) {
		return fmt.Errorf("%w: Hagen–Rubens: reference temperature %v", ErrModel, h.Reference)
	}
	if !(h.Resistivity >= 0) || math.IsInf(h.Resistivity, 0) {
		return fmt.Errorf("%w: Hagen–Rubens: resistivity %g µΩ cm: it must be positive, or 0 for a free one", ErrModel, h.Resistivity)
	}
	return nil
}

// Parameters implements Model. The bounds take in silver and liquid metals; the start
// of the coefficient is a pure metal's (common practice, no source).
func (h HagenRubens) Parameters() []Parameter {
	if h.Resistivity > 0 {
		return nil
	}
	return []Parameter{
		{Name: "resistivity", Unit: "µΩ cm", Lo: 0.5, Hi: 1000, Start: 20},
		{Name: "temperature_coefficient", Unit: "1/K", Lo: -1e-4, Hi: 0.01, Start: 0.004},
	}
}

// Emissivity implements Model. Where ρ isn't positive the result is NaN.
func (h HagenRubens) Emissivity(grad, θ []float64, λ pyro.Wavelength, t pyro.Temperature) (ε, dT float64) {
	if h.Resistivity > 0 {
		checkLengths(grad, θ, 0)
		ε, _ = hagenRubens(h.Resistivity, λ)
		return ε, 0
	}
	checkLengths(grad, θ, 2)
	t0 := h.Reference
	if t0 == 0 {
		t0 = 293.15 * pyro.Kelvin
	}
	rise := float64(t - t0)
	factor := 1 + θ[1]*rise
	ε, slope := hagenRubens(θ[0]*factor, λ)
	if grad != nil {
		grad[0] = slope * factor
		grad[1] = slope * θ[0] * rise
	}
	return ε, slope * θ[0] * θ[1]
}

// hagenRubens returns ε and ∂ε/∂ρ, ρ in µΩ cm.
func hagenRubens(ρ float64, λ pyro.Wavelength) (ε, slope float64) {
	if !(ρ > 0) {
		return math.NaN(), math.NaN()
	}
	n := math.Sqrt(freeSpaceOver4π * float64(λ) / (ρ * microhmCentimetre))
	d := 2*n*n + 2*n + 1
	// dε/dn = 4(1 − 2n²)/d², dn/dρ = −n/2ρ
	return 4 * n / d, 2 * n * (2*n*n - 1) / (d * d * ρ)
}
