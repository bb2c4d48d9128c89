package fit

import "math"

// The fast path behind a sight: with the shared unknowns at their expected values, what the
// readings say of the surface is E = (s − b − c)/(aS − b), so
//
//	ln(s − b − c) − ln a − ln(1 − b/aS) = ln S + ln ε
//
// is what the plain fast path starts from, the third term taken at a temperature that is
// found by repetition. The starts are then refined in all unknowns on the exact model.

const (
	liftLeast  = 0.1 // least 1 − b/aS at which walls leave the logarithm enough to go by
	liftRounds = 6
)

// groupedSight averages what the readings say of the surface over the groups.
func (w *Work) groupedSight() bool {
	e, f, v := w.e, w.e.fast, &w.seen
	if v.self > 0 || v.shape > 0 || e.p == 2 && v.byShape > 0 {
		return false
	}
	for j, side := range w.censored {
		w.log[j] = w.signal[j] - v.b[j] - v.c[j]
		if side != 0 || !(w.log[j] > 0) {
			return false
		}
		w.inverse[j] = w.log[j] * w.log[j] / w.variance(j, w.signal[j])
		if w.inverse[j] < clearlySet*clearlySet {
			return false
		}
		w.log[j] /= v.a[j]
	}
	logTo(w.log, w.log)
	walls := false
	for _, b := range v.b {
		walls = walls || b > 0
	}
	β := math.NaN()
	for range liftRounds {
		g := w.groups[:f.groups]
		clear(g)
		for j, weight := range w.inverse {
			y := w.log[j] - f.logPk[j]
			if walls && β == β {
				lift := 1 - v.b[j]/(v.a[j]*w.black[j])
				if lift < liftLeast {
					return false
				}
				y -= math.Log(lift)
			}
			p := &g[f.of[j]]
			p.weight += weight
			p.y += weight * y
			p.k += weight * e.rate[j]
			p.x += weight * f.x[j]
		}
		for i := range g {
			inv := 1 / g[i].weight
			g[i].y *= inv
			g[i].k *= inv
			g[i].x *= inv
		}
		before := β
		β = w.profile(0).beta
		if !walls || math.Abs(β-before) < 3e-3*β {
			return true
		}
		if !(β > e.hottest && β < e.coldest) {
			return false
		}
		w.blackbody(β)
	}
	return false
}

// refineSight takes a start to the minimum by Gauss–Newton steps in all unknowns, as
// refineFast does for two parameters. It refuses where the steps don't contract well: the
// curvature is then not the expected one, and two minima may be about to merge; χ² of the
// basin returned is then a guess at what may still come of it, three times as far down as
// the last step promised.
func (w *Work) refineSight(β, θ0, θ1, done float64) (basin, outcome) {
	e := w.e
	size := e.size()
	ψ := w.psi[:e.p+e.q]
	clear(ψ)
	ψ[0] = θ0
	if e.p == 2 {
		ψ[1] = θ1
	}
	before := 0.0
	for range fastSteps {
		if !(β > e.hottest && β < e.coldest) {
			return basin{}, outside
		}
		chi2 := w.evaluate(β, ψ, true)
		if !w.factor(0, size) {
			return basin{}, failed
		}
		step := w.step[:size]
		copy(step, w.grad)
		w.backSolve(step, size)
		decrement := 0.0
		for a, v := range step {
			decrement += v * w.grad[a]
		}
		cut := min(1, maxStep*β/math.Abs(step[0]))
		if !(cut > 0) {
			return basin{}, failed
		}
		β += cut * step[0]
		for k := range ψ {
			ψ[k] += cut * step[1+k]
		}
		length := math.Sqrt(max(decrement, 0))
		rate := max(length/before, 0.1)
		if before > 0 && before < 1 && rate > 0.6 && length > covDone {
			return basin{chi2: chi2 - 3*decrement}, failed
		}
		if cut == 1 && (length <= covDone || done != fastDone) && length*min(1, rate) <= done {
			b := basin{beta: β, chi2: chi2 - decrement, fast: true, bent: 1, slot: w.slot}
			w.slot = (w.slot + 1) % len(w.kept)
			b.theta[0] = ψ[0]
			if e.p == 2 {
				b.theta[1] = ψ[1]
			}
			if !e.within(b.theta[0], b.theta[1]) {
				return basin{}, failed
			}
			k := &w.kept[b.slot]
			copy(k.psi, ψ)
			for a := range size { // the inverse, a column at a time
				column := k.cov[a*size : (a+1)*size]
				clear(column)
				column[a] = 1
				w.backSolve(column, size)
			}
			b.cov[0] = k.cov[0]
			return b, converged
		}
		before = length
	}
	return basin{}, failed
}
