package fit

import (
	"fmt"
	"math"

	"candent/emissivity"
	"candent/fit/internal/elementary"
	"candent/fit/internal/lsq"
)

// Work is the scratch of one goroutine for one Estimator.
type Work struct {
	e *Estimator

	// the reading
	signal, std []float64 // std: a of the variance a² + shot·m + r²m²
	shot        []float64
	rounding    []float64 // the part of std² that a signal's resolution brings
	rel         float64
	log         []float64 // ln of the signals, where positive
	haveLog     bool
	censored    []int8 // −1: the signal is at most that given; 1: at least
	rough       bool   // eliminate may stop early
	sighted     bool   // the model is that of a sight or has shared unknowns
	seen        seen

	// at one β
	beta          float64
	black, rate   []float64 // S and d lnS/dβ
	coord, dcoord []float64 // mean coordinate of R·L and its derivative by β
	spread        []spread  // of wide bands, where the mean alone doesn't make ε

	// at one (β, ψ)
	model, jac []float64 // m, and ∂m/∂(β, ψ), n×size
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
	kept                 [3]kept // the last basins that refineSight found
	slot                 int
	modelRoom            []float64 // gradients and parameters, handed to models
	sights               sightGroups
	startShared          []float64 // η from which refineSight starts
	columns              columns
}

type gridPoint struct{ beta, chi2, slope float64 }

// kept are a basin's unknowns beside β, and the covariance of all.
type kept struct{ psi, cov []float64 }

// NewWork returns scratch for the estimator.
func (e *Estimator) NewWork() *Work {
	f := func(n int) []float64 { return make([]float64, n) }
	s := e.size()
	w := &Work{e: e, signal: f(e.n), std: f(e.n), log: f(e.n), shot: f(e.n), rounding: f(e.n), censored: make([]int8, e.n), sighted: !e.sight.clear || e.q > 0 || e.model != nil,
		black: f(e.n), rate: f(e.n), model: f(e.n), jac: f(e.n * s), residual: f(e.n),
		grad: f(s), hess: f(s * s), psi: f(s), trial: f(s), step: f(s), chol: f(s * s), invRow: f(s * (e.p + 1)),
		active: make([]int, 0, e.p+1), activeLow: make([]bool, 0, e.p+1), schur: f((e.p + 1) * (e.p + 1)), multiply: f(e.p + 1), rowRoom: f(s),
		grid: make([]gridPoint, gridSteps+1)}
	w.coord, w.modelRoom = e.coord, f(3*maxModel)
	if w.sighted {
		w.newSeen()
	}
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
	if e.fast != nil && w.sighted {
		w.columns = newColumns(e.n, e.p, e.q)
		w.open()
		w.sortColumns()
		w.startShared, w.sights.shared = f(e.q), f(e.fast.groups*e.q)
		for i := range w.kept {
			w.kept[i] = kept{f(e.p + e.q), f(s * s)}
		}
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
	if needs := noise.kind == perReading; needs && r.Std == nil && !e.noisy || !needs && r.Std != nil || r.Std != nil && len(r.Std) != len(e.bands) {
		return fmt.Errorf("%w: %d standard uncertainties for %d bands, with %v: give one for each reading, or declare Noise and leave Std nil", ErrReadings, len(r.Std), len(e.bands), noise)
	}
	if w.sighted {
		if err := w.look(r.Inputs); err != nil {
			return err
		}
	} else if len(r.Inputs) > 0 {
		return fmt.Errorf("%w: %d values for no input that changes per reading", ErrReadings, len(r.Inputs))
	}
	w.rel = 0
	if noise.kind == modelled {
		w.rel = noise.rel
	}
	largest, mean := 0.0, 0.0
	for j, i := range e.used {
		s := r.Signal[i]
		if math.IsNaN(s) || math.IsInf(s, 0) {
			return &ReadingError{i, "signal", s, "leave the channel out, or give it as a bound"}
		}
		var u float64
		switch {
		case noise.kind == modelled:
			u = noise.floor
		case noise.kind == perReading && r.Std != nil:
			if u = r.Std[i]; !(u > 0) || math.IsInf(u, 0) {
				return &ReadingError{i, "standard uncertainty", u, "it must be positive and finite; leave out a channel that says nothing"}
			}
		case noise.kind == perReading:
			u = math.Sqrt(e.sight.channel[j].Noise.Constant)
		}
		if w.sighted {
			w.censored[j] = e.sight.channel[j].bound(s)
			s, u, w.rounding[j] = w.linearised(j, s, u)
			if noise.kind == perReading && r.Std == nil {
				w.shot[j] = e.sight.channel[j].Noise.PerSignal / w.seen.gain[j]
			} else {
				w.shot[j] = 0
			}
			mean += s * w.seen.gain[j] / float64(e.n)
		}
		if s <= 0 && noise.kind == modelled && noise.floor == 0 && w.rounding[j] == 0 {
			return &ReadingError{i, "signal", r.Signal[i], "noise that is relative alone gives no zero or negative reading: declare a floor (RelativeWithFloor)"}
		}
		w.signal[j], w.std[j] = s, u
		largest = max(largest, math.Abs(s))
	}
	if largest == 0 {
		return fmt.Errorf("%w: every signal is 0", ErrReadings)
	}
	if w.sighted {
		w.shine(mean)
		if e.fast != nil {
			w.prepareColumns()
		}
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
	w.e.radiate(β, w.e.table, w.black, w.rate, w.coord, w.spread)
	if w.e.lines {
		return
	}
	w.e.drift(β, w.dcoord, w.spread)
}

// radiate fills S and d ln S/dβ of a blackbody at 1/T = β in each channel, and for wide bands
// the mean coordinate and its second and third central moments under R·L.
func (e *Estimator) radiate(β float64, t *bandTable, black, rate, coord []float64, width []spread) {
	black, rate = black[:e.n], rate[:e.n]
	if e.lines {
		for j, k := range e.rate {
			black[j] = -k * β
		}
		elementary.ExpTo(black, black)
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
	cell, z := t.locate(β)
	scale := 2 / t.by
	for j, k := range e.rate {
		row := t.row(cell, j)
		var d float64
		black[j], d = horner((*[tableDegree + 1]float64)(row), z)
		black[j] -= k * β
		rate[j] = d*scale - k
		coord[j], _ = horner((*[tableDegree + 1]float64)(row[tableDegree+1:]), z)
		if t.functions == tableFunctions {
			width[j].v, _ = horner((*[tableDegree + 1]float64)(row[2*(tableDegree+1):]), z)
			width[j].s, _ = horner((*[tableDegree + 1]float64)(row[3*(tableDegree+1):]), z)
		}
	}
	elementary.ExpTo(black, black)
}

// drift fills the derivatives by β of what radiate found of wide bands' coordinates.
func (e *Estimator) drift(β float64, dcoord []float64, width []spread) {
	t := e.table
	cell, z := t.locate(β)
	scale := 2 / t.by
	for j := range dcoord {
		row := t.row(cell, j)
		_, d := horner((*[tableDegree + 1]float64)(row[tableDegree+1:]), z)
		dcoord[j] = d * scale
		if t.functions == tableFunctions {
			_, dv := horner((*[tableDegree + 1]float64)(row[2*(tableDegree+1):]), z)
			_, ds := horner((*[tableDegree + 1]float64)(row[3*(tableDegree+1):]), z)
			width[j].dv, width[j].ds = dv*scale, ds*scale
		}
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
	if w.sighted {
		w.evaluateSight(β, θ, η)
	} else {
		w.evaluatePlain(θ)
	}
	w.accumulate(expected)
	w.addPriors(β, ψ)
	return w.chi2
}

// evaluatePlain fills model and jac where the readings are the surface's radiances and
// nothing is shared.
func (w *Work) evaluatePlain(θ []float64) {
	e := w.e
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
		m := s * ε
		row[0] = m*rate + s*dβ
		w.model[j] = m
	}
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
			variance = w.variance(j, m)
			cost = w.cost(j, m)
		} else {
			cost = diff * diff
		}
		weight := 1.0
		if w.censored[j] != 0 {
			cost, diff, weight = bounded(float64(w.censored[j]), diff, variance)
			w.chi2 += cost
			for a, v := range row {
				w.grad[a] += diff / variance * v
				for b := range a + 1 {
					w.hess[a*size+b] += weight / variance * v * row[b]
				}
			}
			continue
		}
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
	for k := range e.q {
		if e.sight.free(k) {
			continue
		}
		z := ψ[e.p+k]
		w.chi2 += z * z
		a := 1 + e.p + k
		w.grad[a] -= z
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
