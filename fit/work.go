package fit

import (
	"fmt"
	"math"

	"candent/emissivity"
	"candent/fit/internal/lsq"
)

// Work is the scratch of one goroutine for one Estimator.
type Work struct {
	e *Estimator

	// the reading
	signal, std []float64 // std: a of the variance a² + r²m²
	rel         float64
	log         []float64 // ln of the signals, where positive
	haveLog     bool
	mean        []float64 // of the shared inputs

	// at one β
	beta          float64
	black, rate   []float64 // S and d lnS/dβ
	coord, dcoord []float64 // mean coordinate of R·L and its derivative by β
	spread        []spread  // of wide bands, where the mean alone doesn't make ε

	// at one (β, ψ)
	model, jac []float64 // m, and ∂m/∂(β, ψ), n×size
	eps        []float64 // m/S without the shared inputs
	residual   []float64
	chi2       float64
	grad, hess []float64 // −½∂χ² and its expected curvature, of (β, ψ)

	psi, trial, step []float64
	chol, invRow     []float64
	active           []int
	activeLow        []bool
	schur, multiply  []float64
	rowRoom          []float64

	grid []gridPoint

	rows   []float64 // of the covariance
	solver *lsq.Solver

	process *processWork // for a process; or nil

	// the fast path
	groups               []group
	inverse              []float64 // 1/variance
	gain, slope          []float64
	effective            []float64
	jointGrad, jointStep [3]float64
	jointHess            [6]float64
	jointVar             float64 // of β, by the last solution
	newton               [3]float64
	jointCost            float64 // χ², where joint has it; else 0
	decrement            float64
}

type gridPoint struct{ beta, chi2, slope float64 }

// NewWork returns scratch for the estimator.
func (e *Estimator) NewWork() *Work {
	f := func(n int) []float64 { return make([]float64, n) }
	s := e.size()
	w := &Work{e: e, signal: f(e.n), std: f(e.n), log: f(e.n), mean: f(e.q),
		black: f(e.n), rate: f(e.n), model: f(e.n), jac: f(e.n * s), eps: f(e.n), residual: f(e.n),
		grad: f(s), hess: f(s * s), psi: f(s), trial: f(s), step: f(s), chol: f(s * s), invRow: f(s * (e.p + 1)),
		active: make([]int, 0, e.p+1), activeLow: make([]bool, 0, e.p+1), schur: f((e.p + 1) * (e.p + 1)), multiply: f(e.p + 1), rowRoom: f(s),
		grid: make([]gridPoint, gridSteps+1)}
	w.coord = e.coord
	count := max(e.n+1+len(e.data)+e.q+1+e.p, s)
	w.rows = f(count * s)
	var err error
	if w.solver, err = lsq.New(count, s, lsq.Settings{}); err != nil {
		panic("fit: NewWork: " + err.Error()) // more rows than columns by construction
	}
	if !e.lines {
		w.coord, w.dcoord = f(e.n), f(e.n)
		w.spread = make([]spread, e.n)
	}
	if e.process != nil {
		w.process = e.newProcessWork()
	}
	if e.fast != nil {
		w.groups, w.inverse, w.gain, w.slope, w.effective = make([]group, e.fast.groups), f(e.n), f(e.n), f(e.n), f(e.n)
	}
	return w
}

// load checks a reading and takes it in.
func (w *Work) load(r Readings) error {
	e := w.e
	if len(r.Signal) != len(e.bands) {
		return fmt.Errorf("%w: %d signals for %d bands", ErrReadings, len(r.Signal), len(e.bands))
	}
	noise := e.assume.Noise
	if needs := noise.kind == perReading; needs != (r.Std != nil) || needs && len(r.Std) != len(e.bands) {
		return fmt.Errorf("%w: %d standard uncertainties for %d bands, with %v: give one for each reading, or declare Noise and leave Std nil", ErrReadings, len(r.Std), len(e.bands), noise)
	}
	if r.Shared != nil && len(r.Shared) != e.q {
		return fmt.Errorf("%w: %d values of %d shared inputs", ErrReadings, len(r.Shared), e.q)
	}
	clear(w.mean)
	for k, v := range r.Shared {
		if math.IsNaN(v) || math.Abs(v) > 1e3 {
			return &ReadingError{k, "shared input", v, "it is counted in units of its standard uncertainty"}
		}
		w.mean[k] = v
	}
	w.rel = 0
	if noise.kind == modelled {
		w.rel = noise.rel
	}
	largest := 0.0
	for j, i := range e.used {
		s := r.Signal[i]
		switch {
		case math.IsNaN(s) || math.IsInf(s, 0):
			return &ReadingError{i, "signal", s, "leave the channel out, or give it as a bound"}
		case s <= 0 && noise.kind == modelled && noise.floor == 0:
			return &ReadingError{i, "signal", s, "noise that is relative alone gives no zero or negative reading: declare a floor (RelativeWithFloor)"}
		}
		w.signal[j] = s
		largest = max(largest, math.Abs(s))
		switch noise.kind {
		case perReading:
			u := r.Std[i]
			if !(u > 0) || math.IsInf(u, 0) {
				return &ReadingError{i, "standard uncertainty", u, "it must be positive and finite; leave out a channel that says nothing"}
			}
			w.std[j] = u
		case modelled:
			w.std[j] = noise.floor
		}
	}
	if largest == 0 {
		return fmt.Errorf("%w: every signal is 0", ErrReadings)
	}
	w.haveLog = false
	if e.fast != nil {
		for j, u := range w.std {
			w.inverse[j] = 1 / (u * u)
		}
	}
	w.beta = math.NaN()
	return nil
}

// blackbody fills black and rate for 1/T = β.
func (w *Work) blackbody(β float64) {
	if β == w.beta {
		return
	}
	w.beta = β
	e := w.e
	black, rate := w.black[:e.n], w.rate[:e.n]
	if e.lines {
		for j, k := range e.rate {
			black[j] = -k * β
		}
		expTo(black, black)
		for j, y := range black {
			rest := 1 - y // 1 − e⁻ˣ
			if y > 0.5 {
				rest = -math.Expm1(-e.rate[j] * β)
			}
			inverse := 1 / rest
			black[j] = e.peak[j] * y * inverse
			rate[j] = -e.rate[j] * inverse
		}
		return
	}
	t := e.table
	cell, z := t.locate(β)
	scale := 2 / t.by
	for j, k := range e.rate {
		row := t.row(cell, j)
		var d float64
		black[j], d = horner((*[tableDegree + 1]float64)(row), z)
		black[j] -= k * β
		rate[j] = d*scale - k
		w.coord[j], d = horner((*[tableDegree + 1]float64)(row[tableDegree+1:]), z)
		w.dcoord[j] = d * scale
	}
	expTo(black, black)
	if t.functions == tableMean {
		return
	}
	for j := range black {
		row := t.row(cell, j)[2*(tableDegree+1):]
		v, dv := horner((*[tableDegree + 1]float64)(row), z)
		q, dq := horner((*[tableDegree + 1]float64)(row[tableDegree+1:]), z)
		w.spread[j] = spread{v, q, dv * scale, dq * scale}
	}
}

// horner returns Σ cᵢzⁱ and its derivative, for the degree of the table.
func horner(c *[tableDegree + 1]float64, z float64) (v, slope float64) {
	v = c[4] + z*c[5]
	slope = v + z*c[5]
	v = c[3] + z*v
	slope = v + z*slope
	v = c[2] + z*v
	slope = v + z*slope
	v = c[1] + z*v
	slope = v + z*slope
	return c[0] + z*v, slope
}

// curve returns ε (or the amplitude) at the coordinate d and its derivative.
func (e *Estimator) curve(θ []float64, d float64) (ε, slope float64) {
	k := len(θ) - 1
	ε = θ[k]
	for k--; k >= 0; k-- {
		slope = slope*d + ε
		ε = ε*d + θ[k]
	}
	if e.link == emissivity.Exp { // the polynomial was ln ε
		ε = math.Exp(ε)
		slope *= ε
	}
	return ε, slope
}

// evaluate fills model, jac, grad, hess and chi2 at (β, ψ), ψ = (θ, η). With expected,
// the curvature is that of the loss at residuals without outliers.
func (w *Work) evaluate(β float64, ψ []float64, expected bool) float64 {
	w.blackbody(β)
	e := w.e
	θ, η := ψ[:e.p], ψ[e.p:]
	size := e.size()
	for j := range e.n {
		row := w.jac[j*size : (j+1)*size]
		s, rate := w.black[j], w.rate[j]
		var ε, dβ float64
		if e.lines || e.table.functions == tableMean {
			d := w.coord[j]
			ε, dβ = e.curve(θ, d)
			if e.lines {
				dβ = 0
			} else {
				dβ *= w.dcoord[j]
			}
			f := s
			if e.link == emissivity.Exp {
				f *= ε
			}
			for k := range e.p {
				row[1+k] = f
				f *= d
			}
		} else {
			ε, dβ = e.overBand(row[1:1+e.p], θ, w.coord[j], w.dcoord[j], w.spread[j])
			for k := range e.p {
				row[1+k] *= s
			}
		}
		w.eps[j] = ε
		m := s * ε
		row[0] = m*rate + s*dβ
		if e.q > 0 {
			scale, add := 1.0, 0.0
			for k, v := range η {
				scale += e.relative[j*e.q+k] * v
				add += e.additive[j*e.q+k] * v
				row[1+e.p+k] = m*e.relative[j*e.q+k] + e.additive[j*e.q+k]
			}
			for k := range 1 + e.p {
				row[k] *= scale
			}
			m = m*scale + add
		}
		w.model[j] = m
	}
	w.accumulate(expected)
	w.addPriors(β, ψ)
	return w.chi2
}

// accumulate forms χ², −½ of its gradient and its expected curvature from model and jac.
func (w *Work) accumulate(expected bool) {
	e := w.e
	size := e.size()
	clear(w.grad)
	clear(w.hess)
	w.chi2 = 0
	if e.whiten != nil {
		w.whitenRows()
	}
	for j := range e.n {
		row := w.jac[j*size : (j+1)*size]
		diff, variance, cost := w.residual[j], 1.0, 0.0
		if e.whiten == nil {
			m := w.model[j]
			diff = w.signal[j] - m
			variance = w.std[j]*w.std[j] + w.rel*w.rel*m*m
			cost = deviance(w.signal[j], m, w.std[j], w.rel)
		} else {
			cost = diff * diff
		}
		weight := 1.0
		if e.assume.Loss.kind != square {
			cost, weight = e.assume.Loss.of(math.Sqrt(max(cost, 0)))
		}
		w.chi2 += cost
		u := weight * diff / variance
		if expected {
			weight = 1
		}
		h := weight / variance
		for a, v := range row {
			w.grad[a] += u * v
			f := h * v
			out := w.hess[a*size : a*size+a+1]
			for b := range out {
				out[b] += f * row[b]
			}
		}
	}
	for a := range size {
		for b := range a {
			w.hess[b*size+a] = w.hess[a*size+b]
		}
	}
}

// whitenRows takes s − m and the Jacobian through L⁻¹, LLᵀ the covariance.
func (w *Work) whitenRows() {
	e := w.e
	size := e.size()
	l := e.whiten.RawTriangular()
	for j := range e.n {
		row := w.jac[j*size : (j+1)*size]
		r := w.signal[j] - w.model[j]
		for i := range j {
			f := l.Data[j*l.Stride+i]
			r -= f * w.residual[i]
			for a := range row {
				row[a] -= f * w.jac[i*size+a]
			}
		}
		f := 1 / l.Data[j*l.Stride+j]
		w.residual[j] = r * f
		for a := range row {
			row[a] *= f
		}
	}
}

// addPriors adds what is known of T, θ and η.
func (w *Work) addPriors(β float64, ψ []float64) {
	e := w.e
	size := e.size()
	if t := e.assume.Temperature; t.StdK > 0 {
		z := (float64(t.Value) - 1/β) / t.StdK
		j := -1 / (β * β * t.StdK) // d(1/β)/dβ
		w.chi2 += z * z
		w.grad[0] += z * j
		w.hess[0] += j * j
	}
	for i := range e.data {
		d := &e.data[i]
		z := d.value
		for k, v := range d.row {
			z -= v * ψ[k]
		}
		z *= d.weight
		w.chi2 += z * z
		for a, v := range d.row {
			w.grad[1+a] += z * d.weight * v
			for b, u := range d.row {
				w.hess[(1+a)*size+1+b] += d.weight * d.weight * v * u
			}
		}
	}
	for k, mean := range w.mean {
		z := mean - ψ[e.p+k]
		w.chi2 += z * z
		a := 1 + e.p + k
		w.grad[a] += z
		w.hess[a*size+a]++
	}
	for k, fixed := range e.fixed {
		if fixed {
			a := 1 + k
			for b := range size {
				w.hess[a*size+b], w.hess[b*size+a] = 0, 0
			}
			w.hess[a*size+a] = 1
			w.grad[a] = e.value[k] - ψ[k]
		}
	}
}
