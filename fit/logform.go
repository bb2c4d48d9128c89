package fit

import "math"

// The joint between a reading and a process: at one temperature, what the emissivities
// would have to be, and, once per reading, how uncertain the readings leave their logarithms.
//
// The logarithmic form takes ln s for Gaussian, with the relative variance as its variance.
// That is done where a reading exceeds its standard uncertainty leastSignal times or more, and
// refused elsewhere. At leastSignal the ends of an interval move by less than 0.2 of the
// noise's own share of it, 1.5 relative variances of ε and a skewness (TestLogarithmicForm).

// leastSignal is the least ratio of a reading to its standard uncertainty.
const leastSignal = 20

// logRatio writes, for 1/T = β, y = ln ε of each channel as the reading has it, and its
// derivative by β where dy is not nil:
//
//	y_j = ln s_j − ln S_j(β)
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
		expTo(t, t)
		for j, v := range t {
			rest[j] = 1 - v
			if v > 0.5 {
				rest[j] = -math.Expm1(-rate[j] * β)
			}
		}
		logTo(t, rest)
		for j, k := range rate {
			y[j] = p.logSignal[j] + k*β + t[j]
		}
		if dy != nil {
			for j, k := range rate {
				dy[j] = k / rest[j]
			}
		}
		return
	}
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

// logReading takes the reading that load has checked: logSignal (for lines without the
// constant of Planck's law), variance of ln s, and the shared inputs' relative effects. It
// refuses readings below leastSignal standard uncertainties.
func (w *Work) logReading() error {
	e, p := w.e, w.process
	logTo(p.logSignal, w.signal)
	for j, s := range w.signal {
		u := w.std[j] / s
		v := u*u + w.rel*w.rel
		if !(s > 0) || !(v*leastSignal*leastSignal <= 1+1e-9) {
			return &WeakError{e.used[j], s, math.Hypot(w.std[j], w.rel*s)}
		}
		p.variance[j] = v
		l := p.logSignal[j]
		if e.lines {
			l -= p.plan.logPeak[j]
		}
		for k, mean := range w.mean {
			f := e.relative[j*e.q+k] + e.additive[j*e.q+k]/s
			p.shared[j*e.q+k] = f
			l -= f * mean
		}
		p.logSignal[j] = l
	}
	return nil
}
