package fit

import (
	"math"

	"candent/fit/internal/elementary"
)

// The joint between a reading and a process: at one temperature, what the emissivities
// would have to be, and, once per reading, how uncertain the readings leave their logarithms.
//
// The logarithmic form takes ln s for Gaussian, with the relative variance as its variance.
// That is done where what a reading has of the surface exceeds its standard uncertainty leastSignal times or more; elsewhere
// the linear form serves (linearform.go). At leastSignal the ends of an interval move by less than 0.2 of the
// noise's own share of it, 1.5 relative variances of ε and a skewness (TestLogarithmicForm).

// leastSignal is the least ratio of a reading to its standard uncertainty.
const leastSignal = 20

// logRatio writes, for 1/T = β, y = ln ε of each channel as the reading has it, and its
// derivative by β where dy is not nil. What the surface gives of a reading is its net
// s − b − c, so that
//
//	y_j = ln(s − b − c)_j − ln(aS(β) − b)_j
//
// and for a surface that sees itself the emissivity behind that apparent one. y is +Inf where
// the walls alone would be brighter than a surface of any emissivity.
func (w *Work) logRatio(y, dy []float64, β float64) {
	e, p := w.e, w.process
	n := e.n
	y = y[:n]
	if e.lines {
		// S = c₁Lλ⁻⁵ y/(1−y), y = e⁻ˣ
		t, rest := p.boltzmann[:n], p.rest[:n]
		rate := e.rate[:n]
		for j, k := range rate {
			t[j] = -k * β
		}
		elementary.ExpTo(t, t)
		for j, v := range t {
			rest[j] = 1 - v
			if v > 0.5 {
				rest[j] = -math.Expm1(-rate[j] * β)
			}
		}
		elementary.LogTo(t, rest)
		for j, k := range rate {
			y[j] = p.logSignal[j] + k*β + t[j]
		}
		if dy != nil {
			for j, k := range rate {
				dy[j] = k / rest[j]
			}
		}
	} else {
		t := e.table
		cell, z := t.locate(β)
		scale := 2 / t.by
		for j, k := range e.rate {
			v, d := horner((*[tableDegree + 1]float64)(t.row(cell, j)), z)
			y[j] = p.logSignal[j] + k*β - v
			if dy != nil {
				dy[j] = k - d*scale
			}
		}
	}
	if p.reflecting {
		w.lift(y, dy, β)
	}
}

// lift takes what the surface reflects out of y = ln((s − b − c)/aS): aS − b instead of aS, and
// the emissivity behind an apparent one.
func (w *Work) lift(y, dy []float64, β float64) {
	v, p := &w.seen, w.process
	for j := range y {
		black := math.Exp(p.logNet[j] - y[j]) // aS
		less := 1 - v.b[j]/black
		if !(less > 0) {
			y[j] = math.Inf(1)
			if dy != nil {
				dy[j] = math.Inf(1)
			}
			continue
		}
		y[j] -= math.Log(less)
		if dy != nil {
			dy[j] /= less
		}
		if f := v.self; f > 0 {
			E := math.Exp(y[j])
			if E*f >= 1 {
				y[j] = math.Inf(1)
				continue
			}
			y[j] += math.Log((1 - f) / (1 - E*f))
			if dy != nil {
				dy[j] /= 1 - E*f
			}
		}
	}
}

// strong reports whether what every reading has of the surface exceeds leastSignal standard
// uncertainties, so that its logarithm may be taken for Gaussian.
func (w *Work) strong() bool {
	for j, s := range w.signal {
		net := s
		if w.sighted {
			net -= w.seen.b[j] + w.seen.c[j]
		}
		if !(net > 0) || w.censored[j] != 0 || !(w.variance(j, s)*leastSignal*leastSignal <= net*net*(1+1e-9)) {
			return false
		}
	}
	return true
}

// logReading takes a strong reading that load has checked: logSignal (for lines without the
// constant of Planck's law), variance of ln(s − b − c), and the shared unknowns' relative
// effects at 1/T = β.
func (w *Work) logReading(β float64) {
	e, p := w.e, w.process
	for j, s := range w.signal {
		net, a := s, 1.0
		if w.sighted {
			net -= w.seen.b[j] + w.seen.c[j]
			a = w.seen.a[j]
		}
		p.variance[j] = w.variance(j, s) / (net * net)
		p.logNet[j] = net
		p.logSignal[j] = net / a
	}
	elementary.LogTo(p.logSignal, p.logSignal)
	elementary.LogTo(p.logNet, p.logNet)
	if e.lines {
		for j, l := range p.plan.logPeak {
			p.logSignal[j] -= l
		}
	}
	p.reflecting = false
	if !w.sighted {
		return
	}
	for _, b := range w.seen.b {
		p.reflecting = p.reflecting || b > 0
	}
	p.reflecting = p.reflecting || w.seen.self > 0
	w.relativeEffects(β)
}

// relativeEffects fills R, ∂ ln(s − b − c)/∂η, at 1/T = β.
func (w *Work) relativeEffects(β float64) {
	e, p, v := w.e, w.process, &w.seen
	if e.q == 0 {
		return
	}
	w.blackbody(β)
	for j, s := range w.signal {
		net := s - v.b[j] - v.c[j]
		S := w.black[j]
		E := 0.0
		if lift := v.a[j]*S - v.b[j]; lift > 0 {
			E = min(net/lift, 1)
		}
		if e.steady { // the same at all temperatures, also where ε would exceed 1
			S, E = net/v.a[j], 1
		}
		t := β * w.rate[j]
		for k := range e.q {
			f := &v.effect[j*e.q+k]
			p.shared[j*e.q+k] = (S*E*(f.a+v.a[j]*t*(f.c1+f.c2*β)) + (1-E)*f.b + f.c) / net
		}
	}
}
