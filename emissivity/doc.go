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
// # The models
//
// Surfaces with a physics of their own implement Model:
//
//	HagenRubens  clean metal beyond about 5 µm, from its resistivity
//	Drude        metal of free electrons, from plasma frequency and damping
//	Fresnel      smooth opaque bulk, from n and k, at an angle, polarised or not
//	Soot         Hottel and Broughton's law of a luminous flame
//	Film         an oxide film of unknown thickness on metal, with its interference
//	Mixture      a fraction f of one surface, 1 − f of another
//	Tabulated    a table over λ and T with one scale
//	Given        a known curve, without parameters
//
// WithPrior, Fix and Between say what is known of a model's parameters. A refractive index
// is n + ik with k ≥ 0. Package emissivity/handbook has measured values.
//
// # The unknown surface
//
// Process is a random curve: ln ε is a mixture of Gaussian processes in ln λ, with ε ≤ 1.
// Unknown is the default for surfaces of ε ≥ 0.2 that nobody characterised; Kinds lists
// narrower ones by name, AnySurface mixes them, About takes a handbook curve ± a spread.
//
// Descriptions are immutable: methods and functions return changed copies. They are safe
// for concurrent use, as far as a pyro.Spectrum handed to them is.
package emissivity
