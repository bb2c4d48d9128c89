package fit

import (
	"fmt"
	"math"

	"candent/emissivity"
	"candent/pyro"
)

// A surface with a physics of its own (emissivity.Model) enters the estimator with parameters
// that count from 0 to 1 between their bounds, so that the bounds are those of the active set.
// Along the curve χ²(T) its parameters are eliminated from the best of a set of starts: models
// such as a film's have many minima, and the nearest is not good enough.

// modelPlan is a compiled model.
type modelPlan struct {
	emissivity.Model
	parameters []emissivity.Parameter
	starts     []float64 // of the scaled parameters, one row after the other
}

const (
	lineStarts = 48  // starts over a single free parameter
	gridStarts = 7   // over each of two
	manyStarts = 120 // over three or more
	maxModel   = 8   // parameters
)

// compileModel takes a model as the surface.
func (e *Estimator) compileModel(m emissivity.Model) error {
	plan := &modelPlan{Model: m, parameters: m.Parameters()}
	e.model, e.link, e.bent = plan, emissivity.Identity, true
	e.p = len(plan.parameters)
	if e.p > maxModel {
		return fmt.Errorf("%w: %v has %d parameters, more than %d", ErrAssume, m, e.p, maxModel)
	}
	e.fixed, e.value = make([]bool, e.p), make([]float64, e.p)
	for k, p := range plan.parameters {
		width := p.Hi - p.Lo
		if !(width > 0) {
			return fmt.Errorf("%w: %v: %s between %g and %g: its bounds must rise", ErrAssume, m, p.Name, p.Lo, p.Hi)
		}
		if !p.Prior.Set {
			continue
		}
		e.value[k] = (p.Prior.Value - p.Lo) / width
		if e.fixed[k] = p.Prior.Std == 0; e.fixed[k] {
			continue
		}
		row := make([]float64, e.p)
		row[k] = 1
		e.data = append(e.data, datum{"prior on " + p.Name, row, e.value[k], width / p.Prior.Std})
	}
	// The coordinate of wide bands: the wavelength itself.
	lo, hi := e.bands[e.used[0]].Edges()
	for _, i := range e.used {
		l, h := e.bands[i].Edges()
		lo, hi = min(lo, l), max(hi, h)
	}
	e.family = emissivity.Polynomial(2).CentredOn((lo + hi) / 2) // of degree two, so that the tables keep the widths
	plan.listStarts(e.fixed, e.value)
	return nil
}

// listStarts spreads starts over what is free: evenly over one or two parameters, by the
// Halton sequence over more.
func (m *modelPlan) listStarts(fixed []bool, value []float64) {
	var free []int
	for k := range fixed {
		if !fixed[k] {
			free = append(free, k)
		}
	}
	add := func(at func(i int) float64) {
		row := make([]float64, len(fixed))
		copy(row, value)
		for i, k := range free {
			row[k] = at(i)
		}
		m.starts = append(m.starts, row...)
	}
	add(func(i int) float64 {
		p := m.parameters[free[i]]
		return (p.Start - p.Lo) / (p.Hi - p.Lo)
	})
	switch len(free) {
	case 0:
	case 1:
		for k := range lineStarts {
			add(func(int) float64 { return (float64(k) + 0.5) / lineStarts })
		}
	case 2:
		for k := range gridStarts * gridStarts {
			add(func(i int) float64 {
				return (float64([2]int{k % gridStarts, k / gridStarts}[i]) + 0.5) / gridStarts
			})
		}
	default:
		primes := [maxModel]int{2, 3, 5, 7, 11, 13, 17, 19}
		for k := range manyStarts {
			add(func(i int) float64 { return radicalInverse(k+1, primes[i]) })
		}
	}
}

// radicalInverse mirrors the digits of k in the base at the point (J. H. Halton, Numer. Math.
// 2 (1960) 84).
func radicalInverse(k, base int) float64 {
	v, f := 0.0, 1.0
	for ; k > 0; k /= base {
		f /= float64(base)
		v += f * float64(k%base)
	}
	return v
}

// startModel writes the start with the least χ² at 1/T = β to ψ.
func (w *Work) startModel(β float64, ψ []float64) {
	e := w.e
	clear(ψ)
	best, at := math.Inf(1), 0
	for i := 0; i == 0 || i < len(e.model.starts); i += max(e.p, 1) {
		copy(ψ[:e.p], e.model.starts[i:i+e.p])
		if chi2 := w.evaluate(β, ψ, false); chi2 < best {
			best, at = chi2, i
		}
	}
	copy(ψ[:e.p], e.model.starts[at:at+e.p])
}

// physical returns the value of parameter k, which counts from 0 to 1 as x.
func (m *modelPlan) physical(k int, x float64) float64 {
	p := &m.parameters[k]
	return p.Lo + (p.Hi-p.Lo)*x
}

// emissivity returns ε at λ and T with its derivative by β = 1/T and by the scaled parameters;
// room is for len(x) numbers.
func (m *modelPlan) emissivity(grad, x, room []float64, λ pyro.Wavelength, β float64) (ε, dβ float64) {
	θ := room[:len(x)]
	for k := range x {
		θ[k] = m.physical(k, x[k])
	}
	ε, dT := m.Emissivity(grad, θ, λ, pyro.Temperature(1/β))
	for k := range grad {
		grad[k] *= m.parameters[k].Hi - m.parameters[k].Lo
	}
	return ε, -dT / (β * β)
}

// overBand is emissivity averaged over a band whose wavelength has mean coordinate d and
// variance v under R·L, by the rule of three points that is exact to the third degree. What
// the change of mean and variance with T does to ε is left out of dβ.
func (m *modelPlan) overBand(grad, x, room []float64, centre pyro.Wavelength, d, v, β float64) (ε, dβ float64) {
	at := func(d float64) pyro.Wavelength { return centre + pyro.Wavelength(d)*pyro.Micrometre }
	if v <= 0 {
		return m.emissivity(grad, x, room, at(d), β)
	}
	g := room[maxModel : maxModel+len(x)]
	clear(grad)
	s := math.Sqrt(3 * v)
	for _, node := range [3]struct{ d, w float64 }{{d, 2.0 / 3}, {d - s, 1.0 / 6}, {d + s, 1.0 / 6}} {
		e, b := m.emissivity(g, x, room, at(node.d), β)
		ε += node.w * e
		dβ += node.w * b
		for k := range g {
			grad[k] += node.w * g[k]
		}
	}
	return ε, dβ
}

// modelRow fills ε and its derivatives of channel j for the surface's own radiance and for
// what it reflects.
func (w *Work) modelRow(j int, β float64, grad, gradB, θ []float64) (ε, dβ, εb float64) {
	e, room := w.e, w.modelRoom[maxModel:]
	if e.lines {
		ε, dβ = e.model.emissivity(grad, θ, room, e.sight.channel[j].centre, β)
		copy(gradB, grad)
		return ε, dβ, ε
	}
	centre, _ := e.family.Centre()
	ε, dβ = e.model.overBand(grad, θ, room, centre, w.coord[j], w.spread[j].v, β)
	εb, _ = e.model.overBand(gradB, θ, room, centre, w.seen.coord[j], w.seen.spread[j].v, β)
	return ε, dβ, εb
}

// parameterNames lists the surface's parameters in order.
func (e *Estimator) parameterNames() []string {
	if e.model == nil {
		return e.family.Parameters()
	}
	var names []string
	for _, p := range e.model.parameters {
		names = append(names, p.Name)
	}
	return names
}

// curveAt returns the surface's emissivity in channel j for ψ, and ∂/∂θₖ.
func (r *Result) curveAt(j int, grad []float64) float64 {
	e := r.e
	if e.model != nil {
		ε, _ := e.model.emissivity(grad, r.psi[:e.p], make([]float64, e.p), e.sight.channel[j].centre, r.beta)
		return ε
	}
	value, _ := e.curve(r.psi[:e.p], e.coord[j])
	φ := 1.0
	if e.link == emissivity.Exp {
		φ = value
	}
	for k := range grad {
		grad[k] = φ
		φ *= e.coord[j]
	}
	return value
}
