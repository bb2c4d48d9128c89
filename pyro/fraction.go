package pyro

import "math"

// Fraction returns the fraction of a blackbody's exitance below the wavelength λ,
//
//	F(x) = (15/π⁴) ∫ₓ^∞ u³/(eᵘ − 1) du,   x = c₂/λT
//
// For x ≥ 2 by the sum over n of e⁻ⁿˣ (x³/n + 3x²/n² + 6x/n³ + 6/n⁴)·15/π⁴ (terms of
// one sign), below by 1 less the integral of the Bernoulli expansion of u³/(eᵘ − 1).
// λ > 0 and T > 0. Relative error at most 1e-14 wherever the
// result is a normal float64.
func Fraction(λ Wavelength, t Temperature) float64 {
	x, low := exponent(float64(λ), float64(t))
	if x > 1600 { // e⁻ˣ flushes to zero before, and x³ may overflow
		return 0
	}
	if x < seriesBelow {
		return 1 - lowerIntegral(x)
	}
	// e⁻ⁿˣ is powers of e⁻ˣ; the compensation matters only in the first.
	half := math.Exp(-x / 2)
	e := half * half * (1 - low)
	sum, power := 0.0, e
	for n := 1.0; n <= 64; n++ {
		term := power * (((x+3/n)*x+6/(n*n))*x + 6/(n*n*n)) / n
		sum += term
		if term < sum*0x1p-54 {
			break
		}
		power *= e
	}
	return fractionNorm * sum
}

// FractionBetween returns the fraction of a blackbody's exitance between the
// wavelengths lo and hi, negative when they are swapped. Two close ones cost no
// digits: their difference is then integrated, not subtracted.
func FractionBetween(lo, hi Wavelength, t Temperature) float64 {
	const close = 1.1 // ratio of wavelengths below which the integral is used
	if lo > 0 && hi > 0 && hi/lo < close && lo/hi < close && ordinary(float64(lo), float64(t)) {
		// Gauss–Legendre over ln λ, eight points; dF = π L λ d(ln λ) / σT⁴.
		mid, half := float64(lo), math.Log1p(float64((hi-lo)/lo))/2
		mid *= math.Exp(half)
		sum := 0.0
		for k := range 2 * len(gauss8Nodes) {
			u, weight := gauss8(k)
			λ := mid * math.Exp(half*u)
			sum += weight * Radiance(Wavelength(λ), t) * λ
		}
		return math.Pi * half * sum / Exitance(t)
	}
	return Fraction(hi, t) - Fraction(lo, t)
}

const (
	fractionNorm = 15 / (math.Pi * math.Pi * math.Pi * math.Pi)
	seriesBelow  = 2.0
)

// lowerIntegral returns (15/π⁴) ∫₀ˣ u³/(eᵘ − 1) du for 0 ≤ x < 2:
//
//	u³/(eᵘ − 1) = u² − u³/2 + Σ B₂ₖ u^(2k+2)/(2k)!,   |u| < 2π
func lowerIntegral(x float64) float64 {
	x2 := x * x
	sum, power := 1.0/3-x/8, 1.0
	for k, b := range bernoulliOverFactorial {
		power *= x2
		sum += b * power / float64(2*k+5)
	}
	return fractionNorm * x2 * x * sum
}

// bernoulliOverFactorial holds B₂ₖ/(2k)! for k = 1, 2, …, from 40-digit arithmetic.
// At x = 2 the terms fall by (x/2π)² ≈ 0.10 each; sixteen leave less than 1e-17.
var bernoulliOverFactorial = [...]float64{
	0.0833333333333333333, -0.00138888888888888889, 0.0000330687830687830688, -8.2671957671957672e-7,
	2.0876756987868099e-8, -5.28419013868749318e-10, 1.33825365306846788e-11, -3.38968029632258287e-13,
	8.58606205627784456e-15, -2.17486869855806187e-16, 5.50900282836022952e-18,
	-1.39544646858125233e-19, 3.53470703962946747e-21, -8.95351742703754685e-23,
	2.26795245233768306e-24, -5.74479066887220245e-26,
}
