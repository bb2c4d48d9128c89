package fit

import "math"

// maxOrthant is the most dimensions of logOrthant.
const maxOrthant = 16

// logOrthant returns ln P(x ≤ 0 in all n components) of a Gaussian with the given mean and
// covariance (row by row), both of which it overwrites. It conditions on one component after
// the other, that most likely to exceed 0 first, and takes what is left for Gaussian with the
// moments of the truncated one (N. R. Mendell, R. C. Elston, Multifactorial qualitative
// traits, Biometrics 30 (1974) 41, cited from memory). Exact for one component and for
// independent ones; for others within some per cent (TestOrthant).
func logOrthant(mean, cov []float64, n int) float64 {
	const settled = -5.0 // further components change P by less than 3e-7 each
	var done [maxOrthant]bool
	sum := 0.0
	for range n {
		at, z := -1, settled
		for i := range n {
			if done[i] {
				continue
			}
			v := cov[i*n+i]
			if v <= 0 {
				if mean[i] > 0 {
					return math.Inf(-1)
				}
				continue
			}
			if s := mean[i] / math.Sqrt(v); s > z {
				at, z = i, s
			}
		}
		if at < 0 {
			return sum
		}
		if z > 37 {
			return math.Inf(-1)
		}
		done[at] = true
		p := math.Erfc(z/math.Sqrt2) / 2
		sum += math.Log(p)
		h := math.Exp(-z*z/2) / (math.Sqrt(2*math.Pi) * p) // E = −h, variance 1 − h(h − z)
		less := h * (h - z)
		inv := 1 / math.Sqrt(cov[at*n+at])
		for i := range n {
			if done[i] {
				continue
			}
			f := cov[i*n+at] * inv
			mean[i] -= f * h
			f *= less * inv
			for k := range n {
				if !done[k] {
					cov[i*n+k] -= f * cov[k*n+at]
				}
			}
		}
	}
	return sum
}
