package fit

import (
	"fmt"
	"math"
)

// Noise says what the independent part of the readings' uncertainty is. The zero value
// takes the standard uncertainty that comes with each reading.
type Noise struct {
	kind       noiseKind
	rel, floor float64
	cov        []float64
	unknown    bool
}

type noiseKind int

const (
	perReading noiseKind = iota
	modelled             // variance floor² + (rel·m)² on the model m
	covariance
)

// PerReading is the zero Noise: Readings.Std holds the standard uncertainties.
func PerReading() Noise { return Noise{} }

// Relative is noise of standard deviation rel·m, m being the model: a reading that is
// low by chance weighs no more than one that is high.
func Relative(rel float64) Noise { return Noise{kind: modelled, rel: rel} }

// RelativeWithFloor is noise of variance floor² + (rel·m)²; floor in the readings' unit.
func RelativeWithFloor(rel, floor float64) Noise {
	return Noise{kind: modelled, rel: rel, floor: floor}
}

// Constant is noise of the same standard deviation in every channel, in the readings' unit.
func Constant(std float64) Noise { return Noise{kind: modelled, floor: std} }

// Covariance is noise with a dense covariance, row by row, in the readings' unit squared.
// It is a datum of the compiled estimator; one that channels share is better a Shared input.
func Covariance(cov []float64) Noise {
	return Noise{kind: covariance, cov: append([]float64(nil), cov...)}
}

// UpToFactor returns the noise with its size unknown: the shape holds up to one factor
// that is estimated from the residuals, and intervals widen by Student's t. It is never
// silently 1. Constant(1).UpToFactor(), for instance, is noise of one unknown size.
func (n Noise) UpToFactor() Noise {
	n.unknown = true
	return n
}

func (n Noise) check(channels int) error {
	bad := func(v float64) bool { return !(v >= 0) || math.IsInf(v, 0) }
	switch n.kind {
	case modelled:
		if bad(n.rel) || bad(n.floor) || n.rel == 0 && n.floor == 0 || n.rel > 0.5 {
			return fmt.Errorf("%w: noise of relative size %g and floor %g: not negative, not both 0, relative at most 0.5 (it is a fraction, not per cent)", ErrAssume, n.rel, n.floor)
		}
	case covariance:
		if len(n.cov) != channels*channels {
			return fmt.Errorf("%w: a covariance of %d elements for %d channels", ErrAssume, len(n.cov), channels)
		}
	}
	return nil
}

func (n Noise) String() string {
	s := "standard uncertainty given with each reading"
	switch {
	case n.kind == covariance:
		s = "covariance of the readings given"
	case n.kind == modelled && n.rel == 0:
		s = fmt.Sprintf("constant noise %.3g", n.floor)
	case n.kind == modelled && n.floor == 0:
		s = fmt.Sprintf("noise %.3g %% of the model", 100*n.rel)
	case n.kind == modelled:
		s = fmt.Sprintf("noise %.3g %% of the model and %.3g", 100*n.rel, n.floor)
	}
	if n.unknown {
		s += ", its size estimated from the residuals"
	}
	return s
}

// Loss is what a residual of z standard deviations costs. The zero value is z².
//
// Huber's and Student's losses bound the pull of a few outlying channels. Their
// covariance is the asymptotic one for readings without outliers, the inverse of the
// expected information times E ψ²/(E ψ′)² for ψ the loss's half derivative: about 1.05
// times the variance of least squares for Huber(1.345) (P. J. Huber, Robust Estimation
// of a Location Parameter, Ann. Math. Stat. 35 (1964) 73).
type Loss struct {
	kind  lossKind
	shape float64
}

type lossKind int

const (
	square lossKind = iota
	huber
	student
)

// Huber is z² up to |z| = k and linear beyond.
func Huber(k float64) Loss { return Loss{huber, k} }

// StudentT is (ν+1)·ln(1 + z²/ν): residuals of Student's t with ν degrees of freedom.
func StudentT(ν float64) Loss { return Loss{student, ν} }

func (l Loss) check() error {
	if l.kind != square && (!(l.shape > 0) || math.IsInf(l.shape, 0)) {
		return fmt.Errorf("%w: loss with shape %g: it must be positive", ErrAssume, l.shape)
	}
	return nil
}

// of returns the cost of z and ψ(z)/z.
func (l Loss) of(z float64) (cost, weight float64) {
	a := math.Abs(z)
	switch l.kind {
	case huber:
		if a > l.shape {
			return l.shape * (2*a - l.shape), l.shape / a
		}
	case student:
		return (l.shape + 1) * math.Log1p(z*z/l.shape), (l.shape + 1) / (l.shape + z*z)
	}
	return z * z, 1
}

// expected returns E ψ′ and E ψ² for a standard normal residual.
func (l Loss) expected() (slope, square float64) {
	switch l.kind {
	case huber:
		k := l.shape
		inside := math.Erf(k / math.Sqrt2)
		density := math.Exp(-k*k/2) / math.Sqrt(2*math.Pi)
		return inside, inside - 2*k*density + k*k*(1-inside)
	case student:
		// By the trapezoidal rule on a normal density, which converges geometrically.
		ν, h := l.shape, 1.0/16
		for z := -10.0; z <= 10; z += h {
			f := h * math.Exp(-z*z/2) / math.Sqrt(2*math.Pi)
			d := ν + z*z
			slope += f * (ν + 1) * (ν - z*z) / (d * d)
			psi := (ν + 1) * z / d
			square += f * psi * psi
		}
		return slope, square
	}
	return 1, 1
}

// variance returns that of channel j's noise under the model m.
func (w *Work) variance(j int, m float64) float64 {
	return w.std[j]*w.std[j] + w.shot[j]*max(m, 0) + w.rel*w.rel*m*m
}

// cost returns the deviance of channel j under the model m.
func (w *Work) cost(j int, m float64) float64 {
	if w.shot[j] > 0 {
		return shotDeviance(w.signal[j], max(m, 0), w.std[j]*w.std[j], w.shot[j])
	}
	return deviance(w.signal[j], m, w.std[j], w.rel)
}

// shotDeviance is the deviance for the variance V(u) = a + bu,
//
//	D = 2 ∫_m^s (s − u)/V(u) du = e²/V(m) · 2((1 + x) ln(1 + x) − x)/x²,  e = s − m, x = be/V(m)
//
// A reading below −a/b, where the variance would be negative, counts as if at it.
func shotDeviance(s, m, a, b float64) float64 {
	v := a + b*m
	e := s - m
	x := b * e / v
	f := 1 - x*(1.0/3-x*(1.0/6-x*(1.0/10-x/15)))
	switch {
	case x <= -1:
		f = 2 / (x * x) * -x
	case math.Abs(x) > 1e-3:
		f = 2 * ((1+x)*math.Log1p(x) - x) / (x * x)
	}
	return e * e / v * f
}

// bounded returns what a reading costs that is only a bound, −2 ln Φ(z) with z the number of
// standard deviations by which the model is on the right side of it, its pull in the place of
// a residual, and its expected weight. side is 1 where the truth is at least the reading.
func bounded(side, diff, variance float64) (cost, pull, weight float64) {
	std := math.Sqrt(variance)
	z := -side * diff / std
	Φ := math.Erfc(-z/math.Sqrt2) / 2
	ψ := -z // φ(z)/Φ(z) far below, to 1/z²
	logΦ := -z*z/2 - math.Log(-z*math.Sqrt(2*math.Pi))
	if z > -30 {
		logΦ = math.Log(Φ)
		ψ = math.Exp(-z*z/2) / math.Sqrt(2*math.Pi) / Φ
	}
	return -2 * logΦ, side * ψ * std, ψ * (ψ + z)
}

// deviance returns the quasi-likelihood deviance (R. W. M. Wedderburn, Quasi-likelihood
// functions, Biometrika 61 (1974) 439) of a reading s under the model m with variance
// V(u) = a² + r²u²,
//
//	D = 2 ∫_m^s (s − u)/V(u) du = [ 2(s/a) ( atan(rs/a) − atan(rm/a) ) − ln(V(s)/V(m))/r ] / r
//
// which is ((s−m)/a)² for r = 0. Its estimating equations (s − m)/V(m)·∂m = 0 are free of
// the pull towards large m that a plain χ² with σ ∝ m has. For a = 0 the limit needs s > 0.
func deviance(s, m, a, r float64) float64 {
	if r == 0 {
		z := (s - m) / a
		return z * z
	}
	if e := s - m; math.Abs(e) < 1e-3*math.Hypot(a/r, m) {
		// Series in e = s − m, where the closed form cancels: with V = V(m), g = r²m/V and
		// c = r²/V, D = e²/V·(1 − ⅔ge + ⅙(4g² − c)e² + …).
		v := a*a + r*r*m*m
		g, c := r*r*m/v, r*r/v
		return e * e / v * (1 - 2.0/3*g*e + (4*g*g-c)*e*e/6)
	}
	if a == 0 {
		return 2 / (r * r) * ((s-m)/m - math.Log(s/m))
	}
	v := func(u float64) float64 { return a*a + r*r*u*u }
	return (2*(s/a)*(math.Atan(r*s/a)-math.Atan(r*m/a)) - math.Log(v(s)/v(m))/r) / r
}
