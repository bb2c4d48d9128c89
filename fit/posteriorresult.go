package fit

import (
	"fmt"
	"math"
	"slices"
)

// IntervalKind says what an interval means.
type IntervalKind int

const (
	// ProfileInterval: all temperatures at which χ² exceeds its minimum by no more than the
	// normal (or Student's) quantile squared.
	ProfileInterval IntervalKind = iota
	// PosteriorInterval: equal tails of the posterior, T flat over the range beforehand.
	PosteriorInterval
)

func (k IntervalKind) String() string { return [...]string{"profile", "posterior"}[k] }

// IntervalKind returns what the interval of this result means.
func (r *Result) IntervalKind() IntervalKind {
	if r.posterior != nil {
		return PosteriorInterval
	}
	return ProfileInterval
}

// posteriorTo is EstimateTo for a process: the median is the estimate, the posterior's
// standard deviation the uncertainty.
func (e *Estimator) posteriorTo(dst *Result, w *Work) error {
	if err := w.estimatePosterior(dst); err != nil {
		return err
	}
	o := dst.posterior
	dst.basins = append(dst.basins, basin{beta: o.beta})
	dst.beta = o.beta
	u := o.std * o.beta * o.beta
	clear(dst.cov)
	dst.cov[0] = u * u
	dst.hasCov, dst.fitted = true, true
	dst.limit = math.Inf(1)
	dst.chi2, dst.dof = w.leastMisfit(o.beta), e.n-1
	for _, side := range w.censored {
		if side != 0 {
			dst.dof-- // a bound leaves nothing to test by
		}
	}
	return nil
}

// posteriorInterval is IntervalTo for a process.
func (dst *Result) posteriorInterval(p float64) {
	dst.probability = p
	dst.hot, dst.cold = dst.posterior.ends(p, dst.e)
	dst.hasInterval = true
}

// panelOf returns the panel of β and β's coordinate in it.
func (p *processWork) panelOf(β float64) (*panel, float64) {
	for i := range p.count {
		q := &p.panels[i]
		if z := (β - q.middle) / q.half; z <= 1 || i == p.count-1 {
			return q, max(z, -1)
		}
	}
	return nil, 0
}

// leastMisfit returns, of the component that has most of the posterior at β, the quadratic
// form (y − µ)ᵀ(K + RRᵀ + D)⁻¹(y − µ): χ² of as many degrees of freedom as channels if the
// surface is of that kind.
func (w *Work) leastMisfit(β float64) float64 {
	p := w.process
	if p.linear != nil && p.linear.on {
		w.linearAtBeta(β)
		best := 0
		for c, v := range p.density {
			if v > p.density[best] {
				best = c
			}
		}
		return max(0, p.linear.misfit[best])
	}
	q, z := p.panelOf(β)
	w.posteriorAt(q, z)
	best := 0
	for c, v := range p.density {
		if v > p.density[best] {
			best = c
		}
	}
	return max(0, -2*(polynomial((*[qDegrees]float64)(q.log[best*qDegrees:]), z)-p.comps[best].base))
}

// diagnosePosterior is DiagnoseTo for a process: the emissivities with their uncertainties,
// the components' shares, and notes.
func (e *Estimator) diagnosePosterior(dst *Result, w *Work) error {
	if err := w.estimatePosterior(dst); err != nil {
		return err
	}
	o := dst.posterior
	if l := w.process.linear; l != nil && l.on {
		w.linearShares(o)
		w.linearEmissivity(o)
		o.exact = -1
	} else {
		w.fillComponentShares(o)
		w.fillEmissivity(o)
		o.exact = w.exactCurveStd(o.beta)
	}
	o.described = true
	if dst.contradicted() {
		dst.note("the readings contradict the assumptions (%v, %v): χ² = %.3g for %d channels; the interval holds only if they are right", e.assume.Emissivity, e.assume.Noise, dst.chi2, e.n)
	}
	if n := o.maxima(); n > 1 {
		dst.note("the posterior of the temperature has %d maxima", n)
	}
	return nil
}

// fillComponentShares integrates each component's density over the grid.
func (w *Work) fillComponentShares(o *posterior) {
	p := w.process
	clear(o.shares)
	for i := range o.grid {
		k := &o.grid[i]
		h := (k.to - k.from) / 6
		for _, f := range [3][2]float64{{k.from, h}, {(k.from + k.to) / 2, 4 * h}, {k.to, h}} {
			q := &p.panels[k.panel]
			w.posteriorAt(q, (f[0]-q.middle)/q.half)
			for c, v := range p.density {
				o.shares[c] += f[1] * v
			}
		}
	}
	sum := 0.0
	for _, v := range o.shares {
		sum += v
	}
	for c := range o.shares {
		o.shares[c] /= sum
	}
}

// fillEmissivity forms the posterior mean of ln ε of each channel, its roughness included, at
// the median of β, over the components; and its variance there and that which β brings.
func (w *Work) fillEmissivity(o *posterior) {
	e, p := w.e, w.process
	w.logRatio(p.y, p.dy, o.beta)
	q, z := p.panelOf(o.beta)
	sum := w.posteriorAt(q, z)
	clear(o.value)
	clear(o.unc)
	solved := make([]float64, p.plan.columns)
	for c, v := range p.density {
		share := v / sum
		if share < 1e-6 {
			continue
		}
		k, plan := &p.comps[c], &p.plan.comps[c]
		g, basis := &p.groups[plan.group], p.plan.groups[plan.group]
		r := g.r
		// ŵ = L⁻ᵀ x(z)
		ŵ := solved[:r]
		for i := range ŵ {
			x := (*[degrees]float64)(q.x[k.offset+i*degrees:])
			f := x[5]
			for m := 4; m >= 0; m-- {
				f = f*z + x[m]
			}
			ŵ[i] = f
		}
		for i := r - 1; i >= 0; i-- {
			for m := i + 1; m < r; m++ {
				ŵ[i] -= k.lower[m*r+i] * ŵ[m]
			}
			ŵ[i] *= k.lower[i*r+i]
		}
		u := make([]float64, r)
		for j := range e.n {
			row := g.phi[j*r : (j+1)*r]
			curve, all := p.plan.means[plan.mean][j], p.plan.means[plan.mean][j]
			for i, φ := range row {
				all += φ * ŵ[i]
				if i < basis.r {
					curve += φ * ŵ[i]
				}
			}
			d := basis.diagonal[j]
			value := curve + d*g.weight[j]*(p.y[j]-all)
			variance := d * (1 - d*g.weight[j])
			clear(u)
			copy(u, row[:basis.r])
			for i := range r {
				for m, f := range k.lower[i*r : i*r+i] {
					u[i] -= f * u[m]
				}
				u[i] *= k.lower[i*r+i]
				variance += u[i] * u[i]
			}
			o.value[j] += share * value
			o.unc[j] += share * (variance + value*value)
		}
	}
	for j := range o.value {
		variance := max(o.unc[j]-o.value[j]*o.value[j], 0)
		variance += p.dy[j] * p.dy[j] * o.betaU * o.betaU
		if p.plan.bounded {
			o.value[j] = min(o.value[j], 0)
		}
		o.value[j] = math.Exp(o.value[j])
		o.unc[j] = o.value[j] * math.Sqrt(variance)
	}
}

// maxima counts the posterior's maxima that rise a twentieth of the highest above the dips
// beside them.
func (o *posterior) maxima() int {
	most := 0.0
	for _, k := range o.grid {
		most = max(most, k.fa, k.fm, k.fb)
	}
	count, low, high := 0, 0.0, 0.0
	rising := true
	for _, k := range o.grid {
		for _, f := range [2]float64{k.fm, k.fb} {
			if rising {
				high = max(high, f)
				if f < high-most/20 {
					count, rising, low = count+1, false, f
				}
			} else {
				low = min(low, f)
				if f > low+most/20 {
					rising, high = true, f
				}
			}
		}
	}
	if rising && high > 0 {
		count++
	}
	return count
}

// ComponentShare is a component of a process's mixture with its share of the posterior.
type ComponentShare struct {
	Index int // in Process.Components
	Share float64
}

// ComponentShares returns the posterior shares of the components, largest first; nil where the
// surface is no process or before DiagnoseTo.
func (r *Result) ComponentShares() []ComponentShare {
	o := r.posterior
	if o == nil || !o.described {
		return nil
	}
	list := make([]ComponentShare, len(o.shares))
	for c, v := range o.shares {
		list[c] = ComponentShare{r.e.process.comps[c].index, v}
	}
	slices.SortStableFunc(list, func(a, b ComponentShare) int {
		switch {
		case a.Share > b.Share:
			return -1
		case a.Share < b.Share:
			return 1
		}
		return 0
	})
	return list
}

// posteriorEmissivity is Emissivity for a process.
func (r *Result) posteriorEmissivity(j int) (value, std float64, hasStd, ok bool) {
	if !r.posterior.described {
		return 0, 0, false, false
	}
	return r.posterior.value[j], r.posterior.unc[j], true, true
}

// assumedRange words what a process assumes of ε at the middle channel.
func (r *Result) assumedRange() string {
	e := r.e
	s := e.process.surface
	if s.IsRelative() {
		return fmt.Sprintf("%v assumed", s)
	}
	lo, hi := s.Range(e.bands[e.used[e.n/2]].Mean())
	return fmt.Sprintf("ε between %.2g and %.2g assumed: %v", lo, hi, s)
}
