package emissivity

import (
	"math/cmplx"

	"candent/pyro"
)

// Drude is the normal emissivity of a smooth metal of free electrons, in wavenumbers
// ν = 1/λ, νp of the plasma, ντ of the damping, all in cm⁻¹:
//
//	(n + ik)² = 1 − νp²/(ν² + iν·ντ),  ε = 4n/((n + 1)² + k²)
//
// (P. Drude, Zur Elektronentheorie der Metalle, Ann. Phys. 1 (1900) 566, title from memory;
// in this form with parameters of fourteen metals: M. A. Ordal, R. J. Bell,
// R. W. Alexander, L. L. Long, M. R. Querry, Optical properties of fourteen metals in the
// infrared and far infrared, Appl. Opt. 24 (1985) 4493.)
//
// It has no transitions between bands: below about 3 µm it is far too low for nearly every
// real metal. Tungsten at 1 µm has 0.43; its Drude parameters give 0.019.
//
// Parameters: plasma νp and damping ντ, in cm⁻¹. The emissivity doesn't depend on T but
// through them.
type Drude struct{}

// String implements Surface.
func (Drude) String() string { return "Drude emissivity" }

// Err implements Surface.
func (Drude) Err() error { return nil }

// Parameters implements Model.
func (Drude) Parameters() []Parameter {
	return []Parameter{
		{Name: "plasma", Unit: "cm⁻¹", Lo: 1e3, Hi: 2e5, Start: 5e4},
		{Name: "damping", Unit: "cm⁻¹", Lo: 1, Hi: 1e5, Start: 300},
	}
}

// Emissivity implements Model.
func (Drude) Emissivity(grad, θ []float64, λ pyro.Wavelength, _ pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, 2)
	ν, νp, ντ := λ.Wavenumber(), θ[0], θ[1]
	d := complex(ν, ντ)
	ratio := complex(νp*νp/ν, 0) / d // νp²/(ν² + iν·ντ)
	ñ := cmplx.Sqrt(1 - ratio)
	ε = absorbed(1, ñ)
	if grad != nil {
		grad[0] = absorbedSlope(1, ñ, -ratio/(complex(νp, 0)*ñ))
		grad[1] = absorbedSlope(1, ñ, 1i*ratio/(2*d*ñ))
	}
	return ε, 0
}

// Resistivity returns the resistivity at zero frequency that θ implies, in µΩ cm:
//
//	ρ = Z₀·ντ/(2π·νp²)
func (Drude) Resistivity(θ []float64) float64 {
	const perMetre = 100 // of 1 cm⁻¹
	return 2 * freeSpaceOver4π * θ[1] / (θ[0] * θ[0] * perMetre) / microhmCentimetre
}
