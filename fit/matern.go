package fit

import "math"

// matern is the Matérn correlation of order 5/2 at the distance x in units of the length,
// as emissivity.Term has it:
//
//	(1 + r + r²/3) · e⁻ʳ,  r = √5·|x|
func matern(x float64) float64 {
	r := math.Sqrt(5) * math.Abs(x)
	return (1 + r + r*r/3) * math.Exp(-r)
}
