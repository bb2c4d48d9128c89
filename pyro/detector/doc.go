// Package detector describes how a signal stands to the radiation of a band: the
// calibration curve, the linearity, the size-of-source effect, a current loop, and what an
// indicator made of the radiation with settings of its own. Fitting a curve or a gain to
// calibration points is fit.Calibrate and its like.
//
//	S   signal, in any unit; for an indicator mean spectral radiance, W m⁻² sr⁻¹ m⁻¹
//	T   temperature of a blackbody, K
//	A, B, C  parameters of the curve: m, m K, unit of S
//	ε, τ  emissivity and window transmittance that an indicator is set to
//	c₂  hc/k, m K
//
// What isn't known is not made up: outside of a declared range there is NaN, a state or an
// error. A value at the end of a range is a bound of the temperature (it is censored).
//
// It needs the standard library and pyro alone; values are safe for concurrent use, but for
// Repeats, which counts. No reading is a safety interlock.
package detector
