package pyro

import "math"

// RadiancePerWavenumber returns the spectral radiance of a blackbody per
// wavenumber ν̃ = 1/λ, at the vacuum wavelength λ,
//
//	L_ν̃ = c₁L ν̃³ / (exp(c₂ν̃/T) − 1) = λ² L      W m⁻² sr⁻¹ (m⁻¹)⁻¹
//
// Multiply by 100 for W m⁻² sr⁻¹ per cm⁻¹. Bound: that of Radiance plus 2 ULP.
func RadiancePerWavenumber(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t != 0 && !ordinary(l, float64(t)) {
		return math.Exp(logRadiance(l, float64(t)) + 2*ln(l))
	}
	return l * l * Radiance(λ, t)
}

// RadiancePerWavenumberSlope returns ∂L_ν̃/∂T = (L_ν̃/T)·n with n = LogSlope, in
// W m⁻² sr⁻¹ (m⁻¹)⁻¹ K⁻¹. Bound: that of RadianceSlope plus 2 ULP.
func RadiancePerWavenumberSlope(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t != 0 && !ordinary(l, float64(t)) {
		return math.Exp(logRadianceSlope(l, float64(t)) + 2*ln(l))
	}
	return l * l * RadianceSlope(λ, t)
}

// RadiancePerWavenumberTemperature returns the temperature of the blackbody whose
// radiance per wavenumber at λ is radiance (W m⁻² sr⁻¹ (m⁻¹)⁻¹): the inverse of
// RadiancePerWavenumber, T = c₂/(λ ln(1 + c₁L/(λ³L_ν̃))). Bound: that of
// RadianceTemperature plus 2 ULP; 0 for radiance 0, NaN for a negative one.
func RadiancePerWavenumberTemperature(λ Wavelength, radiance float64) Temperature {
	l := float64(λ)
	if perWavelength := radiance / (l * l); ordinary(l, 1) && perWavelength > 1e-300 && perWavelength < math.Inf(1) {
		return RadianceTemperature(λ, perWavelength)
	}
	return temperatureOfLog(l, ln(radiance)-2*ln(l))
}

const hc = PlanckConstant * SpeedOfLight // J m

// PhotonRadiance returns the spectral photon radiance of a blackbody per
// wavelength, what photon counters and cameras respond to,
//
//	L_q = L·λ/(hc) = 2c λ⁻⁴ / (exp(c₂/λT) − 1)      s⁻¹ m⁻² sr⁻¹ m⁻¹
//
// Bound: that of Radiance plus 3 ULP.
func PhotonRadiance(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t != 0 && !ordinary(l, float64(t)) {
		return math.Exp(logRadiance(l, float64(t)) + ln(l) - ln(hc))
	}
	return Radiance(λ, t) * (l / hc)
}

// PhotonRadianceSlope returns ∂L_q/∂T = (L_q/T)·n with n = LogSlope, in
// s⁻¹ m⁻² sr⁻¹ m⁻¹ K⁻¹. Bound: that of RadianceSlope plus 3 ULP.
func PhotonRadianceSlope(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t != 0 && !ordinary(l, float64(t)) {
		return math.Exp(logRadianceSlope(l, float64(t)) + ln(l) - ln(hc))
	}
	return RadianceSlope(λ, t) * (l / hc)
}

// PhotonRadianceTemperature returns the temperature of the blackbody whose photon
// radiance at λ is radiance (s⁻¹ m⁻² sr⁻¹ m⁻¹): the inverse of PhotonRadiance,
// T = c₂/(λ ln(1 + 2c/(λ⁴L_q))). Bound: that of RadianceTemperature plus 2 ULP; 0 for
// radiance 0, NaN for a negative one.
func PhotonRadianceTemperature(λ Wavelength, radiance float64) Temperature {
	l := float64(λ)
	if perWavelength := radiance / l * hc; ordinary(l, 1) && perWavelength > 1e-300 && radiance/l < math.Inf(1) {
		return RadianceTemperature(λ, perWavelength)
	}
	return temperatureOfLog(l, ln(radiance)-ln(l)+ln(hc))
}

// WienRadiance returns Wien's approximation c₁L λ⁻⁵ exp(−c₂/λT), for those who
// must compare with values computed from it. It is low by WienError.
func WienRadiance(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t != 0 && !ordinary(l, float64(t)) {
		return math.Exp(ln(C1L) - 5*ln(l) - C2/l/float64(t))
	}
	return Radiance(λ, t) * -math.Expm1(-C2/(l*float64(t)))
}

// WienError returns the relative error of Wien's approximation,
// WienRadiance/Radiance − 1 = −exp(−c₂/λT).
func WienError(λ Wavelength, t Temperature) float64 {
	return -math.Exp(-C2 / (float64(λ) * float64(t)))
}
