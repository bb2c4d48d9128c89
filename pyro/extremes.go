package pyro

import "math"

// Arguments so large or small that λ⁵, λT or the result would leave the float64 on the
// way take their logarithms instead.

// ordinary reports whether λ⁵, λT and what Planck's law makes of them stay normal float64
// on the way to a result that is one.
func ordinary(λ, t float64) bool {
	return λ >= 1e-50 && λ <= 1e50 && t >= 1e-30 && t <= 1e30
}

// ln returns the natural logarithm, also of a subnormal number, for which math.Log
// on amd64 (Go 1.26) returns about that of the least normal one.
func ln(v float64) float64 {
	if v > 0 && v < 0x1p-1022 {
		return math.Log(v*0x1p52) - 52*math.Ln2
	}
	return math.Log(v)
}

// logRadiance returns ln L(λ,T), which may be ±Inf.
func logRadiance(λ, t float64) float64 {
	logX := ln(C2) - ln(λ) - ln(t)
	x := math.Exp(logX)
	denominator := logX // ln(eˣ − 1)
	switch {
	case x > wienRegion:
		denominator = x
	case x > 1e-16:
		denominator = ln(math.Expm1(x))
	}
	return ln(C1L) - 5*ln(λ) - denominator
}

// logRadianceSlope returns ln ∂L/∂T, which may be ±Inf.
func logRadianceSlope(λ, t float64) float64 {
	logN := ln(C2) - ln(λ) - ln(t) // n = x in Wien's region
	if x := math.Exp(logN); x <= wienRegion {
		logN = ln(LogSlope(Wavelength(λ), Temperature(t)))
	}
	return logRadiance(λ, t) + logN - ln(t)
}

// temperatureOfLog returns the temperature of the blackbody whose spectral radiance has
// the logarithm y: T = c₂/λx with x = ln(1 + c₁L/(λ⁵L)).
func temperatureOfLog(λ, y float64) Temperature {
	q := ln(C1L) - 5*ln(λ) - y
	logX := q // of a small eᵠ
	switch {
	case q > wienRegion:
		logX = ln(q)
	case q > -wienRegion:
		logX = ln(math.Log1p(math.Exp(q)))
	}
	return Temperature(math.Exp(ln(C2) - ln(λ) - logX))
}
