// Package sightline describes what lies between a hot surface and the detector that looks
// at it: what the surface reflects, what the light passes, and what else is in the field.
//
//	X(λ) = τ(λ)·( φ·(ε L(λ,T) + (1 − ε) L_s(λ)) + (1 − φ) L_rest(λ) ) + L_path(λ)
//
// L_s is the Surroundings, τ and L_path are the Layers, φ and L_rest are the Field. Each
// number in them is a *pyro.Input, a value with its standard uncertainty, fixed or new with
// each reading; the same *pyro.Input in two places is one shared unknown. The package
// describes and evaluates; package fit takes the descriptions and carries the uncertainties.
//
// # Symbols
//
//	λ    wavelength, m
//	L    spectral radiance, W m⁻² sr⁻¹ m⁻¹
//	T    temperature, K
//	τ    transmittance, 0 to 1
//	φ    fraction of the field that the target fills, 0 to 1
//	F    view factor of the surface to a zone, 0 to 1
//
// # What it does not do
//
// Surfaces and walls reflect diffusely; a layer neither scatters into the field nor reflects
// the target's light back on it. No reading is a safety interlock.
//
// Descriptions are plain values; don't change one after it was handed on.
package sightline
