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

// SensitivityToWavelength returns ∂T/∂λ in K per m at constant absolute radiance: what an
// assumed wavelength that is too long by δλ adds to the inferred temperature, per δλ,
//
//	∂T/∂λ = −(∂lnL/∂lnλ)/(∂lnL/∂lnT) · T/λ = (5/n − 1) · T/λ
//
// for ∂lnL/∂lnλ = n − 5. Multiply by 1e-9 for 1 nm. It changes sign at the peak of L. A
// scale calibrated at a blackbody of temperature T₀ with the same wrong wavelength takes
// (T/n)·(n₀ − 5)/λ back, all of it at T = T₀.
func SensitivityToWavelength(λ Wavelength, t Temperature) float64 {
	return (5/LogSlope(λ, t) - 1) * float64(t) / float64(λ)
}

// SensitivityToWavelength is the function of that name for a band that is assumed too far
// towards long wavelengths as a whole: all of its responsivity moves by δλ.
func (b *Band) SensitivityToWavelength(t Temperature) float64 {
	return -b.shiftSlope(t) * float64(t) / b.LogSlope(t)
}

// shiftSlope returns ∂lnS/∂δ in 1/m for a band that moves by δ as a whole.
func (b *Band) shiftSlope(t Temperature) float64 {
	sum, shift := 0.0, 0.0
	for i, λ := range b.nodes {
		s := b.weights[i] * Radiance(Wavelength(λ), t)
		sum += s
		shift += s * (LogSlope(Wavelength(λ), t) - 5) / λ
	}
	return shift / sum
}

// SensitivityToWavelengths returns ∂T/∂λ_short and ∂T/∂λ_long in K per m at a constant
// reading ratio of absolute radiances: what a band assumed too far towards long wavelengths
// as a whole adds to the ratio temperature. For lines, with n = LogSlope of each,
//
//	∂T/∂λ_short = −(n_short − 5)/(n_short − n_long) · T/λ_short
//	∂T/∂λ_long  = +(n_long − 5)/(n_short − n_long) · T/λ_long
func (p *Pair) SensitivityToWavelengths(t Temperature) (short, long float64) {
	perLog := float64(t) / p.LogSlope(t)
	return -p.short.shiftSlope(t) * perLog, p.long.shiftSlope(t) * perLog
}

// SensitivityToRatio returns ∂T/∂lnQ in K: what a reading ratio too high by a factor 1 + δ
// adds to the ratio temperature, per δ.
func (p *Pair) SensitivityToRatio(t Temperature) float64 { return float64(t) / p.LogSlope(t) }

// SensitivityToEmissivityRatio returns ∂T/∂lnε_r in K, ε_r = ε_short/ε_long: a ratio set too
// high gives a temperature too low where the reading ratio rises with temperature.
func (p *Pair) SensitivityToEmissivityRatio(t Temperature) float64 { return -p.SensitivityToRatio(t) }
