package fit

import (
	"math"
	"slices"

	"candent/emissivity"
	"candent/fit/internal/elementary"
)

// The fast path: where the assumptions are plain and every channel stands well above its
// noise, the basins are found without a scan. In the logarithm a reading is
//
//	ln(s/c₁Lλ⁻⁵) = −(c₂/λ)β − ln(1 − e^(−c₂β/λ)) + ln ε(λ)
//
// linear in β and in ln ε but for Planck's small term, so a family of ln ε has one
// minimum and a linear least-squares fit starts it. A linear ε = a(1 + t·x), x from −1 to
// 1 over the channels, is linear in β and ln a at each relative slope t: the minima over
// t are the basins. Channels are first averaged into a few groups; the starts are then
// refined on all of them, on the exact model. Whatever is out of the ordinary goes to the
// scan, which is the reference that this path is tested to equal.

const (
	maxGroups  = 12
	tooClose   = 0.05  // |t − ξ| below which the scan is asked
	mirrorPull = 0.75  // of the way a mirror image would lie beyond ξ: the third order draws it in
	mirrorEnd  = 0.93  // the largest |t| at which the second minimum is looked for
	slopeEnd   = 0.995 // the largest |t|: ε at one edge is then 0.5 % of the mean
	clearlySet = 5     // a signal of so many σ has a logarithm to speak of
	farAbove   = 18.0  // Δχ² of a start beyond which a second minimum is not followed
	fastLimit  = 12.0  // Δχ² of an interval beyond which it asks the scan for its basins
	wienEnough = 3.0   // least c₂β/λ at which the start may take Planck's term as known
	fastSteps  = 25    // refining steps before the scan is asked
	fastDone   = 2e-7  // of u: what may be left of the way to the lowest minimum
	covDone    = 3e-6  // of u: the longest last step, since the covariance is that before it
	roughly    = 1e-3  // of u: what may be left of the way to another
	maxStep    = 0.02  // of β: a longer refining step is cut to this
)

// fastPlan is what the fast path needs beforehand.
type fastPlan struct {
	groups int
	of     []int     // group of each channel
	logPk  []float64 // ln(c₁Lλ⁻⁵)
	x      []float64 // scaled coordinate −1 … 1 of the channels (linear family)
	mid    float64   // d = mid + half·x
	half   float64
	ξ      float64 // t of ε ∝ λ
}

// compileFast returns the plan, or nil where the assumptions are not plain.
func (e *Estimator) compileFast() *fastPlan {
	a := e.assume
	plain := !slices.Contains(e.fixed, true) && len(e.data) == 0
	if !plain || e.model != nil || e.p > 2 || e.whiten != nil || a.Loss.kind != square ||
		a.Temperature != (TemperaturePrior{}) || e.deficient != "" || e.n < e.p+2 {
		return nil
	}
	f := &fastPlan{groups: min(e.n, maxGroups), of: make([]int, e.n), logPk: make([]float64, e.n), x: make([]float64, e.n)}
	order := make([]int, e.n)
	for j := range order {
		order[j] = j
		f.logPk[j] = math.Log(e.peak[j])
	}
	slices.SortStableFunc(order, func(a, b int) int {
		if e.rate[a] != e.rate[b] && (e.rate[a] > e.rate[b]) {
			return -1
		} else if e.rate[a] < e.rate[b] {
			return 1
		}
		return 0
	})
	lo, hi := e.coord[order[0]], e.coord[order[e.n-1]]
	f.mid, f.half = (lo+hi)/2, (hi-lo)/2
	f.ξ = f.half / (f.mid - e.family.Coordinate(0))
	for i, j := range order {
		g := i * f.groups / e.n
		f.of[j] = g
		if f.half > 0 {
			f.x[j] = (e.coord[j] - f.mid) / f.half
		}
	}
	return f
}

// group is a few neighbouring channels as one.
type group struct{ weight, y, k, x, planck float64 }

// fastBasins finds the basins without a scan; ok is false where it won't answer for them.
func (w *Work) fastBasins(dst []basin) (list []basin, ok bool) {
	e := w.e
	dst = dst[:0]
	f := e.fast
	if f == nil || w.sighted && !w.groupedSight() || !w.sighted && !w.grouped() {
		return dst, false
	}
	w.slot = 0
	if e.link == emissivity.Identity && e.p == 2 {
		return w.linearBasins(dst)
	}
	β, θ0, θ1, ok := w.logStart()
	if !ok {
		return dst, false
	}
	b, got := w.refineFast(β, θ0, θ1, fastDone)
	return append(dst, b), got == converged
}

// grouped averages ln(s/c₁Lλ⁻⁵) over the groups, with weights (s/σ)².
func (w *Work) grouped() bool {
	e, f := w.e, w.e.fast
	g := w.groups[:f.groups]
	clear(g)
	if !w.haveLog {
		elementary.LogTo(w.log, w.signal)
		w.haveLog = true
	}
	least := math.Inf(1)
	for j, s := range w.signal {
		weight := s * s * w.inverse[j]
		if w.rel > 0 {
			weight = s * s / (w.std[j]*w.std[j] + w.rel*w.rel*s*s)
		}
		if s < 0 {
			weight = 0
		}
		least = min(least, weight)
		p := &g[f.of[j]]
		p.weight += weight
		p.y += weight * (w.log[j] - f.logPk[j])
		p.k += weight * e.rate[j]
		p.x += weight * f.x[j]
	}
	if !(least >= clearlySet*clearlySet) {
		return false
	}
	for i := range g {
		inv := 1 / g[i].weight
		g[i].y *= inv
		g[i].k *= inv
		g[i].x *= inv
	}
	return true
}

// addPlanck moves Planck's term, taken at β, to the data: y + ln(1 − e^(−kβ)).
func (w *Work) addPlanck(β float64) bool {
	groups := w.groups[:w.e.fast.groups]
	var room [maxGroups]float64
	term := room[:len(groups)]
	for i := range groups {
		if term[i] = -groups[i].k * β; term[i] > -wienEnough {
			return false
		}
	}
	elementary.ExpTo(term, term)
	for i := range groups {
		p := &groups[i]
		x := term[i] // ln(1 − x) by its series, x below 0.05
		next := -x * (1 + x*(1.0/2+x*(1.0/3+x*(1.0/4+x*(1.0/5+x/6)))))
		p.y += p.planck - next
		p.planck = next
	}
	return true
}

// logStart fits β, ln ε and its slope to the groups, Planck's term included.
func (w *Work) logStart() (β, θ0, θ1 float64, ok bool) {
	e, f := w.e, w.e.fast
	for round := range 4 {
		// Weighted means, then the normal equations of what is left.
		var s, y, k, x float64
		for _, p := range w.groups[:f.groups] {
			s += p.weight
			y += p.weight * p.y
			k += p.weight * p.k
			x += p.weight * p.x
		}
		y, k, x = y/s, k/s, x/s
		var kk, kx, xx, ky, xy float64
		for _, p := range w.groups[:f.groups] {
			dk, dx, dy := p.k-k, p.x-x, p.y-y
			kk += p.weight * dk * dk
			kx += p.weight * dk * dx
			xx += p.weight * dx * dx
			ky += p.weight * dk * dy
			xy += p.weight * dx * dy
		}
		before := β
		slope := 0.0
		if e.p == 1 {
			β = -ky / kk
		} else {
			det := kk*xx - kx*kx
			if !(det > 1e-10*kk*xx) {
				return 0, 0, 0, false
			}
			β = -(ky*xx - kx*xy) / det
			slope = (kk*xy - kx*ky) / det
		}
		if !(β > e.hottest && β < e.coldest) {
			return 0, 0, 0, false
		}
		θ0 = y + k*β - slope*x
		if round > 0 && math.Abs(β-before) < 1e-3*β || !w.addPlanck(β) {
			if round == 0 {
				return 0, 0, 0, false
			}
			if e.p == 2 {
				θ1 = slope / f.half
				θ0 -= θ1 * f.mid
			}
			break
		}
		if round == 3 {
			return 0, 0, 0, false
		}
	}
	if e.link == emissivity.Identity {
		θ0 = math.Exp(θ0)
	}
	return β, θ0, θ1, true
}

// point is the groups' χ² at one relative slope t, with the β and ln a that make it, and
// the Gauss–Newton step of t from there with the decrease of χ² that it promises.
type point struct{ t, chi2, beta, level, step, gain float64 }

// profile fits β and ln a to the groups at the relative slope t.
func (w *Work) profile(t float64) point {
	if w.sighted {
		return w.profileSight(t)
	}
	return w.profilePlain(t)
}

// profilePlain is profile for groups that err independently.
func (w *Work) profilePlain(t float64) point {
	groups := w.groups[:w.e.fast.groups]
	var room, tilt [maxGroups]float64
	rest, jac := room[:len(groups)], tilt[:len(groups)]
	for g := range groups {
		jac[g] = 1 + t*groups[g].x
	}
	elementary.LogTo(rest, jac)
	var s, k, r, j float64
	for g := range groups {
		p := &groups[g]
		jac[g] = p.x / jac[g] // ∂ ln(1 + t·x)/∂t
		rest[g] = p.y - rest[g]
		s += p.weight
		k += p.weight * p.k
		r += p.weight * rest[g]
		j += p.weight * jac[g]
	}
	inverse := 1 / s
	k, r, j = k*inverse, r*inverse, j*inverse
	var kk, kr, kj, rr, rj, jj float64
	for g := range groups {
		weight := groups[g].weight
		dk, dr, dj := groups[g].k-k, rest[g]-r, jac[g]-j
		a := weight * dr
		kk += weight * dk * dk
		kr += a * dk
		kj += weight * dk * dj
		rr += a * dr
		rj += a * dj
		jj += weight * dj * dj
	}
	b := kr / kk // the residuals less b·dk are what no β takes up
	slope := rj - b*kj
	curvature := jj - kj*kj/kk
	return point{t: t, chi2: rr - b*kr, beta: -b, level: r - k*b, step: slope / curvature, gain: slope * slope / curvature}
}

// descend takes a point to the groups' minimum by Gauss–Newton steps in (t − ξ)², in which
// the residuals are linear to leading order (see linearBasins).
func (w *Work) descend(p point) point {
	ξ := w.e.fast.ξ
	for range 6 {
		if p.gain < 0.05 {
			return p
		}
		c := p.t - ξ
		square := max(c*c+2*c*p.step, 0.05*c*c) // it stays on its side of ξ
		p = w.profile(max(-slopeEnd, min(slopeEnd, ξ+math.Copysign(math.Sqrt(square), c))))
	}
	return p
}

// linearBasins finds the minima over the relative slope t, and refines them.
//
// There are two at the most, and they mirror each other. To second order in x, and
// modulo what β and ln a take up, ln(1 + t·x) is −½t(t − 2ξ)x², ξ the slope of ε ∝ λ:
// it is the same at t and 2ξ − t. So one minimum shows where to look for the other.
func (w *Work) linearBasins(dst []basin) (list []basin, ok bool) {
	e := w.e
	grey := w.profile(0) // to take Planck's term at
	if !(grey.beta > e.hottest && grey.beta < e.coldest) || !w.addPlanck(grey.beta) {
		return dst, false
	}
	return w.mirrorPair(dst, w.descend(w.profile(0)))
}

// mirrorPair refines a start and looks for the minimum that mirrors it.
func (w *Work) mirrorPair(dst []basin, first point) (list []basin, ok bool) {
	e, f := w.e, w.e.fast
	dst = dst[:0]
	found, got := w.refineLinear(first, fastDone)
	if got != converged || found.bent < 0.4 || found.bent > 2.5 {
		return dst, false
	}
	far := farAbove
	if e.assume.Noise.unknown {
		far *= found.chi2 / float64(e.n-e.p-1)
	}
	t := found.theta[1] * f.half / (found.theta[0] + found.theta[1]*f.mid)
	if math.Abs(t-f.ξ) < tooClose {
		return dst, false // the two minima are about to merge: let the scan decide
	}
	start := w.profile(max(-mirrorEnd, min(mirrorEnd, f.ξ+mirrorPull*(f.ξ-t))))
	at := w.descend(start)
	if at.chi2 > first.chi2+far {
		return append(dst, found), true
	}
	other, got := basin{}, failed
	if math.Abs(at.t-t) > 1e-3 {
		other, got = w.refineLinear(at, roughly)
	}
	switch {
	case got == failed && w.sighted && other.chi2 > found.chi2+farAbove:
		return append(dst, found), true
	case got == outside:
		return append(dst, found), true
	case got == converged && math.Abs(other.beta-found.beta) < 1e-5*found.beta:
		return dst, false // drawn back to the first, which says nothing of a second: let the scan decide
	case got == failed:
		// None found. Where the curve over t falls from the middle to the place looked at,
		// or to the edge beyond it, there is one, and the way to it was lost.
		top := w.profile((t + start.t) / 2)
		edge := w.profile(math.Copysign(slopeEnd, start.t-t))
		least := min(start.chi2, edge.chi2)
		return append(dst, found), least > w.profile(t).chi2+far || least >= top.chi2-1e-6*(1+top.chi2)
	case other.chi2 < found.chi2: // the start was nearer to the other one
		if other, got = w.refineFast(other.beta, other.theta[0], other.theta[1], fastDone); got != converged || other.bent < 0.4 || other.bent > 2.5 {
			return dst, false
		}
	}
	return insertBasin(append(dst, found), other), true
}

// refineLinear takes a minimum of the groups to one of all channels.
func (w *Work) refineLinear(p point, done float64) (basin, outcome) {
	f := w.e.fast
	if w.sighted {
		w.profileSight(p.t)
		w.expectedShared(w.startShared)
	}
	ε := math.Exp(p.level)
	θ1 := ε * p.t / f.half
	return w.refineFast(p.beta, ε-θ1*f.mid, θ1, done)
}

// outcome is how a refinement ended.
type outcome int

const (
	failed  outcome = iota
	outside         // of the temperature range
	converged
)

// refineFast takes a start to the minimum by Newton's or Gauss–Newton steps (Fisher scoring
// where the noise is relative) in β, level and slope, until about done·u is left of the way. It
// refuses where they don't converge, or where the minimum lies outside the range or the
// bounds of the emissivity.
func (w *Work) refineFast(β, θ0, θ1, done float64) (basin, outcome) {
	if w.sighted {
		return w.refineSight(β, θ0, θ1, done)
	}
	e := w.e
	before := 0.0
	for range fastSteps {
		if !(β > e.hottest && β < e.coldest) {
			return basin{}, outside
		}
		w.joint(β, θ0, θ1)
		newton := before > 0 && before < 1 && w.newtonSolve() // from afar it leaps too far
		if !newton && !w.jointSolve() {
			return basin{}, failed
		}
		step := w.jointStep
		cut := min(1, maxStep*β/math.Abs(step[0]))
		if !(cut > 0) {
			return basin{}, failed
		}
		β += cut * step[0]
		θ0 += cut * step[1]
		θ1 += cut * step[2]
		// Steps shrink by a constant factor, or faster: what is left is about the last
		// one times that factor.
		length := math.Sqrt(w.decrement)
		rate := length / before
		if w.newton == ([3]float64{}) {
			rate = max(rate, 0.1) // Gauss–Newton shrinks its steps less evenly
		}
		if left := length * min(1, rate); newton && cut == 1 && (length <= covDone || done != fastDone) && (left <= done || math.Abs(step[0]) <= 1e-13*β) {
			cov, bent, ok := w.expectedCov()
			if !ok || !e.within(θ0, θ1) {
				return basin{}, failed
			}
			return basin{beta: β, chi2: w.jointChi2() - w.decrement, fast: true, theta: [2]float64{θ0, θ1}, cov: cov, bent: bent}, converged
		}
		before = length
	}
	return basin{}, failed
}

// within reports whether the bounds of the emissivity are satisfied.
func (e *Estimator) within(θ0, θ1 float64) bool {
	for r := 0; r < len(e.limits); r += e.p {
		v := θ0
		if e.p == 2 {
			v += θ1 * e.limits[r+1]
		}
		if !(v > e.lower && v < e.upper) {
			return false
		}
	}
	return true
}
