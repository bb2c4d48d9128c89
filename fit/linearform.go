package fit

import (
	"fmt"
	"math"
)

// The linear form: where a reading has too little of the surface for its logarithm to be taken
// for Gaussian (weak, zero, negative and censored readings; walls as bright as the load), the
// readings are Gaussian as they stand, m_j(g, η) with g = ln ε the curve and η what is shared,
//
//	g = µ + Φz,  z ~ N(0, A),  η ~ N(0, 1),  s_j ~ N(m_j, V_j(m_j) + (∂m_j/∂g)²·d_j)
//
// d the diagonal beside Φ. At each 1/T the evidence of each component is Laplace's: at the
// most likely (z, η), found by Gauss–Newton steps from the neighbour's,
//
//	ln p_c(β) = ln share − ½ ln det A − ½ ln det H − ½ Σ ((s − m)²/V + ln V) − ½(zᵀA⁻¹z + ηᵀη)
//
// with H the expected curvature. It is exact where m is linear in g over the posterior's
// width: for readings of 20 standard uncertainties both forms agree to the bound that
// TestLinearFormEqualsTheLogarithmic states.

const (
	linearGrid  = 64   // points in ln T over the range to begin with
	linearFar   = 25.0 // ln of the density below the greatest that is let go
	linearSteps = 30   // of Gauss–Newton at one β
	linearWrong = 2e-4 // of the whole, that one interval may be off
	linearMost  = 400  // intervals
)

// linearWork is the scratch of the linear form.
type linearWork struct {
	on       bool
	x        [][]float64 // (z, η) of each component at the last β
	trial    []float64
	grad     []float64
	hess     []float64
	step     []float64
	model    []float64
	slope    []float64 // ∂m/∂g
	variance []float64
	byShared []float64 // ∂m/∂η, n×q
	misfit   []float64 // χ² of each component at the last β
	points   []linearPoint
}

// linearPoint is the density at one β, as a logarithm.
type linearPoint struct{ beta, log float64 }

func (e *Estimator) newLinearWork() *linearWork {
	f := func(n int) []float64 { return make([]float64, n) }
	most := 0
	l := &linearWork{model: f(e.n), slope: f(e.n), variance: f(e.n), byShared: f(e.n * e.q), misfit: f(len(e.process.comps))}
	for _, c := range e.process.comps {
		r := e.process.groups[c.group].r + e.q
		most = max(most, r)
		l.x = append(l.x, f(r))
	}
	l.trial, l.grad, l.step, l.hess = f(most), f(most), f(most), f(most*most)
	return l
}

// linearPosterior is posteriorOnce in the linear form.
func (w *Work) linearPosterior(dst *Result) error {
	e, p := w.e, w.process
	if p.linear == nil {
		p.linear = e.newLinearWork()
	}
	l := p.linear
	l.on = true
	for c := range l.x {
		clear(l.x[c])
	}
	if p.plan.surface.IsRelative() && !w.someReading() {
		return fmt.Errorf("%w: no reading stands %d standard uncertainties above the noise: of a level that is relative nothing explains them at any temperature", ErrReadings, clearlySet)
	}
	// A coarse look over the whole range, hottest first.
	l.points = l.points[:0]
	ratio := math.Log(e.coldest / e.hottest)
	most := math.Inf(-1)
	p.offset = 0
	for i := range linearGrid + 1 {
		β := e.hottest * math.Exp(ratio*float64(i)/linearGrid)
		if i == linearGrid {
			β = e.coldest
		}
		v := w.linearAtBeta(β)
		l.points = append(l.points, linearPoint{β, v})
		most = max(most, v)
	}
	if math.IsInf(most, -1) || math.IsNaN(most) {
		return fmt.Errorf("%w: no temperature between %v and %v gives an emissivity that %v has: are the signals in W m⁻² sr⁻¹ m⁻¹?", ErrRange, e.assume.Range.Min, e.assume.Range.Max, p.plan.surface)
	}
	// A peak may hide between two points of the grid: look closer about the greatest.
	for range 6 {
		at := 0
		for i, q := range l.points {
			if q.log > l.points[at].log {
				at = i
			}
		}
		for _, k := range [2]int{at + 1, at} { // the later first, so that indices hold
			if k >= 1 && k < len(l.points) {
				β := (l.points[k-1].beta + l.points[k].beta) / 2
				l.points = append(l.points, linearPoint{})
				copy(l.points[k+1:], l.points[k:])
				l.points[k] = linearPoint{β, w.linearAtBeta(β)}
				most = max(most, l.points[k].log)
			}
		}
	}
	p.offset = most
	density := func(β float64) float64 { return math.Exp(w.linearAtBeta(β) - p.offset) }
	total := 0.0
	p.coarse = p.coarse[:0]
	for i := 1; i < len(l.points); i++ {
		a, b := l.points[i-1], l.points[i]
		fm := density((a.beta + b.beta) / 2)
		k := interval{a.beta, b.beta, math.Exp(a.log - p.offset), fm, math.Exp(b.log - p.offset), 0}
		p.coarse = append(p.coarse, k)
		total += k.mass()
	}
	p.grid = p.grid[:0]
	for i, first := range p.coarse {
		p.stack = append(p.stack[:0], first)
		for len(p.stack) > 0 {
			k := p.stack[len(p.stack)-1]
			p.stack = p.stack[:len(p.stack)-1]
			if max(k.fa, k.fm, k.fb) < math.Exp(-linearFar) {
				p.grid = append(p.grid, k)
				continue
			}
			middle := (k.from + k.to) / 2
			left := interval{k.from, middle, k.fa, density((k.from + middle) / 2), k.fm, 0}
			right := interval{middle, k.to, k.fm, density((middle + k.to) / 2), k.fb, 0}
			wrong := math.Abs(left.mass()+right.mass()-k.mass()) / 15
			if wrong > linearWrong*total && len(p.grid)+2*(len(p.stack)+len(p.coarse)-i+1) < linearMost && len(p.stack)+2 < cap(p.stack) {
				p.stack = append(p.stack, right, left)
				continue
			}
			p.grid = append(p.grid, left, right)
		}
	}
	return dst.takePosterior(w)
}

// someReading reports whether what one reading has of the surface exceeds clearlySet standard
// uncertainties. Without one a relative level may be as small as it likes, and the posterior
// can't be normalised.
func (w *Work) someReading() bool {
	for j, s := range w.signal {
		net := s
		if w.sighted {
			net -= w.seen.b[j] + w.seen.c[j]
		}
		if w.censored[j] >= 0 && net*net >= clearlySet*clearlySet*w.variance(j, s) {
			return true
		}
	}
	return false
}

// linearAtBeta returns the logarithm of the density of β, and fills density with each
// component's share of it.
func (w *Work) linearAtBeta(β float64) float64 {
	e, p := w.e, w.process
	w.blackbody(β)
	shift := -2 * math.Log(β)
	if t := e.assume.Temperature; t.StdK > 0 {
		d := (1/β - float64(t.Value)) / t.StdK
		shift -= d * d / 2
	}
	most := math.Inf(-1)
	for c := range p.exponent {
		p.exponent[c] = w.laplace(β, c)
		most = max(most, p.exponent[c])
	}
	if math.IsInf(most, -1) {
		clear(p.density)
		return most
	}
	sum := 0.0
	for c, v := range p.exponent {
		p.density[c] = math.Exp(v - most)
		if p.density[c] > 1e-6 && p.plan.bounded {
			p.density[c] *= w.linearBelowOne(c)
		}
		sum += p.density[c]
	}
	for c := range p.density {
		p.density[c] /= sum
	}
	return most + math.Log(sum) + shift
}

// laplace finds the most likely (z, η) of component c at β, leaves H's factor in hess, and
// returns the logarithm of the evidence before P(ε ≤ 1).
func (w *Work) laplace(β float64, c int) float64 {
	e, p := w.e, w.process
	l, plan := p.linear, &p.plan.comps[c]
	inner := p.plan.groups[plan.group].r
	size := inner + e.q
	x := l.x[c]
	cost := w.linearModel(β, c, x)
	if math.IsNaN(cost) || math.IsInf(cost, 0) {
		clear(x)
		if cost = w.linearModel(β, c, x); math.IsNaN(cost) || math.IsInf(cost, 0) {
			return math.Inf(-1)
		}
	}
	for range linearSteps {
		w.linearNormal(c, x)
		if !cholesky(l.hess, size) {
			return math.Inf(-1)
		}
		copy(l.step[:size], l.grad)
		choleskySolve(l.hess, l.step[:size])
		gain := 0.0
		for a := range size {
			gain += l.grad[a] * l.step[a]
		}
		if gain < 1e-8 {
			break
		}
		f, better := 1.0, false
		for range 20 {
			for a := range size {
				l.trial[a] = x[a] + f*l.step[a]
			}
			if next := w.linearModel(β, c, l.trial[:size]); next < cost {
				cost, better = next, true
				copy(x, l.trial[:size])
				break
			}
			f /= 2
		}
		if !better {
			cost = w.linearModel(β, c, x)
			break
		}
	}
	w.linearNormal(c, x)
	if !cholesky(l.hess, size) {
		return math.Inf(-1)
	}
	logDet := 0.0
	for a := range size {
		logDet += 2 * math.Log(l.hess[a*size+a])
	}
	l.misfit[c] = w.linearMisfit(cost)
	return plan.constant - logDet/2 - cost
}

// linearModel fills model, slope, variance and byShared at β for the unknowns x of component
// c, and returns ½(Σ (s − m)²/V + ln V + xᵀ(prior)x).
func (w *Work) linearModel(β float64, c int, x []float64) float64 {
	e, p := w.e, w.process
	l, v := p.linear, &w.seen
	plan := &p.plan.comps[c]
	basis := p.plan.groups[plan.group]
	η := x[basis.r:]
	sum := 0.0
	for j := range e.n {
		g := p.plan.means[plan.mean][j]
		for i, φ := range basis.phi[j*basis.r : (j+1)*basis.r] {
			g += φ * x[i]
		}
		ε := math.Exp(min(g, 50))
		S := w.black[j]
		m, slope := S*ε, S*ε
		if w.sighted {
			E, byε, _ := apparent(ε, v.self)
			a, b, c := v.a[j], v.b[j], v.c[j]
			t := β * w.rate[j]
			for k, h := range η {
				f := &v.effect[j*e.q+k]
				shift := f.a + v.a[j]*t*(f.c1+f.c2*β)
				a += h * shift
				b += h * (f.b + h/2*f.bb)
				c += h * (f.c + h/2*f.cc)
				l.byShared[j*e.q+k] = S*E*shift + (1-E)*(f.b+h*f.bb) + f.c + h*f.cc
			}
			m = a*S*E + b*(1-E) + c
			slope = (a*S - b) * byε * ε
		}
		variance := w.variance(j, m) + slope*slope*basis.diagonal[j]
		l.model[j], l.slope[j], l.variance[j] = m, slope, variance
		d := w.signal[j] - m
		if side := w.censored[j]; side != 0 {
			cost, _, _ := bounded(float64(side), d, variance)
			sum += cost
			continue
		}
		sum += d*d/variance + math.Log(variance)
	}
	for a := range basis.r {
		row := plan.precision[a*basis.r : (a+1)*basis.r]
		for b, f := range row {
			sum += x[a] * f * x[b]
		}
	}
	for k, h := range η {
		if !e.sight.free(k) {
			sum += h * h
		}
	}
	return sum / 2
}

// linearNormal fills grad and hess at the last linearModel: the gradient's negative, and the
// expected curvature.
func (w *Work) linearNormal(c int, x []float64) {
	e, p := w.e, w.process
	l := p.linear
	plan := &p.plan.comps[c]
	basis := p.plan.groups[plan.group]
	size := basis.r + e.q
	grad, hess := l.grad[:size], l.hess[:size*size]
	clear(grad)
	clear(hess)
	row := l.step[:size]
	for j := range e.n {
		for i, φ := range basis.phi[j*basis.r : (j+1)*basis.r] {
			row[i] = φ * l.slope[j]
		}
		copy(row[basis.r:], l.byShared[j*e.q:(j+1)*e.q])
		d, weight := w.signal[j]-l.model[j], 1.0
		if side := w.censored[j]; side != 0 {
			_, d, weight = bounded(float64(side), d, l.variance[j])
		}
		for a, u := range row {
			grad[a] += u * d / l.variance[j]
			f := weight * u / l.variance[j]
			for b := range a + 1 {
				hess[a*size+b] += f * row[b]
			}
		}
	}
	for a := range basis.r {
		for b := range basis.r {
			f := plan.precision[a*basis.r+b]
			grad[a] -= f * x[b]
			if b <= a {
				hess[a*size+b] += f
			}
		}
	}
	for k := range e.q {
		a := basis.r + k
		if !e.sight.free(k) {
			grad[a] -= x[a]
			hess[a*size+a]++
		}
	}
}

// linearMisfit is χ² of component c, of which cost is linearModel's last.
func (w *Work) linearMisfit(cost float64) float64 {
	sum := 2 * cost
	for j, v := range w.process.linear.variance {
		if w.censored[j] == 0 {
			sum -= math.Log(v)
		}
	}
	return sum
}

// linearBelowOne returns P(ε ≤ 1) of component c, given the readings at the last laplace.
func (w *Work) linearBelowOne(c int) float64 {
	e, p := w.e, w.process
	plan := &p.plan.comps[c]
	basis := p.plan.groups[plan.group]
	if len(basis.points) == 0 {
		return 1
	}
	size := basis.r + e.q
	x := p.linear.x[c]
	w.laplaceAgain(c)
	m := len(basis.points)
	through := make([]float64, m*size)
	for a, j := range basis.points {
		row := basis.phi[j*basis.r : (j+1)*basis.r]
		p.mean[a] = p.plan.means[plan.mean][j]
		for i, φ := range row {
			p.mean[a] += φ * x[i]
		}
		u := through[a*size : (a+1)*size]
		copy(u, row)
		forwardSolve(p.linear.hess, u)
		for b := range a + 1 {
			p.cov[a*m+b] = dot(u, through[b*size:(b+1)*size])
		}
	}
	return orthant(p.mean, p.cov, m)
}

// laplaceAgain leaves H's factor of component c, at the unknowns that it has, in hess.
func (w *Work) laplaceAgain(c int) {
	p := w.process
	size := len(p.linear.x[c])
	w.linearModel(w.beta, c, p.linear.x[c])
	w.linearNormal(c, p.linear.x[c])
	cholesky(p.linear.hess, size)
}

// linearEmissivity forms the posterior mean of ln ε of each channel at the median of β, and
// its standard uncertainty, that of β included.
func (w *Work) linearEmissivity(o *posterior) {
	e, p := w.e, w.process
	l := p.linear
	w.linearAtBeta(o.beta)
	clear(o.value)
	clear(o.unc)
	for c, share := range p.density {
		if share < 1e-6 {
			continue
		}
		w.laplaceAgain(c)
		plan := &p.plan.comps[c]
		basis := p.plan.groups[plan.group]
		size := basis.r + e.q
		u := make([]float64, size)
		for j := range e.n {
			clear(u)
			row := basis.phi[j*basis.r : (j+1)*basis.r]
			copy(u, row)
			value := p.plan.means[plan.mean][j]
			for i, φ := range row {
				value += φ * l.x[c][i]
			}
			forwardSolve(l.hess, u)
			variance := dot(u, u) + basis.diagonal[j]
			o.value[j] += share * value
			o.unc[j] += share * (variance + value*value)
		}
	}
	for j := range o.value {
		variance := max(o.unc[j]-o.value[j]*o.value[j], 0)
		by := w.rate[j] * o.betaU // a reading that stays as it is
		variance += by * by
		if p.plan.bounded {
			o.value[j] = min(o.value[j], 0)
		}
		o.value[j] = math.Exp(o.value[j])
		o.unc[j] = o.value[j] * math.Sqrt(variance)
	}
}

// linearShares integrates the components' shares over the grid.
func (w *Work) linearShares(o *posterior) {
	p := w.process
	clear(o.shares)
	sum := 0.0
	for i := range o.grid {
		k := &o.grid[i]
		mass := k.mass()
		if mass < 1e-6*o.total {
			continue
		}
		w.linearAtBeta((k.from + k.to) / 2)
		for c, v := range p.density {
			o.shares[c] += mass * v
		}
		sum += mass
	}
	for c := range o.shares {
		o.shares[c] /= sum
	}
}

// cholesky replaces the lower half of a by its factor; it fails where a is not positive.
func cholesky(a []float64, n int) bool {
	for i := range n {
		for j := range i + 1 {
			v := a[i*n+j] - dot(a[i*n:i*n+j], a[j*n:j*n+j])
			if i > j {
				a[i*n+j] = v / a[j*n+j]
				continue
			}
			if !(v > 0) {
				return false
			}
			a[i*n+i] = math.Sqrt(v)
		}
	}
	return true
}

// forwardSolve replaces x by L⁻¹x.
func forwardSolve(l, x []float64) {
	n := len(x)
	for i := range x {
		x[i] = (x[i] - dot(l[i*n:i*n+i], x[:i])) / l[i*n+i]
	}
}

// choleskySolve replaces x by (LLᵀ)⁻¹x.
func choleskySolve(l, x []float64) {
	forwardSolve(l, x)
	n := len(x)
	for i := n - 1; i >= 0; i-- {
		for k := i + 1; k < n; k++ {
			x[i] -= l[k*n+i] * x[k]
		}
		x[i] /= l[i*n+i]
	}
}
