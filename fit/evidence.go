package fit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// ErrEvidence is what the errors of LogEvidence wrap that say why there is none.
var ErrEvidence = errors.New("fit: evidence")

// LogEvidence returns the logarithm of the marginal likelihood of a reading,
//
//	ln ∫∫∫ p(s | T, θ, η) p(T) p(θ) p(η) dT dθ dη
//
// the density of the readings in their own unit (behind detectors, in that of the radiance),
// T flat over the range beforehand (times what is known of it). Two surfaces on the same
// readings and range compare by their difference, the logarithm of the Bayes factor.
//
// For a process it is the integral of its posterior before that is normalised: everything but
// T is integrated in closed form. For a family every parameter needs a prior, of its own or by
// emissivities known at as many wavelengths (else ErrEvidence): θ and η are integrated by
// Laplace's rule at each temperature, which is exact where the readings are linear in them
// (Identity links, standard uncertainties given), with the noise's normalisation at the
// readings (J. A. Nelder, D. Pregibon, An extended quasi-likelihood function, Biometrika 74
// (1987) 221, cited from memory), and T by adaptive quadrature. ε between 0 and 1 is part of
// the prior: exactly for one parameter, else as good as orthant's ten per cent.
func (e *Estimator) LogEvidence(r Readings) (float64, error) {
	w, res := e.NewWork(), e.NewResult()
	if err := e.EstimateTo(res, w, r); err != nil {
		return 0, err
	}
	return w.logEvidence(res)
}

// logEvidence is LogEvidence after EstimateTo.
func (w *Work) logEvidence(res *Result) (float64, error) {
	e := w.e
	for k := range e.q {
		if e.sight.free(k) {
			return 0, fmt.Errorf("%w: %s has no prior", ErrEvidence, e.sight.columns[k].name)
		}
	}
	if o := res.posterior; o != nil {
		if e.process.surface.IsRelative() {
			return 0, fmt.Errorf("%w: a relative level has no prior", ErrEvidence)
		}
		v := math.Log(o.total) + o.offset - float64(e.n)/2*math.Log(2*math.Pi) - e.logTemperatureSpan()
		if l := w.process.linear; l != nil && l.on { // there they are those of s itself
			return v, nil
		}
		for _, net := range w.process.logNet { // the densities are those of ln s
			v -= net
		}
		return v, nil
	}
	prior, err := e.logPrior()
	if err != nil {
		return 0, err
	}
	v := prior + w.noiseNorm() - float64(e.q)/2*math.Log(2*math.Pi)
	if t := e.assume.Temperature; t.Value > 0 && t.StdK == 0 {
		return v + w.logMarginal(1/float64(t.Value)), nil
	}
	return v + w.logIntegral(res) - e.logTemperatureSpan(), nil
}

// logTemperatureSpan is ln of the integral over the range of what is assumed of T beforehand.
func (e *Estimator) logTemperatureSpan() float64 {
	lo, hi := float64(e.assume.Range.Min), float64(e.assume.Range.Max)
	t := e.assume.Temperature
	if t.StdK == 0 {
		return math.Log(hi - lo)
	}
	zl, zh := (lo-float64(t.Value))/t.StdK, (hi-float64(t.Value))/t.StdK
	return math.Log(t.StdK*math.Sqrt(2*math.Pi)) + logBetween(zl, zh)
}

// logPrior returns ln of the normalisation of θ's prior, formed from the rows of data, bounds
// included; ErrEvidence where it isn't proper.
func (e *Estimator) logPrior() (float64, error) {
	switch {
	case e.model != nil:
		return 0, fmt.Errorf("%w: %v has minima in its parameters that Laplace's rule doesn't see", ErrEvidence, e.assume.Emissivity)
	case e.assume.Noise.unknown:
		return 0, fmt.Errorf("%w: the size of the noise has no prior", ErrEvidence)
	case e.assume.Loss.kind != square:
		return 0, fmt.Errorf("%w: a loss that bounds outliers is no likelihood", ErrEvidence)
	case e.family.IsRelative():
		return 0, fmt.Errorf("%w: a relative level has no prior", ErrEvidence)
	}
	free := e.freeParameters()
	k := len(free)
	if k == 0 {
		return 0, nil
	}
	precision, right := mat.NewSymDense(k, nil), mat.NewVecDense(k, nil)
	squares := 0.0
	for _, d := range e.data {
		value := d.value
		for a, fixed := range e.fixed {
			if fixed {
				value -= d.row[a] * e.value[a]
			}
		}
		w2 := d.weight * d.weight
		squares += w2 * value * value
		for i, a := range free {
			right.SetVec(i, right.AtVec(i)+w2*d.row[a]*value)
			for j, b := range free[:i+1] {
				precision.SetSym(i, j, precision.At(i, j)+w2*d.row[a]*d.row[b])
			}
		}
	}
	var chol mat.Cholesky
	mean, cov := mat.NewVecDense(k, nil), mat.NewSymDense(k, nil)
	if len(e.data) < k || !chol.Factorize(precision) || chol.Cond() > 1e14 || chol.SolveVecTo(mean, right) != nil || chol.InverseTo(cov) != nil {
		return 0, fmt.Errorf("%w: not every parameter has a prior (WithPrior, or KnownAt at as many wavelengths)", ErrEvidence)
	}
	misfit := squares - mat.Dot(right, mean) // of the data among themselves
	θ := append([]float64(nil), e.value...)
	for i, a := range free {
		θ[a] = mean.AtVec(i)
	}
	return (chol.LogDet()-float64(k)*math.Log(2*math.Pi)+misfit)/2 - e.logInBounds(θ, free, cov), nil
}

// freeParameters lists the parameters that aren't fixed.
func (e *Estimator) freeParameters() []int {
	var free []int
	for k, fixed := range e.fixed {
		if !fixed {
			free = append(free, k)
		}
	}
	return free
}

// logInBounds is ln P(0 < ε ≤ 1) of Gaussian parameters; cov is that of the free ones.
func (e *Estimator) logInBounds(θ []float64, free []int, cov *mat.SymDense) float64 {
	rows := len(e.limits) / max(e.p, 1)
	if rows == 0 || len(free) == 0 {
		return 0
	}
	if e.p == 1 {
		m, s := θ[0]*e.limits[0], math.Sqrt(cov.At(0, 0))*math.Abs(e.limits[0])
		return logBetween((e.lower-m)/s, (e.upper-m)/s)
	}
	points := spreadOver(rows, boundPoints)
	n := len(points)
	mean, covariance := make([]float64, n), make([]float64, n*n)
	total := 0.0
	for _, side := range [2]struct{ limit, sign float64 }{{e.upper, 1}, {e.lower, -1}} {
		if math.IsInf(side.limit, 0) {
			continue
		}
		for a, i := range points {
			row := e.limits[i*e.p : (i+1)*e.p]
			mean[a] = -side.sign * side.limit
			for k, v := range row {
				mean[a] += side.sign * v * θ[k]
			}
			for b, j := range points[:a+1] {
				other := e.limits[j*e.p : (j+1)*e.p]
				v := 0.0
				for x, k := range free {
					for y, l := range free {
						v += row[k] * cov.At(x, y) * other[l]
					}
				}
				covariance[a*n+b] = v
			}
		}
		total += math.Log(orthant(mean, covariance, n))
	}
	return total
}

// noiseNorm is ln of the normalisation of the readings' noise, its variance at the readings.
func (w *Work) noiseNorm() float64 {
	e := w.e
	v := 0.0
	if e.whiten != nil {
		for j := range e.n {
			v -= math.Log(2*math.Pi)/2 + math.Log(e.whiten.At(j, j))
		}
		return v
	}
	for j, s := range w.signal {
		if w.censored[j] == 0 {
			v -= math.Log(2*math.Pi*w.variance(j, s)) / 2
		}
	}
	return v
}

// logMarginal is ln of the integral over θ and η of exp(−χ²/2) at 1/T = β, from the expansion
// to second order at what eliminate returns: where a bound is active, the Gaussian goes on
// beyond it, and what is inside counts.
func (w *Work) logMarginal(β float64) float64 {
	e := w.e
	ψ := make([]float64, e.p+e.q)
	w.startTheta(β, ψ)
	chi2, _ := w.eliminate(β, ψ)
	if math.IsInf(chi2, 1) || math.IsNaN(chi2) {
		return math.Inf(-1)
	}
	var free []int // of ψ
	for k := range ψ {
		if k >= e.p || !e.fixed[k] {
			free = append(free, k)
		}
	}
	n := len(free)
	if n == 0 {
		return -chi2 / 2
	}
	size := e.size()
	hess, grad, step := mat.NewSymDense(n, nil), mat.NewVecDense(n, nil), mat.NewVecDense(n, nil)
	for i, a := range free {
		grad.SetVec(i, w.grad[1+a])
		for j, b := range free[:i+1] {
			hess.SetSym(i, j, w.hess[(1+a)*size+1+b])
		}
	}
	var chol mat.Cholesky
	cov := mat.NewSymDense(n, nil)
	if !chol.Factorize(hess) || chol.SolveVecTo(step, grad) != nil || chol.InverseTo(cov) != nil {
		return math.Inf(-1)
	}
	v := (-chi2 + mat.Dot(grad, step) - chol.LogDet() + float64(n)*math.Log(2*math.Pi)) / 2
	freeθ := e.freeParameters()
	if k := len(freeθ); k > 0 {
		θ := ψ[:e.p]
		for i, a := range freeθ {
			θ[a] += step.AtVec(i)
		}
		v += e.logInBounds(θ, freeθ, cov.SliceSym(0, k).(*mat.SymDense))
	}
	return v
}

// The adaptive quadrature over β: accuracy of a piece, the density beside the greatest that
// is not refined, and the most halvings.
const (
	evidenceAccuracy = 1e-9
	evidenceFloor    = 1e-14
	evidenceDepth    = 45
)

// logIntegral is ln ∫ exp(logMarginal) dT, from the scan's temperatures and the basins, so that
// no peak hides between nodes, by Simpson's rule with halvings.
func (w *Work) logIntegral(res *Result) float64 {
	e := w.e
	var nodes []float64
	ratio := math.Log(e.coldest / e.hottest)
	for i := range gridSteps {
		nodes = append(nodes, e.hottest*math.Exp(ratio*float64(i)/gridSteps))
	}
	nodes = append(nodes, e.coldest)
	for _, b := range res.basins {
		for i, β := range nodes {
			if β == b.beta {
				break
			}
			if β > b.beta {
				nodes = append(nodes[:i], append([]float64{b.beta}, nodes[i:]...)...)
				break
			}
		}
	}
	log := func(β float64) float64 { return w.logMarginal(β) - 2*math.Log(β) }
	values := make([]float64, len(nodes))
	offset := math.Inf(-1)
	for i, β := range nodes {
		values[i] = log(β)
		offset = max(offset, values[i])
	}
	if math.IsInf(offset, -1) {
		return offset
	}
	f := func(β float64) float64 { return math.Exp(log(β) - offset) }
	var simpson func(a, b, fa, fm, fb float64, depth int) float64
	simpson = func(a, b, fa, fm, fb float64, depth int) float64 {
		m := (a + b) / 2
		left, right := f((a+m)/2), f((m+b)/2)
		whole := (b - a) / 6 * (fa + 4*fm + fb)
		halves := (b - a) / 12 * (fa + 4*left + 2*fm + 4*right + fb)
		if depth == 0 || math.Abs(halves-whole) <= 15*evidenceAccuracy*halves || max(fa, left, fm, right, fb) < evidenceFloor {
			return halves + (halves-whole)/15
		}
		return simpson(a, m, fa, left, fm, depth-1) + simpson(m, b, fm, right, fb, depth-1)
	}
	total := 0.0
	for i := range len(nodes) - 1 {
		a, b := nodes[i], nodes[i+1]
		total += simpson(a, b, math.Exp(values[i]-offset), f((a+b)/2), math.Exp(values[i+1]-offset), evidenceDepth)
	}
	return offset + math.Log(total)
}

// logBetween is ln(Φ(b) − Φ(a)) of the standard normal, far into its tails.
func logBetween(a, b float64) float64 {
	if a > 0 { // so that the greater part isn't near 1
		a, b = -b, -a
	}
	low, high := logNormal(a), logNormal(b)
	if math.IsInf(high, -1) {
		return high
	}
	return high + math.Log1p(-math.Exp(low-high))
}

// logNormal is ln Φ(z), to z⁻⁴ below −30.
func logNormal(z float64) float64 {
	if z > -30 {
		return math.Log(math.Erfc(-z/math.Sqrt2) / 2)
	}
	return -z*z/2 - math.Log(-z*math.Sqrt(2*math.Pi)) + math.Log1p(-1/(z*z))
}
