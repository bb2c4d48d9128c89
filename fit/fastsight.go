package fit

import (
	"math"

	"candent/fit/internal/elementary"
)

// The fast path behind a sight: what the readings say of the surface is E = (s − b − c)/(aS − b),
// so
//
//	ln(s − b − c) − ln a − ln(1 − b/aS) = ln S + ln ε
//
// is what the plain fast path starts from, the third term taken at a temperature that is
// found by repetition. What the shared unknowns can do to it, to first order, widens the
// covariance of the groups, V = D + RRᵀ, so that the starts lie near the minima with
// everything free. They are then refined in all unknowns on the exact model.

const (
	liftLeast  = 0.1 // least 1 − b/aS at which walls leave the logarithm enough to go by
	liftRounds = 6
	freeStd    = 1e3  // of an unknown without a prior, in its own unit, among the groups
	sightDone  = 5e-6 // of u: what may be left of the way to the lowest minimum
)

// sightGroups are the groups with what the shared unknowns do to them, whitened by the
// Cholesky factor L of V: A = L⁻¹(1, k) in orthogonal form A = QR.
type sightGroups struct {
	shared        []float64 // R, groups × q
	factor        [maxGroups * maxGroups]float64
	q1, q2        [maxGroups]float64
	r11, r12, r22 float64
	left          [maxGroups]float64 // whitened residuals of the last profile
}

// groupedSight averages what the readings say of the surface over the groups.
func (w *Work) groupedSight() bool {
	e, f, v := w.e, w.e.fast, &w.seen
	if v.self > 0 || v.shape > 0 || v.byShape > 0 {
		return false
	}
	weights, lifted := w.slope, w.gain
	for j, side := range w.censored {
		w.log[j] = w.signal[j] - v.b[j] - v.c[j]
		if side != 0 || !(w.log[j] > 0) {
			return false
		}
		weights[j] = w.log[j] * w.log[j] / w.variance(j, w.signal[j])
		if weights[j] < clearlySet*clearlySet {
			return false
		}
		w.log[j] /= v.a[j]
	}
	walls := false
	for _, b := range v.b {
		walls = walls || b > 0
	}
	w.sights.factor = [maxGroups * maxGroups]float64{} // no shared unknowns yet
	β := math.NaN()
	g := w.groups[:f.groups]
	for range liftRounds {
		clear(g)
		copy(lifted, w.log)
		if walls && β == β {
			for j, b := range v.b {
				own := v.a[j] * w.black[j]
				lift := own - b
				if lift < liftLeast*own {
					return false
				}
				lifted[j] *= own / lift
			}
		}
		elementary.LogTo(lifted, lifted)
		for j, weight := range weights {
			p := &g[f.of[j]]
			p.weight += weight
			p.y += weight * (lifted[j] - f.logPk[j])
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
		β = w.profilePlain(0).beta
		if !(β > e.hottest && β < e.coldest) {
			return false
		}
		w.blackbody(β)
		if !walls || math.Abs(β-before) < 3e-2*β {
			return w.widenGroups(β, weights)
		}
	}
	return false
}

// widenGroups averages ∂ ln(s − b − c)/∂η over the groups, at β, and factors V.
func (w *Work) widenGroups(β float64, weights []float64) bool {
	e, f, v, s := w.e, w.e.fast, &w.seen, &w.sights
	q, G := e.q, f.groups
	clear(s.shared)
	for j, weight := range weights {
		net := w.signal[j] - v.b[j] - v.c[j]
		S, a := w.black[j], v.a[j]
		E := net / (a*S - v.b[j])
		weight /= net * w.groups[f.of[j]].weight
		row := s.shared[f.of[j]*q : (f.of[j]+1)*q]
		t := β * w.rate[j]
		for k := range row {
			x := &v.effect[j*q+k]
			row[k] += weight * (S*E*(x.a+a*t*(x.c1+x.c2*β)) + (1-E)*x.b + x.c)
		}
	}
	for k := range q {
		if e.sight.free(k) {
			for g := range G {
				s.shared[g*q+k] *= freeStd
			}
		}
	}
	for g := range G {
		for h := range g + 1 {
			sum := 0.0
			a, b := s.shared[g*q:(g+1)*q], s.shared[h*q:(h+1)*q]
			for k, r := range a {
				sum += r * b[k]
			}
			if g == h {
				sum += 1 / w.groups[g].weight
			}
			for k := range h {
				sum -= s.factor[g*maxGroups+k] * s.factor[h*maxGroups+k]
			}
			if g == h {
				if !(sum > 0) {
					return false
				}
				s.factor[g*maxGroups+g] = math.Sqrt(sum)
			} else {
				s.factor[g*maxGroups+h] = sum / s.factor[h*maxGroups+h]
			}
		}
	}
	var one, k [maxGroups]float64
	for g := range G {
		one[g], k[g] = 1, w.groups[g].k
	}
	s.whiten(one[:G])
	s.whiten(k[:G])
	s.r11, s.r12, s.r22 = 0, 0, 0
	for g := range G {
		s.r11 += one[g] * one[g]
	}
	s.r11 = math.Sqrt(s.r11)
	for g := range G {
		s.q1[g] = one[g] / s.r11
		s.r12 += s.q1[g] * k[g]
	}
	for g := range G {
		k[g] -= s.r12 * s.q1[g]
		s.r22 += k[g] * k[g]
	}
	s.r22 = math.Sqrt(s.r22)
	for g := range G {
		s.q2[g] = k[g] / s.r22
	}
	return s.r22 > 1e-9*math.Abs(s.r12)
}

// whiten replaces x by L⁻¹x.
func (s *sightGroups) whiten(x []float64) {
	for g := range x {
		row := s.factor[g*maxGroups : g*maxGroups+g+1]
		v := x[g]
		for h, f := range row[:g] {
			v -= f * x[h]
		}
		x[g] = v / row[g]
	}
}

// profileSight is profilePlain with the groups' full covariance.
func (w *Work) profileSight(t float64) point {
	s := &w.sights
	groups := w.groups[:w.e.fast.groups]
	var tilt [maxGroups]float64
	rest, jac := s.left[:len(groups)], tilt[:len(groups)]
	for g := range groups {
		jac[g] = 1 + t*groups[g].x
	}
	elementary.LogTo(rest, jac)
	for g := range groups {
		jac[g] = groups[g].x / jac[g]
		rest[g] = groups[g].y - rest[g]
	}
	s.whiten(rest)
	s.whiten(jac)
	var y1, y2, j1, j2 float64
	for g := range rest {
		y1 += s.q1[g] * rest[g]
		y2 += s.q2[g] * rest[g]
		j1 += s.q1[g] * jac[g]
		j2 += s.q2[g] * jac[g]
	}
	var rr, rj, jj float64
	for g := range rest {
		rest[g] -= y1*s.q1[g] + y2*s.q2[g]
		jac[g] -= j1*s.q1[g] + j2*s.q2[g]
		rr += rest[g] * rest[g]
		rj += rest[g] * jac[g]
		jj += jac[g] * jac[g]
	}
	slope := y2 / s.r22 // −β
	return point{t: t, chi2: rr, beta: -slope, level: (y1 - s.r12*slope) / s.r11, step: rj / jj, gain: rj * rj / jj}
}

// expectedShared writes the shared unknowns that the groups expect at the last profile,
// η = RᵀV⁻¹(residuals).
func (w *Work) expectedShared(η []float64) {
	s := &w.sights
	G, q := w.e.fast.groups, len(η)
	x := s.left
	for g := G - 1; g >= 0; g-- { // L⁻ᵀ
		v := x[g]
		for h := g + 1; h < G; h++ {
			v -= s.factor[h*maxGroups+g] * x[h]
		}
		x[g] = v / s.factor[g*maxGroups+g]
	}
	clear(η)
	for g := range G {
		for k := range η {
			η[k] += s.shared[g*q+k] * x[g]
		}
	}
	for k := range η {
		if w.e.sight.free(k) {
			η[k] *= freeStd
		}
	}
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
	copy(ψ[e.p:], w.startShared)
	clear(w.startShared)
	ψ[0] = θ0
	if e.p == 2 {
		ψ[1] = θ1
	}
	evaluate := func() float64 { return w.evaluate(β, ψ, true) }
	if w.columns.usable {
		evaluate = func() float64 { return w.evaluateColumns(β, ψ) }
	}
	if done == fastDone {
		done = sightDone
	}
	before := 0.0
	for range fastSteps {
		if !(β > e.hottest && β < e.coldest) {
			return basin{}, outside
		}
		chi2 := evaluate()
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
		rate := max(length/before, 0.05)
		if before > 0 && before < 1 && rate > 0.6 && length > sightDone {
			return basin{chi2: chi2 - 3*decrement}, failed
		}
		if cut == 1 && before > 0 && length*min(1, rate) <= done {
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
