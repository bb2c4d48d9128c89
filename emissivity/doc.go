// Package emissivity describes surfaces: how the emissivity ε runs with the
// wavelength λ. A description holds no reading and does no fitting; package fit takes
// it as an assumption.
//
// # Symbols
//
//	ε   spectral emissivity, 1, of an opaque surface in the direction of view
//	θ   parameters of a family
//	λ   wavelength, m; λc the wavelength that a family is centred on
//
// # The families
//
//	Grey           ε = level
//	Polynomial(m)  ε = level + slope·d + curvature·d² + …   d = (λ − λc)/µm, m = 1 … 3
//	Exponential(m) ln ε = log level + log slope·d + …       m = 1 … 3
//	PowerLaw       ln ε = log level + exponent·ln(λ/λc)
//
// # The unknown surface
//
// Process is a random curve: ln ε is a mixture of Gaussian processes in ln λ, with ε ≤ 1.
// Unknown is the default for surfaces of ε ≥ 0.2 that nobody characterised; Kinds lists
// narrower ones by name, AnySurface mixes them, About takes a handbook curve ± a spread.
//
// Values of type Family and Process are immutable: methods return changed copies. They are safe for
// concurrent use.
package emissivity
