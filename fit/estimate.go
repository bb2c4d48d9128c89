package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/pyro"
)

// Estimate estimates one reading, with its interval and its diagnosis, and suspects its
// unit where the level is one that no surface has (*UnitError). It allocates a Work and a
// Result; EstimateTo, IntervalTo and DiagnoseTo are the three steps without. An error alone means that the reading can't be used; a Result that knows no
// temperature is not an error but a state.
func (e *Estimator) Estimate(r Readings) (*Result, error) {
	w, res := e.NewWork(), e.NewResult()
	if err := e.EstimateTo(res, w, r); err != nil {
		return nil, err
	}
	if err := e.checkUnit(r); err != nil {
		return nil, err
	}
	if err := e.IntervalTo(res, w, r, e.assume.Probability); err != nil {
		return nil, err
	}
	if err := e.DiagnoseTo(res, w, r); err != nil {
		return nil, err
	}
	return res, nil
}

// EstimateTo finds the minima of χ²(T) and the covariance at the lowest, without
// allocating. dst holds no interval afterwards; its state is provisional until IntervalTo
// has run.
func (e *Estimator) EstimateTo(dst *Result, w *Work, r Readings) error {
	dst.reset(e)
	if err := w.load(r); err != nil {
		return err
	}
	copy(dst.signal, w.signal)
	for _, side := range w.censored {
		if side != 0 {
			dst.dof-- // a bound leaves nothing to test by
		}
	}
	if e.process != nil {
		return e.posteriorTo(dst, w)
	}
	ψ := dst.psi
	if t := e.assume.Temperature; t.Value > 0 && t.StdK == 0 {
		β := 1 / float64(t.Value)
		w.startTheta(β, ψ)
		chi2, _ := w.eliminate(β, ψ)
		dst.basins = append(dst.basins, basin{beta: β, chi2: chi2, atBound: len(w.active) > 0})
		dst.covariance(w, β, 1)
		return nil
	}
	if e.deficient != "" {
		w.scan()
		dst.chi2 = math.Inf(1)
		for _, g := range w.grid {
			dst.chi2 = min(dst.chi2, g.chi2)
		}
		return nil
	}
	var fast bool
	if dst.basins, fast = w.fastBasins(dst.basins); fast {
		dst.fromFast(w)
		return nil
	}
	dst.basins = w.findBasins(dst.basins)
	if len(dst.basins) == 0 {
		return fmt.Errorf("%w: χ² has no finite value between %v and %v: are the signals in W m⁻² sr⁻¹ m⁻¹?", ErrRange, e.assume.Range.Min, e.assume.Range.Max)
	}
	b := dst.basins[0]
	w.startTheta(b.beta, ψ)
	w.eliminate(b.beta, ψ)
	dst.chi2 = b.chi2
	if b.atEnd {
		return w.tooBright(b)
	}
	dst.covariance(w, b.beta, 0)
	return nil
}

// covariance fills cov at (β, psi) by an orthogonal factorisation: of everything (from 0),
// or of ψ alone (from 1). It refuses where a bound is active or a direction is not fixed.
func (dst *Result) covariance(w *Work, β float64, from int) {
	e := w.e
	size := e.size()
	dst.beta = β
	dst.chi2 = w.evaluate(β, dst.psi, true)
	dst.fitted = true
	if dst.basins[0].atBound {
		return
	}
	scale := e.loss[1] / (e.loss[0] * e.loss[0])
	if e.assume.Noise.unknown {
		if dst.dof <= 0 {
			return
		}
		scale *= dst.chi2 / float64(dst.dof)
	}
	w.weightedRows(β, from)
	w.solver.SetJacobian(w.rows)
	if w.solver.Covariance(dst.cov) != nil {
		return
	}
	for a := range size {
		held := a == 0 && from == 1 || a > 0 && a <= e.p && e.fixed[a-1]
		for b := range size {
			dst.cov[a*size+b] *= scale
			if held {
				dst.cov[a*size+b], dst.cov[b*size+a] = 0, 0
			}
		}
	}
	dst.hasCov = true
}

// weightedRows fills rows with the Jacobian of everything in units of σ: the readings at the
// last evaluation, what is known of T, θ and η, and a unit row for each unknown that is held.
func (w *Work) weightedRows(β float64, from int) {
	e := w.e
	size := e.size()
	clear(w.rows)
	next := 0
	row := func() []float64 {
		next += size
		return w.rows[next-size : next]
	}
	for j := range e.n {
		f := 1.0
		if e.whiten == nil {
			f = 1 / math.Sqrt(w.variance(j, w.model[j]))
			if w.censored[j] != 0 {
				_, _, weight := bounded(float64(w.censored[j]), w.signal[j]-w.model[j], 1/(f*f))
				f *= math.Sqrt(weight)
			}
		}
		for a, v := range w.jac[j*size : (j+1)*size] {
			row := w.rows[j*size:]
			row[a] = f * v
		}
	}
	next = e.n * size
	if t := e.assume.Temperature; t.StdK > 0 {
		row()[0] = -1 / (β * β * t.StdK)
	}
	for _, d := range e.data {
		r := row()
		for k, v := range d.row {
			r[1+k] = v * d.weight
		}
	}
	for k := range e.q {
		if !e.sight.free(k) {
			row()[1+e.p+k] = 1
		}
	}
	hold := func(a int) {
		for i := a; i < len(w.rows); i += size {
			w.rows[i] = 0
		}
		row()[a] = 1
	}
	if from == 1 {
		hold(0)
	}
	for k, fixed := range e.fixed {
		if fixed {
			hold(1 + k)
		}
	}
}

// rescan asks the scan for all basins, far ones too, and keeps the lowest as it is.
func (e *Estimator) rescan(dst *Result, w *Work) error {
	lowest := dst.basins[0]
	found := w.findBasins(dst.basins)
	if len(found) == 0 || math.Abs(found[0].beta-lowest.beta) > 1e-6*lowest.beta {
		return fmt.Errorf("%w: the scan and the fast path disagree on the lowest minimum", ErrRange)
	}
	dst.basins = found
	dst.basins[0] = lowest
	return nil
}

// fromFast takes the lowest basin and its covariance over from the fast path.
func (dst *Result) fromFast(w *Work) {
	e := w.e
	size := e.size()
	b := &dst.basins[0]
	dst.beta, dst.chi2, dst.fitted = b.beta, b.chi2, true
	copy(dst.psi, b.theta[:e.p])
	if w.sighted {
		copy(dst.psi, w.kept[b.slot].psi)
	}
	scale := 1.0
	if e.assume.Noise.unknown {
		if dst.dof <= 0 {
			return
		}
		scale = dst.chi2 / float64(dst.dof)
	}
	if w.sighted {
		for i, v := range w.kept[b.slot].cov {
			dst.cov[i] = scale * v
		}
		dst.hasCov = true
		return
	}
	c := b.cov
	full := [9]float64{c[0], c[1], c[2], c[1], c[3], c[4], c[2], c[4], c[5]}
	for a := range size {
		for b := range size {
			dst.cov[a*size+b] = scale * full[3*a+b]
		}
	}
	dst.hasCov = true
}

// quantile returns the half-width of a p-interval in standard uncertainties, and the
// factor on χ²'s units.
func (dst *Result) quantile(p float64) (q, scale float64, ok bool) {
	e := dst.e
	q = distuv.UnitNormal.Quantile((1 + p) / 2)
	scale = e.loss[1] / e.loss[0]
	if e.assume.Noise.unknown {
		if dst.dof <= 0 {
			return 0, 0, false
		}
		q = distuv.StudentsT{Mu: 0, Sigma: 1, Nu: float64(dst.dof)}.Quantile((1 + p) / 2)
		scale *= dst.chi2 / float64(dst.dof)
	}
	return q, scale, true
}

// IntervalTo finds the profile interval of probability p around the result of EstimateTo
// for the same reading: where χ²(T) exceeds its minimum by the square of the normal (or
// Student's) quantile. It does not allocate.
func (e *Estimator) IntervalTo(dst *Result, w *Work, r Readings, p float64) error {
	if !(p > 0 && p < 1) {
		return fmt.Errorf("%w: probability %g is not between 0 and 1", ErrAssume, p)
	}
	if err := w.load(r); err != nil {
		return err
	}
	if e.process != nil {
		dst.posteriorInterval(p)
		return nil
	}
	dst.probability = p
	if t := e.assume.Temperature; t.Value > 0 && t.StdK == 0 {
		dst.hot, dst.cold = end{dst.beta, false}, end{dst.beta, false}
		dst.hasInterval = true
		return nil
	}
	q, scale, ok := dst.quantile(p)
	if !ok {
		dst.hot, dst.cold = end{e.hottest, true}, end{e.coldest, true}
		dst.hasInterval = true
		return nil
	}
	if q*q > fastLimit && len(dst.basins) > 0 && dst.basins[0].fast {
		if err := e.rescan(dst, w); err != nil {
			return err
		}
	}
	limit := dst.chi2 + q*q*scale
	dst.limit = limit
	dst.hot, dst.cold = end{math.Inf(1), false}, end{math.Inf(-1), false}
	if e.deficient != "" {
		w.scan()
		w.extendFromGrid(dst, limit)
	} else {
		for _, b := range dst.basins {
			if b.chi2 > limit {
				continue
			}
			h := 0.01 * b.beta
			if dst.hasCov {
				h = min(h, q*math.Sqrt(dst.cov[0]))
			}
			dst.extend(w, b.beta, limit, h)
		}
		dst.checkEnds(w, limit)
	}
	dst.hasInterval = true
	return nil
}

// end is one end of an interval in β; open where the range cuts it off.
type end struct {
	beta float64
	open bool
}

// extend widens the interval to the crossings on both sides of β.
func (dst *Result) extend(w *Work, β, limit, h float64) {
	if c := w.crossing(β, limit, -h); c.beta < dst.hot.beta || c.open {
		dst.hot = c
	}
	if c := w.crossing(β, limit, h); c.beta > dst.cold.beta || c.open {
		dst.cold = c
	}
}

// checkEnds opens an end of the interval where χ² at the end of the range is below the
// limit although no basin led there.
func (dst *Result) checkEnds(w *Work, limit float64) {
	e := w.e
	if !dst.hot.open && w.at(e.hottest) <= limit {
		dst.hot = end{e.hottest, true}
	}
	if !dst.cold.open && w.at(e.coldest) <= limit {
		dst.cold = end{e.coldest, true}
	}
}

func (w *Work) extendFromGrid(dst *Result, limit float64) {
	last := len(w.grid) - 1
	first, final := -1, -1
	for i, g := range w.grid {
		if g.chi2 <= limit {
			if first < 0 {
				first = i
			}
			final = i
		}
	}
	if first < 0 {
		return
	}
	dst.hot, dst.cold = end{w.grid[0].beta, true}, end{w.grid[last].beta, true}
	from, to := w.grid[first].beta, w.grid[final].beta
	if first > 0 {
		dst.hot = end{w.root(from, w.grid[first-1].beta, limit), false}
	}
	if final < last {
		dst.cold = end{w.root(to, w.grid[final+1].beta, limit), false}
	}
}

// at returns χ² of the curve at 1/T = β.
func (w *Work) at(β float64) float64 {
	if w.e.fast != nil && !w.sighted && w.e.linear() {
		if chi2, ok := w.linearAt(β); ok {
			return chi2
		}
	}
	ψ := w.psi[:w.e.p+w.e.q]
	w.startTheta(β, ψ)
	chi2, _ := w.eliminate(β, ψ)
	return chi2
}

// crossing walks from β in steps that grow until χ² exceeds the limit, then finds where.
func (w *Work) crossing(β, limit, h float64) end {
	e := w.e
	inside := β
	for {
		next := inside + h
		if next <= e.hottest || next >= e.coldest {
			next = e.hottest
			if h > 0 {
				next = e.coldest
			}
			if inside == next || w.at(next) <= limit {
				return end{next, true}
			}
			return end{w.root(inside, next, limit), false}
		}
		if w.at(next) > limit {
			return end{w.root(inside, next, limit), false}
		}
		inside = next
		h *= 1.6
	}
}

// root finds χ² = limit between inside (below) and outside (above) by regula falsi
// (Illinois) to 1e-10 of β.
func (w *Work) root(inside, outside, limit float64) float64 {
	a, b := inside, outside
	fa, fb := w.at(a)-limit, w.at(b)-limit
	side := 0
	for range 80 {
		x := (a*fb - b*fa) / (fb - fa)
		if !(x > math.Min(a, b) && x < math.Max(a, b)) || math.IsInf(fb, 1) {
			x = (a + b) / 2
		}
		f := w.at(x) - limit
		if math.Abs(f) <= 1e-9 || math.Abs(b-a) <= 1e-12*math.Abs(x) {
			return x
		}
		if f < 0 {
			a, fa = x, f
			if side < 0 {
				fb /= 2
			}
			side = -1
		} else {
			b, fb = x, f
			if side > 0 {
				fa /= 2
			}
			side = 1
		}
	}
	return (a + b) / 2
}

// Curve returns χ² of a reading at each temperature with everything else eliminated, and
// the logarithm of the determinant of the information on what was eliminated.
func (e *Estimator) Curve(r Readings, t []pyro.Temperature) (chi2, logDet []float64, err error) {
	if e.process != nil {
		return nil, nil, fmt.Errorf("%w: %v has a posterior, no curve of χ²: see Result.Posterior", ErrAssume, e.process.surface)
	}
	w := e.NewWork()
	if err := w.load(r); err != nil {
		return nil, nil, err
	}
	chi2, logDet = make([]float64, len(t)), make([]float64, len(t))
	size := e.size()
	for i, T := range t {
		if !(T >= e.assume.Range.Min && T <= e.assume.Range.Max) {
			return nil, nil, fmt.Errorf("%w: temperature %d, %v, is outside %v to %v", ErrRange, i, T, e.assume.Range.Min, e.assume.Range.Max)
		}
		ψ := w.psi[:e.p+e.q]
		w.startTheta(1/float64(T), ψ)
		chi2[i], _ = w.eliminate(1/float64(T), ψ)
		logDet[i] = math.NaN()
		if w.factor(1, size) {
			logDet[i] = 0
			for k := range size - 1 {
				logDet[i] += 2 * (math.Log(w.chol[k*size+k]) - math.Log(w.rowRoom[k]))
			}
		}
	}
	return chi2, logDet, nil
}
