// Package lsq minimises a sum of squares ½Σ rᵢ(θ)² by damped Gauss–Newton steps
// (Levenberg 1944, Marquardt 1963; the column scaling is that of Moré, The
// Levenberg–Marquardt algorithm: implementation and theory, 1978).
//
// The Jacobian's columns are scaled to unit length before anything is decided about
// them, so that neither the path nor a statement about rank changes with the units of θ.
// Factorisations are orthogonal (QR, SVD): the normal equations are never formed. A
// Solver owns its scratch; it is not safe for concurrent use.
package lsq

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/blas"
	"gonum.org/v1/gonum/blas/blas64"
	"gonum.org/v1/gonum/lapack"
	"gonum.org/v1/gonum/lapack/lapack64"
)

// Func writes the residuals r(θ) and, where jac is not nil, the Jacobian
// ∂rᵢ/∂θₖ to jac[i*p+k]. It may refuse θ by writing a NaN residual.
type Func func(r, jac, theta []float64)

// Settings of a Solver. The zero value is the default.
type Settings struct {
	MaxIterations int     // 0: 20000
	Step          float64 // 0: 1e-13; converged when the scaled step is shorter than this
}

// ErrNotConverged says that the iterations ran out; the best θ found is kept.
var ErrNotConverged = errors.New("lsq: iterations ran out before the step became small")

// ErrStart says that the residuals at the start are not finite.
var ErrStart = errors.New("lsq: residuals at the starting values are not finite")

// RankError is the refusal of Covariance: the readings do not fix every combination of
// the parameters. Direction is the least fixed one, in θ's own units.
type RankError struct {
	Rank, Parameters int
	Direction        []float64
}

func (e *RankError) Error() string {
	return fmt.Sprintf("lsq: rank %d of %d parameters; nothing fixes the direction %.3g", e.Rank, e.Parameters, e.Direction)
}

// Solver holds the scratch for problems of n residuals and p parameters.
type Solver struct {
	n, p                  int
	set                   Settings
	r, trial              []float64 // residuals at theta and at a trial
	jac                   []float64 // Jacobian, scaled by columns, then its QR factors
	scale                 []float64 // column lengths
	widest                []float64 // the longest each was on the path: what damping is measured by (Moré)
	tau, work             []float64
	qtr                   []float64 // first p of −Qᵀr
	upper                 []float64 // R, p×p
	damped, rhs, tau2     []float64 // the 2p×p system of one damping
	step, next            []float64
	triangle, left, right []float64 // of the singular value decomposition
	singular              []float64
	Iterations            int     // of the last Minimise
	SumSquares            float64 // Σr² at the last minimum
}

// New returns a Solver for n residuals and p parameters, n ≥ p ≥ 1.
func New(n, p int, set Settings) (*Solver, error) {
	if p < 1 || n < p {
		return nil, fmt.Errorf("lsq: %d residuals cannot fix %d parameters", n, p)
	}
	if set.MaxIterations == 0 {
		set.MaxIterations = 20000
	}
	if set.Step == 0 {
		set.Step = 1e-13
	}
	f := func(n int) []float64 { return make([]float64, n) }
	return &Solver{n: n, p: p, set: set, r: f(n), trial: f(n), jac: f(n * p), scale: f(p), widest: f(p), tau: f(p),
		work: f(64 * (n + p)), qtr: f(n), upper: f(p * p), damped: f(2 * p * p), rhs: f(2 * p), tau2: f(p),
		step: f(p), next: f(p), triangle: f(p * p), left: f(p * p), right: f(p * p), singular: f(p)}, nil
}

// polishing is the predicted relative decrease of Σr² below which a comparison of two
// sums says nothing for certain: their rounding is of that order. From there on plain
// Gauss–Newton steps are taken as long as each is shorter than the one before.
const polishing = 1e-11

// startDamping makes the first steps short ones. It was chosen on the certified problems:
// from 1 a far start of one of them runs into a flat corner.
const startDamping = 100.0

// Minimise moves theta to a minimum of Σr². ErrNotConverged leaves the best θ found.
func (s *Solver) Minimise(f Func, theta []float64) error {
	s.Iterations = 0
	clear(s.widest)
	damping, grow, before := startDamping, 2.0, math.Inf(1)
	f(s.r, s.jac, theta)
	cost := sumSquares(s.r)
	if math.IsNaN(cost) || math.IsInf(cost, 0) {
		return ErrStart
	}
	s.factor()
	for s.Iterations < s.set.MaxIterations {
		s.Iterations++
		s.SumSquares = cost
		if undamped, full := s.solve(0); undamped <= polishing*cost && s.regular() {
			if full >= before || s.short(theta) {
				return nil
			}
			before = full
			for k := range theta {
				theta[k] += s.step[k]
			}
			f(s.r, s.jac, theta)
			cost = sumSquares(s.r)
			s.factor()
			continue
		}
		predicted, length := s.solve(damping)
		if length == 0 || s.short(theta) {
			return nil
		}
		for k := range theta {
			s.next[k] = theta[k] + s.step[k]
		}
		f(s.trial, nil, s.next)
		gain := (cost - sumSquares(s.trial)) / predicted
		if gain > 1e-4 {
			copy(theta, s.next)
			f(s.r, s.jac, theta)
			cost = sumSquares(s.r)
			s.factor()
			damping *= max(1.0/10, 1-math.Pow(2*gain-1, 3))
			grow = 2
			continue
		}
		damping *= grow
		grow *= 2
		if damping > 1e30 {
			return nil // no direction decreases the cost: rounding has the last word
		}
	}
	s.SumSquares = cost
	return ErrNotConverged
}

// short reports whether the step moves no parameter by more than Settings.Step of itself.
func (s *Solver) short(theta []float64) bool {
	for k, v := range theta {
		if math.Abs(s.step[k]) > s.set.Step*math.Abs(v) {
			return false
		}
	}
	return true
}

// regular reports whether the triangle of the scaled Jacobian has no vanishing diagonal.
func (s *Solver) regular() bool {
	for k := range s.p {
		if math.Abs(s.upper[k*s.p+k]) < RankTolerance {
			return false
		}
	}
	return true
}

func sumSquares(r []float64) float64 {
	sum := 0.0
	for _, v := range r {
		sum += v * v
	}
	return sum
}

// factor scales the Jacobian's columns, factors it, and forms −Qᵀr.
func (s *Solver) factor() {
	n, p := s.n, s.p
	for k := range p {
		length := blas64.Nrm2(blas64.Vector{N: n, Data: s.jac[k:], Inc: p})
		if length == 0 {
			length = 1
		}
		s.scale[k] = length
		s.widest[k] = max(s.widest[k], length)
		blas64.Scal(1/length, blas64.Vector{N: n, Data: s.jac[k:], Inc: p})
	}
	a := blas64.General{Rows: n, Cols: p, Stride: p, Data: s.jac}
	lapack64.Geqrf(a, s.tau, s.work, len(s.work))
	for i, v := range s.r {
		s.qtr[i] = -v
	}
	c := blas64.General{Rows: n, Cols: 1, Stride: 1, Data: s.qtr}
	lapack64.Ormqr(blas.Left, blas.Trans, a, s.tau, c, s.work, len(s.work))
	for i := range p {
		for k := range p {
			s.upper[i*p+k] = 0
			if k >= i {
				s.upper[i*p+k] = s.jac[i*p+k]
			}
		}
	}
}

// solve finds the step for one damping; it returns the decrease of Σr² that the
// linear model predicts and the length of the scaled step.
func (s *Solver) solve(damping float64) (predicted, length float64) {
	p := s.p
	copy(s.damped, s.upper)
	clear(s.damped[p*p:])
	copy(s.rhs, s.qtr[:p])
	clear(s.rhs[p:])
	for k := range p {
		s.damped[(p+k)*p+k] = math.Sqrt(damping) * s.widest[k] / s.scale[k]
	}
	a := blas64.General{Rows: 2 * p, Cols: p, Stride: p, Data: s.damped}
	c := blas64.General{Rows: 2 * p, Cols: 1, Stride: 1, Data: s.rhs}
	lapack64.Geqrf(a, s.tau2, s.work, len(s.work))
	lapack64.Ormqr(blas.Left, blas.Trans, a, s.tau2, c, s.work, len(s.work))
	for i := p - 1; i >= 0; i-- {
		v := s.rhs[i]
		for k := i + 1; k < p; k++ {
			v -= s.damped[i*p+k] * s.step[k]
		}
		if d := s.damped[i*p+i]; math.Abs(d) > 1e-300 {
			s.step[i] = v / d
		} else {
			s.step[i] = 0
		}
	}
	// Σ|r|² − Σ|r + Jδ|² = 2δᵀRᵀq − |Rδ|²
	for i := range p {
		v := 0.0
		for k := i; k < p; k++ {
			v += s.upper[i*p+k] * s.step[k]
		}
		predicted += v * (2*s.qtr[i] - v)
		length += s.step[i] * s.step[i]
	}
	for k := range p {
		s.step[k] /= s.scale[k]
	}
	return predicted, math.Sqrt(length)
}

// SetJacobian takes in a Jacobian, n×p by rows, for Covariance without a minimum.
func (s *Solver) SetJacobian(jac []float64) {
	copy(s.jac, jac)
	clear(s.r)
	clear(s.widest)
	s.factor()
}

// RankTolerance is the ratio of singular values of the scaled Jacobian below which a
// direction counts as not fixed.
const RankTolerance = 1e-12

// Covariance writes (JᵀJ)⁻¹ at the last minimum to dst (p×p), for residuals of unit
// variance, or refuses with a *RankError.
func (s *Solver) Covariance(dst []float64) error {
	p := s.p
	copy(s.triangle, s.upper)
	u := blas64.General{Rows: p, Cols: p, Stride: p, Data: s.left}
	vt := blas64.General{Rows: p, Cols: p, Stride: p, Data: s.right}
	a := blas64.General{Rows: p, Cols: p, Stride: p, Data: s.triangle}
	sv := s.singular
	if !lapack64.Gesvd(lapack.SVDAll, lapack.SVDAll, a, u, vt, sv, s.work, len(s.work)) {
		return fmt.Errorf("lsq: the singular values did not converge")
	}
	rank := 0
	for _, v := range sv {
		if v > RankTolerance*sv[0] {
			rank++
		}
	}
	if rank < p {
		e := &RankError{Rank: rank, Parameters: p, Direction: make([]float64, p)}
		for k := range p {
			e.Direction[k] = vt.Data[(p-1)*p+k] / s.scale[k]
		}
		return e
	}
	for i := range p {
		for j := range p {
			sum := 0.0
			for k := range p {
				sum += vt.Data[k*p+i] * vt.Data[k*p+j] / (sv[k] * sv[k])
			}
			dst[i*p+j] = sum / (s.scale[i] * s.scale[j])
		}
	}
	return nil
}
