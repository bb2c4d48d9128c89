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

// SensitivityToWavelength returns ∂T/∂λ in K per m at constant absolute radiance: what a
// channel that lies higher than assumed by δλ does to the temperature, times −1, since the
// reading is then inverted at a wavelength that is too short,
//
//	∂T/∂λ = −(∂lnL/∂lnλ)/(∂lnL/∂lnT) · T/λ = (5/n − 1) · T/λ
//
// for ∂lnL/∂lnλ = n − 5. Multiply by 1e-9 for 1 nm. It changes sign at the peak of L.
func SensitivityToWavelength(λ Wavelength, t Temperature) float64 {
	return (5/LogSlope(λ, t) - 1) * float64(t) / float64(λ)
}

// SensitivityToEmissivityRatio returns ∂T/∂lnε_r in K, ε_r = ε_short/ε_long: a ratio set too
// high gives a temperature too low where the reading ratio rises with temperature.
func (p *Pair) SensitivityToEmissivityRatio(t Temperature) float64 {
	return -float64(t) / p.LogSlope(t)
}

// LowerBound is the temperature below which the surface can't be, by ε ≤ 1: the highest of
// the channels' radiance temperatures less k standard uncertainties of that one. It holds
// only where the surface reflects nothing and nothing shines into the path, which the
// caller declares by nothingShinesIn; hot walls break it. Without the declaration there is
// no bound (ok false). std holds the readings' standard uncertainties; k = 2 is usual.
func LowerBound(bands []*Band, readings, std []float64, k float64, nothingShinesIn bool) (t Temperature, ok bool) {
	if !nothingShinesIn || len(readings) != len(bands) || len(std) != len(bands) {
		return 0, false
	}
	for i, b := range bands {
		if !(readings[i] > 0) || !(std[i] >= 0) {
			continue
		}
		radiance := b.RadianceTemperature(readings[i])
		u := std[i] / b.RadianceSlope(radiance)
		if low := radiance - Temperature(k*u); low > t {
			t, ok = low, true
		}
	}
	return t, ok
}
