package pyro

// Signed first-order sensitivities at one wavelength, in kelvin of inferred
// temperature. With n = LogSlope(λ,T), a relative change of the radiance by δ
// moves the inferred temperature by δ·T/n. Multiply the results by the change:
// SensitivityToRadiance(λ, t)*0.01 is what one per cent is worth.

// SensitivityToRadiance returns ∂T/∂lnL = T/n in K: what a radiance read too
// high by a factor 1 + δ adds to the inferred temperature, per δ.
func SensitivityToRadiance(λ Wavelength, t Temperature) float64 {
	return float64(t) / LogSlope(λ, t)
}

// SensitivityToEmissivity returns ∂T/∂lnε = −T/n in K, where nothing else shines
// in: an emissivity set too high gives a temperature too low.
func SensitivityToEmissivity(λ Wavelength, t Temperature) float64 {
	return -SensitivityToRadiance(λ, t)
}

// SensitivityToSurroundings returns ∂T/∂T_s in K per K for an opaque surface of
// the given emissivity that reflects an enclosure at surroundings,
//
//	∂T/∂T_s = −(1 − ε)/ε · (∂L/∂T at T_s) / (∂L/∂T at T)
//
// walls assumed too hot make the load read too cold.
func SensitivityToSurroundings(λ Wavelength, t, surroundings Temperature, emissivity float64) float64 {
	return -(1 - emissivity) / emissivity * RadianceSlope(λ, surroundings) / RadianceSlope(λ, t)
}
