package pyro

import "math"

// RadiancePerWavenumber returns the spectral radiance of a blackbody per
// wavenumber ν̃ = 1/λ, at the vacuum wavelength λ,
//
//	L_ν̃ = c₁L ν̃³ / (exp(c₂ν̃/T) − 1) = λ² L      W m⁻² sr⁻¹ (m⁻¹)⁻¹
//
// Multiply by 100 for W m⁻² sr⁻¹ per cm⁻¹. Bound: that of Radiance plus 2 ULP.
func RadiancePerWavenumber(λ Wavelength, t Temperature) float64 {
	return float64(λ) * Radiance(λ, t) * float64(λ)
}

// PhotonRadiance returns the spectral photon radiance of a blackbody per
// wavelength, what photon counters and cameras respond to,
//
//	L_q = L·λ/(hc) = 2c λ⁻⁴ / (exp(c₂/λT) − 1)      s⁻¹ m⁻² sr⁻¹ m⁻¹
//
// Bound: that of Radiance plus 3 ULP.
func PhotonRadiance(λ Wavelength, t Temperature) float64 {
	const hc = PlanckConstant * SpeedOfLight
	return Radiance(λ, t) * float64(λ) / hc
}

// WienRadiance returns Wien's approximation c₁L λ⁻⁵ exp(−c₂/λT), for those who
// must compare with values computed from it. It is low by WienError.
func WienRadiance(λ Wavelength, t Temperature) float64 {
	x, _ := exponent(float64(λ), float64(t))
	if x < 1e-17 { // Planck's radiance may be infinite there, Wien's is not
		l := float64(λ)
		return C1L / l / l / l / l / l
	}
	l := Radiance(λ, t)
	if l == 0 {
		return 0
	}
	return l * -math.Expm1(-x)
}

// WienError returns the relative error of Wien's approximation,
// WienRadiance/Radiance − 1 = −exp(−c₂/λT).
func WienError(λ Wavelength, t Temperature) float64 {
	x, _ := exponent(float64(λ), float64(t))
	return -math.Exp(-x)
}
