package pyro

import "math"

// c₂ as the unevaluated sum of two doubles: c2High + c2Low is right to 2⁻¹⁰⁵.
const (
	c2High float64 = C2
	c2Low  float64 = -6.735986446804958e-19
)

// exponent returns x = c₂/(λT) as the unevaluated sum of two doubles: the product
// λT and the quotient are carried with their rounding errors (FMA).
func exponent(λ, t float64) (high, low float64) {
	p := λ * t
	if !(p >= 1e-250 && p <= 1e250) { // its rounding errors would leave the normal float64
		return c2High / λ / t, 0
	}
	pe := math.FMA(λ, t, -p)
	high = c2High / p
	low = (math.FMA(-high, p, c2High) - high*pe + c2Low) / p
	return high, low
}

// wienRegion is the x beyond which the 1 in exp(x) − 1 is below 2⁻⁵⁷ of it.
const wienRegion = 40

// Radiance returns the spectral radiance of a blackbody per wavelength in vacuum,
//
//	L(λ,T) = c₁L λ⁻⁵ / (exp(c₂/λT) − 1)      W m⁻² sr⁻¹ m⁻¹
//
// M. Planck 1900. λ > 0 and T > 0; the limit 0 is returned for T = 0.
// For λT from 1e-5 to 10 m K the error is at most 8 ULP wherever the result is a
// normal float64: the exponent is compensated, and exp(−x) enters as the square
// of exp(−x/2) so that it cannot flush to zero before the result does. Any other
// positive finite argument gives a number to 1e-11 or the limit 0 or +Inf, never NaN.
func Radiance(λ Wavelength, t Temperature) float64 {
	l := float64(λ)
	if t == 0 {
		return 0
	}
	if !ordinary(l, float64(t)) {
		return math.Exp(logRadiance(l, float64(t)))
	}
	radiance, _ := radianceAndLogSlope(l, float64(t))
	return radiance
}

// RadianceSlope returns ∂L/∂T in W m⁻² sr⁻¹ m⁻¹ K⁻¹,
//
//	∂L/∂T = (L/T) · x/(1 − e⁻ˣ),   x = c₂/λT
//
// to the same bound as Radiance.
func RadianceSlope(λ Wavelength, t Temperature) float64 {
	if t == 0 {
		return 0
	}
	if !ordinary(float64(λ), float64(t)) {
		return math.Exp(logRadianceSlope(float64(λ), float64(t)))
	}
	return Radiance(λ, t) / float64(t) * LogSlope(λ, t)
}

// LogSlope returns ∂lnL/∂lnT = x/(1 − e⁻ˣ) with x = c₂/λT: the number of per
// cent by which the radiance grows when the temperature grows by one per cent.
func LogSlope(λ Wavelength, t Temperature) float64 {
	x := C2 / (float64(λ) * float64(t))
	if x == 0 {
		return 1 // the Rayleigh–Jeans limit
	}
	return x / -math.Expm1(-x)
}

// radianceAndLogSlope returns Radiance and LogSlope from one exponential, for ordinary
// arguments.
func radianceAndLogSlope(l, t float64) (radiance, n float64) {
	l2 := l * l
	scale := C1L / (l2 * l2 * l)
	high, low := exponent(l, t)
	if high > wienRegion {
		half := math.Exp(-high / 2)
		return scale * half * half * (1 - low), high
	}
	e := math.Expm1(high)
	return scale / (e + low*(e+1)), high * (e + 1) / e
}

// RadianceTemperature returns the temperature of the blackbody whose spectral
// radiance at λ is radiance (W m⁻² sr⁻¹ m⁻¹): the inverse of Radiance,
//
//	T = c₂ / (λ ln(1 + c₁L/(λ⁵L)))
//
// The error is at most 4 ULP for λT from 1e-5 to 10 m K and a normal radiance.
// It returns 0 for radiance 0 and NaN for a negative radiance.
func RadianceTemperature(λ Wavelength, radiance float64) Temperature {
	l := float64(λ)
	l2 := l * l
	scale := C1L / (l2 * l2 * l)
	if !ordinary(l, 1) || scale/radiance < 1e-300 {
		return temperatureOfLog(l, ln(radiance))
	}
	x := math.Log1p(scale / radiance)
	if math.IsInf(x, 1) && radiance > 0 { // the quotient overflows, its logarithm does not
		x = math.Log(scale) - ln(radiance)
	}
	return Temperature(C2 / (l * x))
}

// PeakWavelength returns the wavelength at which the spectral radiance per
// wavelength is largest: λ = b/T (Wien's displacement law).
func PeakWavelength(t Temperature) Wavelength { return Wavelength(WienWavelength / float64(t)) }

// Exitance returns the total exitance of a blackbody, σT⁴, in W m⁻².
func Exitance(t Temperature) float64 {
	t2 := float64(t) * float64(t)
	return StefanBoltzmann * t2 * t2
}
