package emissivity

import (
	"fmt"
	"math"
	"math/cmplx"

	"candent/pyro"
)

// Film is one homogeneous film with parallel faces on an opaque substrate, an oxide on its
// metal say, with the interference of its reflections (Airy's formula; M. Born, E. Wolf,
// Principles of Optics, the chapter on films on absorbing substrates; written from memory). In optical
// admittances η of free space (0), film (1) and substrate (2), for a thickness d:
//
//	E = exp(4πi·q₁d/λ),  r₁₂ = (η₁ − η₂)/(η₁ + η₂),  Y = η₁(1 − r₁₂E)/(1 + r₁₂E)
//	ε = 1 − |(η₀ − Y)/(η₀ + Y)|²,  q = √(ñ² − sin²),  ηs = q,  ηp = ñ²/q
//
// which is r = (r₀₁ + r₁₂E)/(1 + r₀₁r₁₂E). A film so thick or so dark that nothing
// returns from its back is the bulk of the oxide; no film is the bare metal. Rough faces,
// pores, and a thickness that varies within the field wash the fringes out. ε doesn't depend
// on T as long as the indices don't.
//
// Parameter: thickness in µm. χ² over the thickness has a minimum for about every Period,
// so that a search from one start finds the nearest and no more: begin one at every quarter
// of the shortest period between Thinnest and Thickest.
type Film struct {
	N, K                   pyro.Spectrum // of the film
	SubstrateN, SubstrateK pyro.Spectrum // of the metal beneath
	Angle                  Angle         // to the normal
	Polarisation           Polarisation
	// Thinnest and Thickest bound the thickness, in µm. Zero Thickest: 2 µm.
	Thinnest, Thickest float64
}

// String implements Surface.
func (f Film) String() string {
	if f.Angle == 0 {
		return "film on metal at the normal"
	}
	return fmt.Sprintf("film on metal at %v, %v", f.Angle, f.Polarisation)
}

// Err implements Surface.
func (f Film) Err() error {
	if f.N == nil || f.K == nil || f.SubstrateN == nil || f.SubstrateK == nil {
		return fmt.Errorf("%w: film: n and k of film and substrate are all needed; Constant(0) for a k of 0", ErrModel)
	}
	lo, hi := f.bounds()
	if !(lo >= 0) || !(hi > lo) || math.IsInf(hi, 0) {
		return fmt.Errorf("%w: film: thickness from %g to %g µm: it must not be negative, and rise", ErrModel, lo, hi)
	}
	return view{f.Angle, f.Polarisation}.err("film")
}

func (f Film) bounds() (lo, hi float64) {
	if f.Thickest == 0 {
		return f.Thinnest, 2
	}
	return f.Thinnest, f.Thickest
}

// Parameters implements Model.
func (f Film) Parameters() []Parameter {
	lo, hi := f.bounds()
	return []Parameter{{Name: "thickness", Unit: "µm", Lo: lo, Hi: hi, Start: lo + (hi-lo)/2}}
}

// Period returns by how many µm the thickness grows until the fringes at λ come round
// again: λ/(2·Re q₁), λ/2n at the normal.
func (f Film) Period(λ pyro.Wavelength) float64 {
	v := view{f.Angle, f.Polarisation}
	w := v.wave(complex(f.N.At(λ), f.K.At(λ)), S)
	return λ.Micrometres() / (2 * real(w.q))
}

// Emissivity implements Model.
func (f Film) Emissivity(grad, θ []float64, λ pyro.Wavelength, _ pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, 1)
	v := view{f.Angle, f.Polarisation}
	ñ1 := complex(f.N.At(λ), f.K.At(λ))
	ñ2 := complex(f.SubstrateN.At(λ), f.SubstrateK.At(λ))
	ε, slope, _ := v.mean(func(p Polarisation) (ε, slope, _ float64) {
		film, metal, η0 := v.wave(ñ1, p), v.wave(ñ2, p), v.free(p)
		rate := 1i * film.q * complex(4*math.Pi/λ.Micrometres(), 0) // of E's exponent, 1/µm
		echo := (film.η - metal.η) / (film.η + metal.η) * cmplx.Exp(rate*complex(θ[0], 0))
		y := film.η * (1 - echo) / (1 + echo)
		dy := -2 * film.η * echo * rate / ((1 + echo) * (1 + echo))
		return absorbed(η0, y), absorbedSlope(η0, y, dy), 0
	})
	if grad != nil {
		grad[0] = slope
	}
	if math.IsNaN(ε) {
		return ε, ε
	}
	return ε, 0
}
