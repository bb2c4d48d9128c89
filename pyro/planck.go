package pyro

import "math"

// Radiance returns the spectral radiance of a blackbody per wavelength in vacuum,
//
//	L(λ,T) = c₁L λ⁻⁵ / (exp(c₂/λT) − 1)      W m⁻² sr⁻¹ m⁻¹
//
// M. Planck 1900. λ > 0 and T > 0; the limit 0 is returned for T = 0.
// This is the plain form: its relative error is at most (4 + 2x)·2⁻⁵³ with
// x = c₂/λT, and results below about 1e-308·c₁Lλ⁻⁵ flush to zero.
func Radiance(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	l2 := l * l
	return C1L / (l2 * l2 * l) / math.Expm1(C2/(l*float64(t)))
}

// RadianceSlope returns ∂L/∂T in W m⁻² sr⁻¹ m⁻¹ K⁻¹,
//
//	∂L/∂T = (L/T) · x/(1 − e⁻ˣ),   x = c₂/λT
func RadianceSlope(λ Wavelength, t Temperature) float64 {
	if t == 0 {
		return 0
	}
	return Radiance(λ, t) / float64(t) * LogSlope(λ, t)
}

// LogSlope returns ∂lnL/∂lnT = x/(1 − e⁻ˣ) with x = c₂/λT: the number of per
// cent by which the radiance grows when the temperature grows by one per cent.
func LogSlope(λ Wavelength, t Temperature) float64 {
	x := C2 / (float64(λ) * float64(t))
	return x / -math.Expm1(-x)
}

// RadianceTemperature returns the temperature of the blackbody whose spectral
// radiance at λ is radiance (W m⁻² sr⁻¹ m⁻¹): the inverse of Radiance,
//
//	T = c₂ / (λ ln(1 + c₁L/(λ⁵L)))
//
// It returns 0 for radiance 0 and NaN for a negative radiance.
func RadianceTemperature(λ Wavelength, radiance float64) Temperature {
	l := float64(λ)
	l2 := l * l
	return Temperature(C2 / (l * math.Log1p(C1L/(l2*l2*l)/radiance)))
}

// PeakWavelength returns the wavelength at which the spectral radiance per
// wavelength is largest: λ = b/T (Wien's displacement law).
func PeakWavelength(t Temperature) Wavelength { return Wavelength(WienWavelength / float64(t)) }

// Exitance returns the total exitance of a blackbody, σT⁴, in W m⁻².
func Exitance(t Temperature) float64 {
	t2 := float64(t) * float64(t)
	return StefanBoltzmann * t2 * t2
}
