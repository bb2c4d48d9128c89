// Package pyro holds the quantities and closed forms of radiation
// thermometry: temperature and wavelength as types, the constants of the SI,
// Planck's law with its derivatives and its inverse.
//
// It needs the standard library alone and does no searching or fitting.
//
// # Symbols
//
//	λ   wavelength, m
//	T   thermodynamic temperature, K
//	L   spectral radiance, W m⁻² sr⁻¹ m⁻¹
//	ε   emissivity, 1
//	x   c₂/(λT), 1
//	c₁L 2hc², W m² sr⁻¹
//	c₂  hc/k, m K
//
// Temperature differences and uncertainties are plain float64 values in kelvin;
// they are never converted with the 273.15 offset.
//
// All functions are pure and safe for concurrent use.
package pyro
