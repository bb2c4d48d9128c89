package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"candent/pyro"
)

// Discrepancy is what a surface that the readings contradict misses, carried as a random part of
// the readings instead of being scaled away: a smooth relative misfit δ with
//
//	cov(s) = V + δ² (m mᵀ ∘ Matérn₅⸝₂(ln(λ/µ)/0.5))
//
// m the model, V the noise. δ maximises the marginal likelihood, T, the parameters and the shared
// inputs integrated out, at the estimate that it leads to (Gauss–Newton steps, no bounds held).
// The readings are then estimated again with that covariance, all basins and bounds as ever: the
// interval is a profile, with Student's quantile for the degrees of freedom that the curvature of
// the likelihood gives δ, in proportion to δ's part in u²(1/T) (Welch and Satterthwaite's formula,
// JCGM 100:2008, G.4.1).
//
// A length of 0.5 in ln λ is judgement: half an octave and more of the spectrum errs alike. What
// of the misfit is like a change of T can't be seen in the residuals, and is inferred from the
// rest of it being of that size and smoothness. So the interval is honest for misfits that are
// no smoother than that, on average over such surfaces, and no more.
type Discrepancy struct {
	Std         float64 // δ, relative: 0.03 is 3 % of the model
	Temperature pyro.Temperature
	StdK        float64  // 0 where several basins or a bound leave none
	Interval    Interval // at the result's probability
}

const (
	discrepancyLength = 0.5

	leastDiscrepancy, mostDiscrepancy = 1e-5, 1.0
	discrepancySteps                  = 40
)

// Discrepancy returns the smooth misfit of a family or model that the readings contradict. ok is
// false before DiagnoseTo, where they don't contradict it, where no smooth misfit explains them
// (χ² with it is still too large: lines, outliers) or noise larger than stated would be likelier,
// where it leaves the temperature range, and for processes, which have room for a misfit of their own; a note says
// which.
func (r *Result) Discrepancy() (d Discrepancy, ok bool) {
	if r.discrepancy == nil {
		return d, false
	}
	return *r.discrepancy, true
}

// carryDiscrepancy finds the discrepancy of a contradicted result and notes it.
func (r *Result) carryDiscrepancy(w *Work, readings Readings) {
	e := r.e
	if t := e.assume.Temperature; t.Value > 0 && t.StdK == 0 || r.basins[0].atEnd {
		return
	}
	g := newMisfit(w)
	if g == nil {
		return
	}
	s, why := g.solve(r)
	if why != "" {
		r.note("no smooth misfit is carried: %s", why)
		return
	}
	d, err := g.estimateAgain(r, readings, s)
	if err != nil {
		r.note("no smooth misfit is carried: %v", err)
		return
	}
	r.discrepancy = d
	r.note("with a smooth misfit of %.2g %% carried as uncertainty: %s", 100*d.Std, d.words())
}

// words gives the temperature with its interval.
func (d *Discrepancy) words() string {
	iv := d.Interval
	n := decimals(float64(iv.High - iv.Low))
	lo, hi := fmt.Sprintf("%.*f", n, float64(iv.Low)), fmt.Sprintf("%.*f", n, float64(iv.High))
	if iv.LowOpen {
		lo = "open"
	}
	if iv.HighOpen {
		hi = "open"
	}
	if iv.LowOpen && iv.HighOpen {
		return "the temperature is left open"
	}
	if d.StdK == 0 {
		return fmt.Sprintf("%s to %s K (%.4g %%)", lo, hi, 100*iv.Probability)
	}
	v, u := WithUncertainty(float64(d.Temperature), d.StdK)
	return fmt.Sprintf("%s K ± %s K (%.4g %%: %s to %s K)", v, u, 100*iv.Probability, lo, hi)
}

// misfit is the linear problem at one (β, ψ): relative residuals z, their derivatives X, both in
// the coordinates in which the noise is 1 and the misfit's covariance diagonal.
type misfit struct {
	w     *Work
	white bool // the misfit is independent in each channel
	β     float64
	ψ     []float64
	size  int
	z     []float64
	x     []float64 // n×size
	scale []float64 // the misfit's variance for δ = 1
	noise float64   // ln det of the noise
	prior *mat.SymDense
	grad  []float64
	cost  float64 // of the priors
}

// newMisfit returns nil where a reading is only a bound.
func newMisfit(w *Work) *misfit {
	e := w.e
	for _, side := range w.censored {
		if side != 0 {
			return nil
		}
	}
	size := e.size()
	f := func(n int) []float64 { return make([]float64, n) }
	return &misfit{w: w, size: size, ψ: f(e.p + e.q), z: f(e.n), x: f(e.n * size), scale: f(e.n), prior: mat.NewSymDense(size, nil), grad: f(size)}
}

// alike is the correlation of the smooth misfit between channels j and k.
func (e *Estimator) alike(j, k int) float64 {
	return matern(math.Log(float64(e.sight.channel[j].centre/e.sight.channel[k].centre)) / discrepancyLength)
}

// at lays the problem at (β, ψ); false where it has no finite model.
func (g *misfit) at() bool {
	w, e := g.w, g.w.e
	n, size := e.n, g.size
	w.evaluate(g.β, g.ψ, true)
	jac := mat.NewDense(n, size, append([]float64(nil), w.jac[:n*size]...))
	noise := mat.NewSymDense(n, nil)
	for j := range n {
		if m := w.model[j]; !(m > 0) || math.IsInf(m, 0) {
			return false
		}
	}
	if e.whiten != nil { // jac is that of L⁻¹m
		var raw mat.Dense
		raw.Mul(e.whiten, jac)
		jac = &raw
		var cov mat.Dense
		cov.Mul(e.whiten, e.whiten.T())
		for j := range n {
			for k := range j + 1 {
				noise.SetSym(j, k, cov.At(j, k)/(w.model[j]*w.model[k]))
			}
		}
	} else {
		for j, m := range w.model {
			noise.SetSym(j, j, w.variance(j, m)/(m*m))
		}
	}
	all, kernel := mat.NewDense(n, 1+size, nil), mat.NewDense(n, n, nil)
	for j, m := range w.model {
		all.Set(j, 0, (w.signal[j]-m)/m)
		for a := range size {
			if a > 0 && a <= e.p && e.fixed[a-1] {
				continue
			}
			all.Set(j, 1+a, jac.At(j, a)/m)
		}
		for k := range n {
			switch {
			case !g.white:
				kernel.Set(j, k, e.alike(j, k))
			case j == k:
				kernel.Set(j, k, 1)
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(noise) {
		return false
	}
	g.noise = chol.LogDet()
	var lower mat.TriDense
	chol.LTo(&lower)
	var half, white, whole mat.Dense
	if half.Solve(&lower, kernel) != nil || white.Solve(&lower, half.T()) != nil || whole.Solve(&lower, all) != nil {
		return false
	}
	sym := mat.NewSymDense(n, nil)
	for j := range n {
		for k := range j + 1 {
			sym.SetSym(j, k, (white.At(j, k)+white.At(k, j))/2)
		}
	}
	var eigen mat.EigenSym
	if !eigen.Factorize(sym, true) {
		return false
	}
	eigen.Values(g.scale)
	var vectors, turned mat.Dense
	eigen.VectorsTo(&vectors)
	turned.Mul(vectors.T(), &whole)
	for j := range n {
		g.scale[j] = max(g.scale[j], 0)
		g.z[j] = turned.At(j, 0)
		for a := range size {
			g.x[j*size+a] = turned.At(j, 1+a)
		}
	}
	clear(w.grad)
	clear(w.hess)
	w.chi2 = 0
	w.addPriors(g.β, g.ψ)
	g.cost = w.chi2
	for a := range size {
		g.grad[a] = w.grad[a]
		for b := range a + 1 {
			g.prior.SetSym(a, b, w.hess[a*size+b])
		}
	}
	return true
}

// given is the solution for one δ.
type given struct {
	δ    float64
	log  float64 // marginal likelihood, but for a constant
	chi2 float64
	step *mat.VecDense
	cov  *mat.SymDense
}

func (g *misfit) given(δ float64) (s given, ok bool) {
	size := g.size
	s.δ = δ
	info, right := mat.NewSymDense(size, nil), mat.NewVecDense(size, append([]float64(nil), g.grad...))
	info.CopySym(g.prior)
	s.chi2 = g.cost
	logDet := g.noise
	for j, z := range g.z {
		v := 1 + δ*δ*g.scale[j]
		logDet += math.Log(v)
		s.chi2 += z * z / v
		row := g.x[j*size : (j+1)*size]
		for a, f := range row {
			right.SetVec(a, right.AtVec(a)+f*z/v)
			for b := range a + 1 {
				info.SetSym(a, b, info.At(a, b)+f*row[b]/v)
			}
		}
	}
	// β counts in 1/K: the columns are scaled before the factorisation.
	d := make([]float64, size)
	for a := range d {
		if d[a] = 1 / math.Sqrt(info.At(a, a)); math.IsInf(d[a], 0) || math.IsNaN(d[a]) {
			return s, false
		}
	}
	for a := range size {
		right.SetVec(a, right.AtVec(a)*d[a])
		for b := range a + 1 {
			info.SetSym(a, b, info.At(a, b)*d[a]*d[b])
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(info) {
		return s, false
	}
	s.step, s.cov = mat.NewVecDense(size, nil), mat.NewSymDense(size, nil)
	if chol.SolveVecTo(s.step, right) != nil || chol.InverseTo(s.cov) != nil {
		return s, false
	}
	s.chi2 -= mat.Dot(s.step, right)
	logDet += chol.LogDet()
	for a := range size {
		logDet -= 2 * math.Log(d[a])
		s.step.SetVec(a, s.step.AtVec(a)*d[a])
		for b := range a + 1 {
			s.cov.SetSym(a, b, s.cov.At(a, b)*d[a]*d[b])
		}
	}
	s.log = -(s.chi2 + logDet) / 2
	return s, true
}

// likeliest returns δ: the best of a grid, then golden sections.
func (g *misfit) likeliest() float64 {
	value := func(l float64) float64 {
		s, ok := g.given(math.Exp(l))
		if !ok {
			return math.Inf(-1)
		}
		return s.log
	}
	lo, hi := math.Log(leastDiscrepancy), math.Log(mostDiscrepancy)
	best, at := math.Inf(-1), lo
	const grid = 24
	h := (hi - lo) / grid
	for i := range grid + 1 {
		if v := value(lo + h*float64(i)); v > best {
			best, at = v, lo+h*float64(i)
		}
	}
	a, b := max(at-h, lo), min(at+h, hi)
	golden := (math.Sqrt(5) - 1) / 2
	c, d := b-golden*(b-a), a+golden*(b-a)
	fc, fd := value(c), value(d)
	for range 25 {
		if fc > fd {
			b, d, fd = d, c, fc
			c = b - golden*(b-a)
			fc = value(c)
		} else {
			a, c, fc = c, d, fd
			d = a + golden*(b-a)
			fd = value(d)
		}
	}
	return math.Exp((a + b) / 2)
}

// solve iterates from the result's estimate; why says what failed.
func (g *misfit) solve(r *Result) (s given, why string) {
	e := g.w.e
	g.β = r.beta
	copy(g.ψ, r.psi)
	for range discrepancySteps {
		if !g.at() {
			return s, "the model is not positive near the estimate"
		}
		var ok bool
		if s, ok = g.given(g.likeliest()); !ok {
			return s, "it leaves a direction of the parameters unfixed"
		}
		step := s.step.AtVec(0)
		if math.Abs(step) <= 1e-3*math.Sqrt(s.cov.At(0, 0)) {
			if (distuv.ChiSquared{K: float64(r.dof)}).Survival(s.chi2) < lackOfFit {
				return s, "none explains the readings: are there lines, outliers, or noise larger than stated?"
			}
			if g.whiteIsLikelier(s) {
				return s, "noise larger than stated explains the readings better"
			}
			return s, ""
		}
		f := min(1, 0.1*g.β/math.Abs(step))
		g.β += f * step
		for k := range g.ψ {
			g.ψ[k] += f * s.step.AtVec(1+k)
		}
		switch {
		case !(g.β > e.hottest && g.β < e.coldest):
			return s, "the estimate with it leaves the temperature range"
		case e.model != nil && e.outside(g.ψ):
			return s, "the estimate with it leaves the bounds of the parameters"
		}
	}
	return s, "the estimate with it does not settle"
}

// whiteIsLikelier reports whether a misfit that is independent in each channel explains the
// readings better than the smooth one; it leaves the problem as it was.
func (g *misfit) whiteIsLikelier(smooth given) bool {
	g.white = true
	likelier := false
	if g.at() {
		s, ok := g.given(g.likeliest())
		likelier = ok && s.log > smooth.log
	}
	g.white = false
	return !g.at() || likelier
}

// outside reports whether ψ violates a bound.
func (e *Estimator) outside(ψ []float64) bool {
	for i := 0; i < len(e.limits); i += e.p {
		v := 0.0
		for k, f := range e.limits[i : i+e.p] {
			v += f * ψ[k]
		}
		if v < e.lower || v > e.upper {
			return true
		}
	}
	return false
}

// estimateAgain estimates the readings with the misfit in their covariance.
func (g *misfit) estimateAgain(r *Result, readings Readings, s given) (*Discrepancy, error) {
	w, e := g.w, g.w.e
	a := e.assume
	if e.model == nil {
		a.Emissivity = e.family
	}
	count := len(e.bands)
	cov := make([]float64, count*count)
	for i := range count {
		cov[i*(count+1)] = 1 // of a masked channel, not used
	}
	for j, i := range e.used {
		for k, l := range e.used {
			v := s.δ * s.δ * w.model[j] * w.model[k] * e.alike(j, k)
			switch {
			case e.whiten != nil:
				v += e.assume.Noise.cov[i*count+l]
			case j == k:
				v += w.variance(j, w.model[j])
			}
			cov[i*count+l] = v
		}
	}
	a.Noise = Covariance(cov)
	again, err := New(e.bands, a)
	if err != nil {
		return nil, err
	}
	readings.Std = nil
	aw, res := again.NewWork(), again.NewResult()
	if err := again.EstimateTo(res, aw, readings); err != nil {
		return nil, err
	}
	p := r.probability
	if p == 0 {
		p = e.assume.Probability
	}
	q := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: g.freedom(s)}.Quantile((1 + p) / 2)
	if err := again.IntervalTo(res, aw, readings, min(2*distuv.UnitNormal.CDF(q)-1, 1-1e-12)); err != nil {
		return nil, err
	}
	d := &Discrepancy{Std: s.δ}
	if len(res.basins) > 0 {
		d.Temperature = pyro.Temperature(1 / res.basins[0].beta)
	}
	d.StdK, _ = res.Uncertainty()
	d.Interval, _ = res.Interval()
	d.Interval.Probability = p
	return d, nil
}

// freedom returns the degrees of freedom of u(1/T): those of δ, ν = 1/(2 u²(ln δ)) and 1 at
// least, over the square of δ's part in u².
func (g *misfit) freedom(s given) float64 {
	const h = 0.05
	below, okBelow := g.given(s.δ * math.Exp(-h))
	above, okAbove := g.given(s.δ * math.Exp(h))
	plain, okPlain := g.given(0)
	if !okBelow || !okAbove || !okPlain {
		return 1
	}
	ν := max(1, (2*s.log-below.log-above.log)/(2*h*h))
	part := 1 - plain.cov.At(0, 0)/s.cov.At(0, 0)
	return ν / max(part*part, 1e-6)
}
