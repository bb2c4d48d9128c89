package fit

import "math"

// maxOrthant is the most dimensions of orthant.
const maxOrthant = 16

// orthant returns P(x ≤ 0 in all n components) of a Gaussian with the given mean and
// covariance (row by row, the lower half), both of which it overwrites. It conditions on one component after
// the other, that most likely to exceed 0 first, and takes what is left for Gaussian with the
// moments of the truncated one (N. R. Mendell, R. C. Elston, Multifactorial qualitative
// traits, Biometrics 30 (1974) 41, cited from memory). Exact for one component and for
// independent ones; for others within ten per cent of P (TestOrthant).
func orthant(mean, cov []float64, n int) float64 {
	const settled = tailFrom // further components change P by less than 3e-7 each
	var left [maxOrthant]int // components not yet conditioned on
	var column [maxOrthant]float64
	for i := range n {
		left[i] = i
	}
	product := 1.0
	for count := n; count > 0; {
		at, z := -1, float64(settled)
		for a, i := range left[:count] {
			m, v := mean[i], cov[i*n+i]
			if v <= 0 {
				if m > 0 {
					return 0
				}
				continue
			}
			if m > 0 || m*m < z*z*v {
				if s := m / math.Sqrt(v); s > z {
					at, z = a, s
				}
			}
		}
		if at < 0 {
			return product
		}
		if z >= tailTo {
			return 0
		}
		p, h := upperTail(z)
		product *= p
		on := left[at]
		count--
		left[at] = left[count]
		inverse := 1 / math.Sqrt(cov[on*n+on])
		less := h * (h - z) // E = −h, variance 1 − h(h − z)
		for a, i := range left[:count] {
			f := cov[max(i, on)*n+min(i, on)] * inverse
			mean[i] -= f * h
			column[a] = f
			f *= less
			for b, k := range left[:a+1] {
				cov[max(i, k)*n+min(i, k)] -= f * column[b]
			}
		}
	}
	return product
}

// The table of upperTail.
const (
	tailFrom, tailTo = -5, 12
	tailSteps        = 32 // for each unit
)

var tail = func() (t [(tailTo-tailFrom)*tailSteps + 1][2]float64) {
	for i := range t {
		z := tailFrom + float64(i)/tailSteps
		p := math.Erfc(z/math.Sqrt2) / 2
		t[i] = [2]float64{p, math.Exp(-z*z/2) / (math.Sqrt(2*math.Pi) * p)}
	}
	return t
}()

// upperTail returns p = P(x > z) of a standard normal and the hazard h = −p′/p at z, which
// must lie between tailFrom and tailTo, by cubic interpolation with p′ = −hp and
// h′ = h(h − z); to 2e-5 of p and of h up to z = 8,
// 1e-4 beyond (TestUpperTail).
func upperTail(z float64) (p, h float64) {
	u := (z - tailFrom) * tailSteps
	i := min(int(u), len(tail)-2)
	u -= float64(i)
	a, b := &tail[i], &tail[i+1]
	z0 := tailFrom + float64(i)/tailSteps
	const d = 1.0 / tailSteps
	return hermite(a[0], b[0], -a[1]*a[0]*d, -b[1]*b[0]*d, u), hermite(a[1], b[1], a[1]*(a[1]-z0)*d, b[1]*(b[1]-z0-d)*d, u)
}

// hermite is the cubic with the values a, b and the slopes da, db at 0 and 1.
func hermite(a, b, da, db, u float64) float64 {
	c := b - a
	return a + u*(da+u*(3*c-2*da-db+u*(da+db-2*c)))
}
