package detector

import (
	"math"

	"candent/pyro"
)

// Curve is the Sakuma–Hattori equation in Planckian form (F. Sakuma, S. Hattori,
// Establishing a practical temperature standard by using a narrow-band radiation
// thermometer with a silicon detector, 1982; recommended by CCT-WG5, 2008),
//
//	S(T) = C / (exp(c₂/(A T + B)) − 1)
//
// A and B are near the band's mean wavelength and c₂ times half its relative variance.
type Curve struct{ A, B, C float64 }

// Signal returns S(T).
func (c Curve) Signal(t pyro.Temperature) float64 {
	return c.C / math.Expm1(pyro.C2/(c.A*float64(t)+c.B))
}

// Slope returns dS/dT = S·(1 + S/C)·A c₂/(AT + B)².
func (c Curve) Slope(t pyro.Temperature) float64 {
	s, l := c.Signal(t), c.A*float64(t)+c.B
	return s * (1 + s/c.C) * c.A * pyro.C2 / (l * l)
}

// Temperature returns the inverse, T = c₂/(A ln(1 + C/S)) − B/A. It returns NaN for a
// negative signal and −B/A for 0, below any temperature that the curve means.
func (c Curve) Temperature(signal float64) pyro.Temperature {
	return pyro.Temperature(pyro.C2/(c.A*math.Log1p(c.C/signal)) - c.B/c.A)
}

// Predict returns A and B of a band from its mean wavelength λ₀ and the variance σ² of its
// responsivity,
//
//	A = λ₀ (1 − 6σ²/λ₀²),   B = (c₂/2) σ²/λ₀²
//
// to leading order in the width (formulas from memory, verified by integration: at 10 %
// of width they leave 0.1 K between fixed points 500 K apart).
func Predict(b *pyro.Band) (a, bb float64) {
	λ, w := b.Nodes()
	mean := float64(b.Mean())
	variance := 0.0
	for i := range λ {
		d := float64(λ[i]) - mean
		variance += w[i] * d * d
	}
	r := variance / (mean * mean)
	return mean * (1 - 6*r), pyro.C2 / 2 * r
}

// Moments returns the mean wavelength λ₀ and the standard deviation σ of a responsivity whose
// curve this is to leading order, the inverse of Predict: with r = σ²/λ₀², A = λ₀(1 − 6r) and
// B = c₂r/2.
func (c Curve) Moments() (mean pyro.Wavelength, std float64) {
	r := max(0, 2*c.B/pyro.C2)
	λ := c.A / (1 - 6*r)
	return pyro.Wavelength(λ), λ * math.Sqrt(r)
}
