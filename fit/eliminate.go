package fit

import (
	"math"

	"candent/emissivity"
	"candent/fit/internal/elementary"
)

// eliminateSteps bounds the Gauss–Newton steps at one temperature.
const eliminateSteps = 40

// roughSteps bounds them in a scan: far from any minimum the residuals are so large that
// Gauss–Newton steps contract slowly, and there only the sign of the slope is asked.
const roughSteps = 8

// halvings bounds the line search of a step.
const halvings = 12

// roughGain is the relative decrease of χ² below which a scan goes on to its next temperature.
const roughGain = 1e-10

// eliminate minimises χ² over ψ at 1/T = β, from the ψ given, under the bounds of the
// emissivity. It returns χ² and its slope dχ²/dβ along the curve, which by the envelope
// theorem is the partial one. One step is exact where ψ enters linearly.
func (w *Work) eliminate(β float64, ψ []float64) (chi2, slope float64) {
	e := w.e
	n := len(ψ)
	chi2 = w.evaluate(β, ψ, false)
	if !(chi2 < math.Inf(1)) {
		return math.Inf(1), 0
	}
	steps := eliminateSteps
	if w.rough {
		steps = roughSteps
	}
	for range steps {
		if !w.conditionalStep(ψ) {
			break
		}
		size := e.size()
		gain := 0.0 // decrease of χ² that the quadratic model predicts
		for a := range n {
			v := 0.0
			for b := range n {
				v += w.hess[(1+a)*size+1+b] * w.step[b]
			}
			gain += w.step[a] * (2*w.grad[1+a] - v)
		}
		if w.rough && gain <= roughGain*(1+chi2) || gain <= 1e-18*(1+chi2) && w.settled(ψ, n) {
			break
		}
		before := chi2
		f := 1.0
		for try := 0; ; try++ {
			for a := range n {
				w.trial[a] = ψ[a] + f*w.step[a]
			}
			chi2 = w.evaluate(β, w.trial[:n], false)
			if chi2 <= before*(1+1e-13)+1e-300 || try == halvings {
				break
			}
			f /= 2
		}
		if !(chi2 <= before*(1+1e-13)+1e-300) { // rounding has the last word
			chi2 = w.evaluate(β, ψ, false)
			break
		}
		copy(ψ, w.trial[:n])
		if e.linear() && f == 1 {
			break
		}
	}
	return chi2, -2 * w.grad[0]
}

// settled reports whether the step is below rounding of ψ.
func (w *Work) settled(ψ []float64, n int) bool {
	for a := range n {
		if math.Abs(w.step[a]) > 1e-15*math.Abs(ψ[a])+1e-300 {
			return w.chi2 > 1e-12 // a perfect fit is followed to the last digit
		}
	}
	return true
}

// linear reports whether ψ enters the residuals linearly, so that one step is exact.
func (e *Estimator) linear() bool {
	return e.link == emissivity.Identity && e.q == 0 && !e.bent && e.assume.Loss.kind == square &&
		(e.assume.Noise.kind != modelled || e.assume.Noise.rel == 0)
}

// conditionalStep solves for the step of ψ at fixed β under the bounds: the quadratic
// programme min ½δᵀHδ − gᵀδ with lower ≤ φᵀ(θ + δ) ≤ upper, by an active set: solve,
// add the worst violated bound, drop one whose multiplier has the wrong sign.
func (w *Work) conditionalStep(ψ []float64) bool {
	e := w.e
	if !w.factor(1, e.size()) {
		w.ridge(e.size()) // a direction of ψ that nothing fixes stays where it is
		if !w.factor(1, e.size()) {
			return false
		}
	}
	w.active, w.activeLow = w.active[:0], w.activeLow[:0]
	for range 20 {
		w.constrained(ψ)
		if k := w.wrongSign(); k >= 0 {
			last := len(w.active) - 1
			w.active[k], w.activeLow[k] = w.active[last], w.activeLow[last]
			w.active, w.activeLow = w.active[:last], w.activeLow[:last]
			continue
		}
		row, low := w.worstViolation(ψ)
		if row < 0 || len(w.active) == e.p {
			break
		}
		w.active, w.activeLow = append(w.active, row), append(w.activeLow, low)
	}
	return true
}

// factor writes the Cholesky factor of hess[from:, from:], scaled to a unit diagonal, to
// chol; step and invRow are then solved with it. It fails where H is singular.
func (w *Work) factor(from, size int) bool {
	n := size - from
	for a := range n {
		d := w.hess[(from+a)*size+from+a]
		if !(d > 0) || math.IsInf(d, 1) {
			return false
		}
		w.rowRoom[a] = 1 / math.Sqrt(d)
	}
	for a := range n {
		for b := range a + 1 {
			v := w.hess[(from+a)*size+from+b] * w.rowRoom[a] * w.rowRoom[b]
			for k := range b {
				v -= w.chol[a*size+k] * w.chol[b*size+k]
			}
			if a > b {
				w.chol[a*size+b] = v / w.chol[b*size+b]
				continue
			}
			if !(v > pivotFloor) {
				return false
			}
			w.chol[a*size+a] = math.Sqrt(v)
		}
	}
	return true
}

// pivotFloor is the pivot of the scaled normal matrix below which a direction counts as
// not fixed: 1e-14 is a hundred roundings.
const pivotFloor = 1e-14

// backSolve solves H x = x in place with the last factor.
func (w *Work) backSolve(x []float64, size int) {
	n := len(x)
	for a := range n {
		v := x[a] * w.rowRoom[a]
		for k := range a {
			v -= w.chol[a*size+k] * x[k]
		}
		x[a] = v / w.chol[a*size+a]
	}
	for a := n - 1; a >= 0; a-- {
		v := x[a]
		for k := a + 1; k < n; k++ {
			v -= w.chol[k*size+a] * x[k]
		}
		x[a] = v / w.chol[a*size+a]
	}
	for a := range x {
		x[a] *= w.rowRoom[a]
	}
}

// constrained solves for the step with the active bounds held as equalities:
// δ = H⁻¹(g − Aᵀμ), (A H⁻¹ Aᵀ) μ = A(ψ + H⁻¹g) − b.
func (w *Work) constrained(ψ []float64) {
	e := w.e
	n, size, m := len(ψ), e.size(), len(w.active)
	step := w.step[:n]
	copy(step, w.grad[1:1+n])
	w.backSolve(step, size)
	if m == 0 {
		return
	}
	for i, r := range w.active {
		row := e.limits[r*e.p : (r+1)*e.p]
		x := w.invRow[i*size : i*size+n]
		clear(x)
		copy(x, row)
		w.backSolve(x, size)
		bound := e.upper
		if w.activeLow[i] {
			bound = e.lower
		}
		v := -bound
		for k, f := range row {
			v += f * (ψ[k] + step[k])
		}
		w.multiply[i] = v
		for j := range i + 1 {
			other := e.limits[w.active[j]*e.p : (w.active[j]+1)*e.p]
			s := 0.0
			for k, f := range other {
				s += f * x[k]
			}
			w.schur[i*m+j], w.schur[j*m+i] = s, s
		}
	}
	solveSmall(w.schur[:m*m], w.multiply[:m])
	for i := range m {
		for k := range n {
			step[k] -= w.multiply[i] * w.invRow[i*size+k]
		}
	}
}

// wrongSign returns an active bound that holds the step back from where it wants to go
// inside, or −1.
func (w *Work) wrongSign() int {
	worst, at := -1e-12, -1
	for i := range w.active {
		μ := w.multiply[i]
		if w.activeLow[i] {
			μ = -μ
		}
		if μ < worst {
			worst, at = μ, i
		}
	}
	return at
}

// worstViolation returns the bound that ψ + step violates most, or −1.
func (w *Work) worstViolation(ψ []float64) (row int, low bool) {
	e := w.e
	row = -1
	scale := 1.0
	if e.lower == 0 && math.IsInf(e.upper, 1) { // amplitudes have the size of the reading
		scale = math.Abs(ψ[0] + w.step[0])
	}
	worst := 1e-12 * scale
	for r := 0; r*e.p < len(e.limits); r++ {
		v := 0.0
		for k, f := range e.limits[r*e.p : (r+1)*e.p] {
			v += f * (ψ[k] + w.step[k])
		}
		if e.lower-v > worst {
			worst, row, low = e.lower-v, r, true
		}
		if v-e.upper > worst {
			worst, row, low = v-e.upper, r, false
		}
	}
	return row, low
}

// solveSmall solves A x = x in place by Gaussian elimination with pivoting; a vanishing
// pivot gives 0 for its unknown.
func solveSmall(a, x []float64) {
	m := len(x)
	for k := range m {
		p := k
		for i := k + 1; i < m; i++ {
			if math.Abs(a[i*m+k]) > math.Abs(a[p*m+k]) {
				p = i
			}
		}
		for j := range m {
			a[k*m+j], a[p*m+j] = a[p*m+j], a[k*m+j]
		}
		x[k], x[p] = x[p], x[k]
		for i := k + 1; i < m && a[k*m+k] != 0; i++ {
			f := a[i*m+k] / a[k*m+k]
			for j := k; j < m; j++ {
				a[i*m+j] -= f * a[k*m+j]
			}
			x[i] -= f * x[k]
		}
	}
	for k := m - 1; k >= 0; k-- {
		v := x[k]
		for j := k + 1; j < m; j++ {
			v -= a[k*m+j] * x[j]
		}
		x[k] = 0
		if a[k*m+k] != 0 {
			x[k] = v / a[k*m+k]
		}
	}
}

// startTheta writes parameters to start from at 1/T = β: where ln ε is the polynomial,
// its weighted least-squares fit to ln(s/S); else a small level, since one step is all
// a linear family needs.
func (w *Work) startTheta(β float64, ψ []float64) {
	e := w.e
	if e.model != nil {
		w.startModel(β, ψ)
		return
	}
	w.blackbody(β)
	clear(ψ)
	if e.link == emissivity.Identity {
		for k, fixed := range e.fixed {
			if fixed {
				ψ[k] = e.value[k]
			}
		}
		sum, count := 0.0, 0.0
		for j := range w.signal {
			if E, _, ok := w.surface(j); ok {
				sum += math.Min(E, 1e300)
				count++
			}
		}
		if !e.fixed[0] && count > 0 {
			ψ[0] = sum / count
			if e.upper == 1 {
				ψ[0] = min(ψ[0], 0.5)
			}
		}
		return
	}
	size := e.size()
	clear(w.hess)
	clear(w.grad)
	if !w.haveLog && !w.sighted {
		elementary.LogTo(w.log, w.signal)
		w.haveLog = true
	}
	for j, y := range w.log {
		E, s, ok := w.surface(j)
		if !ok {
			continue
		}
		if w.sighted {
			y = math.Log(E)
		} else {
			y -= math.Log(w.black[j])
		}
		variance := w.variance(j, w.signal[j])
		if e.whiten != nil {
			variance = e.assume.Noise.cov[e.used[j]*(len(e.bands)+1)]
		}
		weight := s * s / variance
		d := e.coord[j]
		fa := 1.0
		for a := range e.p {
			w.grad[1+a] += weight * fa * y
			fb := 1.0
			for b := range e.p {
				w.hess[(1+a)*size+1+b] += weight * fa * fb
				fb *= d
			}
			fa *= d
		}
	}
	for a := range e.q {
		w.hess[(1+e.p+a)*size+1+e.p+a] = 1
	}
	for k, fixed := range e.fixed { // move what is fixed to the right-hand side
		if !fixed {
			continue
		}
		for a := range e.p {
			w.grad[1+a] -= w.hess[(1+a)*size+1+k] * e.value[k]
			w.hess[(1+a)*size+1+k], w.hess[(1+k)*size+1+a] = 0, 0
		}
		w.hess[(1+k)*size+1+k], w.grad[1+k] = 1, e.value[k]
	}
	w.ridge(size)
	if w.conditionalStep(ψ) { // from ψ = 0, under the bounds
		for a := range ψ {
			ψ[a] += w.step[a]
		}
	}
}

// ridge makes the normal matrix of ψ regular where channels are too few for it.
func (w *Work) ridge(size int) {
	largest := 0.0
	for a := 1; a < size; a++ {
		largest = max(largest, w.hess[a*size+a])
	}
	for a := 1; a < size; a++ {
		w.hess[a*size+a] = w.hess[a*size+a]*(1+1e-9) + 1e-12*largest
	}
}
