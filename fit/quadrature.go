package fit

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// posterior is what a Result keeps of a process's estimate.
type posterior struct {
	grid        []interval // of the density of β, hottest first
	total       float64
	offset      float64 // ln of what the density was divided by
	median      float64 // of T, K, as are mean and std
	mean, std   float64
	beta, betaU float64   // of β: median and standard deviation
	shares      []float64 // of the components
	value, unc  []float64 // emissivity of the channels used, and its standard uncertainty
	exact       float64   // standard uncertainty of T, K, if the curve is exactly the mean; −1: not known
	described   bool
}

func (e *Estimator) newPosterior() *posterior {
	return &posterior{grid: make([]interval, 0, maxIntervals), shares: make([]float64, len(e.process.comps)), value: make([]float64, e.n), unc: make([]float64, e.n)}
}

// quadratureTolerance is the error that one interval may bring, of the whole.
const quadratureTolerance = 1e-5

// estimatePosterior fills dst with the posterior of the reading that load has taken.
func (w *Work) estimatePosterior(dst *Result) error {
	e := w.e
	if l := w.process.linear; l != nil {
		l.on = false
	}
	if w.process.forceLinear || !w.strong() {
		return w.linearPosterior(dst)
	}
	// What is shared acts on ln(s − b − c) by an amount that depends on T a little: it is taken
	// at the median of a first estimate.
	if err := w.posteriorOnce(dst, math.Sqrt(e.hottest*e.coldest)); err != nil || e.q == 0 || e.steady {
		return err
	}
	return w.posteriorOnce(dst, dst.posterior.beta)
}

// posteriorOnce is estimatePosterior with the shared unknowns' effects at 1/T = β.
func (w *Work) posteriorOnce(dst *Result, β float64) error {
	e, p := w.e, w.process
	w.logReading(β)
	if err := w.factorise(); err != nil {
		return err
	}
	hot, cold := w.bracket()
	if !(hot < cold) { // no component has such a curve: its tails decide, and χ² tells
		hot = e.hottest
	}
	if !(hot < cold) {
		return fmt.Errorf("%w: no temperature between %v and %v gives an emissivity that %v has: are the signals in W m⁻² sr⁻¹ m⁻¹?", ErrRange, e.assume.Range.Min, e.assume.Range.Max, p.plan.surface)
	}
	if err := w.layPanels(hot, cold, firstAccuracy); err != nil {
		return err
	}
	if slices.Max(p.inverse)*firstAccuracy > panelAccuracy {
		if err := w.narrow(hot, cold); err != nil {
			return err
		}
	}
	for range 20 {
		most, err := w.integrate()
		if err != nil {
			return err
		}
		if most > 1e-2 {
			break
		}
		if most > 0 { // the bound, or a known temperature, leaves little of the peak
			p.offset += math.Log(most)
		} else {
			p.offset -= 30
		}
	}
	return dst.takePosterior(w)
}

// layPanels covers [hot, cold] and finds the greatest density, before ε ≤ 1 is asked.
func (w *Work) layPanels(hot, cold, least float64) error {
	p := w.process
	p.count = 0
	if err := w.addPanel(hot, cold, least); err != nil {
		return err
	}
	p.offset = math.Inf(-1)
	for i := range p.count {
		q := &p.panels[i]
		for c := range p.comps {
			z, v, _ := highest((*[qDegrees]float64)(q.log[c*qDegrees:]))
			p.offset = max(p.offset, v-2*math.Log(q.middle+q.half*z))
		}
	}
	return nil
}

// narrow lays the panels again, over what has mass, as accurately as precise readings need.
func (w *Work) narrow(hot, cold float64) error {
	p := w.process
	first, last := cold, hot
	for i := range p.count {
		q := &p.panels[i]
		if from, to, _ := w.region(q); to > from {
			first, last = min(first, q.middle+q.half*from), max(last, q.middle+q.half*to)
		}
	}
	return w.layPanels(first, last, 1e-13)
}

// integrate lays the grid over all panels by adaptive Simpson's rule and returns the greatest
// density on it.
func (w *Work) integrate() (most float64, err error) {
	p := w.process
	p.grid = p.grid[:0]
	total := 0.0
	for i := range p.count {
		q := &p.panels[i]
		from, to, step := w.region(q)
		if !(to > from) {
			continue
		}
		parts := [3]float64{from, to, to}
		if z := (p.safe - q.middle) / q.half; z > from && z < to {
			parts[1] = z
		}
		for k := range 2 {
			a, b := parts[k], parts[k+1]
			if !(b > a) {
				continue
			}
			n := max(4, int(math.Ceil((b-a)/step)))
			if len(p.grid)+n > maxIntervals/3 {
				n = max(4, maxIntervals/3-len(p.grid))
			}
			h := (b - a) / float64(n)
			fa := w.posteriorAt(q, a)
			for m := range n {
				z := a + h*float64(m)
				fm, fb := w.posteriorAt(q, z+h/2), w.posteriorAt(q, z+h)
				piece := interval{z, z + h, fa, fm, fb, i}
				p.grid = append(p.grid, piece)
				total += piece.mass() * q.half
				most = max(most, fa, fm, fb)
				fa = fb
			}
		}
	}
	if len(p.grid) == 0 {
		return 0, nil
	}
	p.coarse = append(p.coarse[:0], p.grid...)
	p.grid = p.grid[:0]
	for i := len(p.coarse) - 1; i >= 0; i-- {
		p.stack = append(p.stack[:0], p.coarse[len(p.coarse)-1-i])
		for len(p.stack) > 0 {
			k := p.stack[len(p.stack)-1]
			p.stack = p.stack[:len(p.stack)-1]
			q := &p.panels[k.panel]
			middle := (k.from + k.to) / 2
			left := interval{k.from, middle, k.fa, w.posteriorAt(q, (k.from+middle)/2), k.fm, k.panel}
			right := interval{middle, k.to, k.fm, w.posteriorAt(q, (middle+k.to)/2), k.fb, k.panel}
			wrong := math.Abs(left.mass()+right.mass()-k.mass()) * q.half / 15
			most = max(most, left.fm, right.fm)
			if wrong > quadratureTolerance*total && len(p.grid)+2*(len(p.stack)+i+2) < maxIntervals && len(p.stack)+2 < cap(p.stack) {
				p.stack = append(p.stack, right, left)
				continue
			}
			p.grid = append(p.grid, left.on(q), right.on(q))
		}
	}
	return most, nil
}

// region returns where a panel has mass, in z, and the step that its narrowest part needs.
func (w *Work) region(q *panel) (from, to, step float64) {
	p := w.process
	from, to, step = 1, -1, 2.0
	for c := range p.comps {
		z, v, width := highest((*[qDegrees]float64)(q.log[c*qDegrees:]))
		below := p.offset - v + 2*math.Log(q.middle+q.half*z)
		if below > 30 {
			continue
		}
		reach := 8 * width
		if math.Abs(z) == 1 {
			reach = 30 * width
		}
		from, to = min(from, z-reach), max(to, z+reach)
		if below < 12 {
			step = min(step, 2*width)
		}
	}
	return max(from, -1), min(to, 1), step
}

// mass is Simpson's rule.
func (k interval) mass() float64 { return (k.to - k.from) / 6 * (k.fa + 4*k.fm + k.fb) }

// on returns the interval in β.
func (k interval) on(q *panel) interval {
	k.from, k.to = q.middle+q.half*k.from, q.middle+q.half*k.to
	return k
}

// takePosterior copies the grid and forms the moments.
func (dst *Result) takePosterior(w *Work) error {
	e, p := w.e, w.process
	o := dst.posterior
	o.grid = append(o.grid[:0], p.grid...)
	o.described = false
	o.total, o.offset = 0, p.offset
	var t1, t2, b1, b2 float64
	reference := 0.0
	for i := range o.grid {
		k := &o.grid[i]
		if i == 0 {
			reference = 1 / k.from
		}
		m := (k.from + k.to) / 2
		h := (k.to - k.from) / 6
		for _, f := range [3][2]float64{{k.from, h * k.fa}, {m, 4 * h * k.fm}, {k.to, h * k.fb}} {
			t := 1/f[0] - reference
			b := f[0] - 1/reference
			o.total += f[1]
			t1 += t * f[1]
			t2 += t * t * f[1]
			b1 += b * f[1]
			b2 += b * b * f[1]
		}
	}
	if !(o.total > 0) || math.IsInf(o.total, 0) {
		return fmt.Errorf("%w: no temperature between %v and %v gives an emissivity that %v has: are the signals in W m⁻² sr⁻¹ m⁻¹?", ErrRange, e.assume.Range.Min, e.assume.Range.Max, p.plan.surface)
	}
	t1, t2, b1, b2 = t1/o.total, t2/o.total, b1/o.total, b2/o.total
	o.mean, o.std = reference+t1, math.Sqrt(max(t2-t1*t1, 0))
	o.betaU = math.Sqrt(max(b2-b1*b1, 0))
	o.beta = o.quantile(0.5)
	o.median = 1 / o.beta
	return nil
}

// quantile returns the β below which a share of the posterior lies.
func (o *posterior) quantile(share float64) float64 {
	want := share * o.total
	for i := range o.grid {
		k := &o.grid[i]
		m := k.mass()
		if want > m && i+1 < len(o.grid) {
			want -= m
			continue
		}
		// The parabola through the three densities: c₀ + c₁u + c₂u², u from 0 to 1.
		h := k.to - k.from
		c1, c2 := -3*k.fa+4*k.fm-k.fb, 2*k.fa-4*k.fm+2*k.fb
		lo, hi := 0.0, 1.0
		for range 50 {
			u := (lo + hi) / 2
			if h*u*(k.fa+u*(c1/2+u*c2/3)) < want {
				lo = u
			} else {
				hi = u
			}
		}
		return k.from + h*(lo+hi)/2
	}
	return math.NaN()
}

// openShare is how much of one tail may lie beyond an end of the temperature range.
const openShare = 0.1

// ends returns the equal-tail interval of probability p in β; an end is open where the
// range cuts off more than openShare of what its tail holds.
func (o *posterior) ends(p float64, e *Estimator) (hot, cold end) {
	if len(o.grid) == 0 {
		return end{e.hottest, true}, end{e.coldest, true}
	}
	tail := (1 - p) / 2
	hot, cold = end{o.quantile(tail), false}, end{o.quantile(1 - tail), false}
	first, last := o.grid[0], o.grid[len(o.grid)-1]
	if first.from <= e.hottest*(1+1e-9) && massBeyond(first.fa, first.fm, first.to-first.from) > openShare*tail*o.total {
		hot = end{e.hottest, true}
	}
	if last.to >= e.coldest*(1-1e-9) && massBeyond(last.fb, last.fm, last.to-last.from) > openShare*tail*o.total {
		cold = end{e.coldest, true}
	}
	return hot, cold
}

// massBeyond is the mass of an exponential that continues a density which is f at the end and
// inner half an interval inside.
func massBeyond(f, inner, width float64) float64 {
	if f == 0 {
		return 0
	}
	if inner <= f {
		return math.Inf(1)
	}
	return f * width / 2 / math.Log(inner/f)
}

// Posterior returns the density of the temperature, per kelvin, at points that suffice for
// straight lines between them in a picture; nothing where the surface is no process.
func (r *Result) Posterior() (t []pyro.Temperature, density []float64) {
	o := r.posterior
	if o == nil || !r.fitted {
		return nil, nil
	}
	add := func(β, f float64) {
		t = append(t, pyro.Temperature(1/β))
		density = append(density, f*β*β/o.total)
	}
	for i := len(o.grid) - 1; i >= 0; i-- {
		k := &o.grid[i]
		if i == len(o.grid)-1 {
			add(k.to, k.fb)
		}
		add((k.from+k.to)/2, k.fm)
		add(k.from, k.fa)
	}
	return t, density
}

// Mean returns the posterior's mean temperature; ok is false where the surface is no process
// or the state is not Determined.
func (r *Result) Mean() (t pyro.Temperature, ok bool) {
	if r.posterior == nil || r.State() != Determined {
		return 0, false
	}
	return pyro.Temperature(r.posterior.mean), true
}
