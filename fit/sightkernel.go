package fit

import (
	"math"

	"gonum.org/v1/gonum/floats"

	"candent/emissivity"
	"candent/fit/internal/elementary"
	"candent/pyro/sightline"
)

// columns are the weighted Jacobian of a sight by columns, for lines under given standard
// uncertainties: what evaluateSight does for any sight, laid out so that the normal equations
// are dot products.
type columns struct {
	plain  bool        // the sight is one that this layout serves
	usable bool        // and so is the reading
	std    []float64   // 1/σ
	jac    [][]float64 // of β, θ, η, each n long, in units of σ
	diff   []float64   // s − m
	kinds  []columnKind
	gain   []float64 // q×n: r, by which a changes; a throughput multiplies all that is read by 1 + rη
	factor []float64 // 1 + Σ rη
	a, da  []float64 // further relative changes of a by the other columns, and their slope by β
	b, c   []float64
	seenE  []float64 // emissivity
}

// columnKind says which parts of an effect a column has.
type columnKind struct{ throughput, onA, onB, onC bool }

func newColumns(n, p, q int) columns {
	f := func() []float64 { return make([]float64, n) }
	c := columns{std: f(), diff: f(), kinds: make([]columnKind, q), gain: make([]float64, n*q), factor: f(), a: f(), da: f(), b: f(), c: f(), seenE: f()}
	for range 1 + p + q {
		c.jac = append(c.jac, f())
	}
	return c
}

// sortColumns finds the kinds of the columns from the effects at the declared values.
func (w *Work) sortColumns() {
	e, v, k := w.e, &w.seen, &w.columns
	k.plain = e.lines && e.sight.spread < 0 && e.assume.Surroundings.Remainder != sightline.Itself
	for col := range k.kinds {
		kind := columnKind{throughput: true}
		for j := range e.n {
			f := &v.effect[j*e.q+col]
			r := f.a / v.a[j]
			kind.onA = kind.onA || f.a != 0 || f.c1 != 0 || f.c2 != 0
			kind.onB = kind.onB || f.b != 0 || f.bb != 0
			kind.onC = kind.onC || f.c != 0 || f.cc != 0
			kind.throughput = kind.throughput && f.c1 == 0 && f.c2 == 0 && f.bb == 0 && f.cc == 0 &&
				math.Abs(f.b-r*v.b[j]) <= 1e-9*math.Abs(f.b) && math.Abs(f.c-r*v.c[j]) <= 1e-9*math.Abs(f.c)
		}
		k.kinds[col] = kind
	}
}

// prepareColumns takes a reading's effects over.
func (w *Work) prepareColumns() {
	e, v, k := w.e, &w.seen, &w.columns
	k.usable = k.plain && w.rel == 0
	for j, u := range w.std {
		k.usable = k.usable && w.shot[j] == 0 && w.censored[j] == 0
		k.std[j] = 1 / u
	}
	if !k.usable {
		return
	}
	for col, kind := range k.kinds {
		if !kind.onA {
			continue
		}
		r := k.gain[col*e.n : (col+1)*e.n]
		for j, a := range v.a {
			r[j] = v.effect[j*e.q+col].a / a
		}
	}
}

// evaluateColumns forms χ², −½ of its gradient and its expected curvature at (β, ψ).
func (w *Work) evaluateColumns(β float64, ψ []float64) float64 {
	w.blackbody(β)
	e, v, k := w.e, &w.seen, &w.columns
	n, p, q := e.n, e.p, e.q
	η := ψ[p:]
	S, R, E := w.black[:n], w.rate[:n], k.seenE[:n]
	d := e.coord[:n]
	θ1 := 0.0
	if p == 2 {
		θ1 = ψ[1]
	}
	for j, x := range d {
		E[j] = ψ[0] + θ1*x
	}
	exponential := e.link == emissivity.Exp
	if exponential {
		elementary.ExpTo(E, E)
	}
	factor, a, da, b, c := k.factor[:n], k.a[:n], k.da[:n], k.b[:n], k.c[:n]
	for j := range factor {
		factor[j] = 1
	}
	clear(a)
	clear(da)
	clear(b)
	clear(c)
	for col, h := range η {
		kind := k.kinds[col]
		if h == 0 {
			continue
		}
		if kind.throughput {
			for j, r := range k.gain[col*n : (col+1)*n] {
				factor[j] += h * r
			}
			continue
		}
		if kind.onA {
			for j, r := range k.gain[col*n : (col+1)*n] {
				f := &v.effect[j*q+col]
				t, R := f.c1+f.c2*β, R[j]
				a[j] += h * (r + β*R*t)
				da[j] += h * ((R+β*R*(R+e.rate[j]))*t + β*R*f.c2)
			}
		}
		if kind.onB {
			for j := range b {
				f := &v.effect[j*q+col]
				b[j] += h * (f.b + h/2*f.bb)
			}
		}
		if kind.onC {
			for j := range c {
				f := &v.effect[j*q+col]
				c[j] += h * (f.c + h/2*f.cc)
			}
		}
	}
	byβ, level, diff, std := k.jac[0][:n], k.jac[1][:n], k.diff[:n], k.std[:n]
	va, vb, vc := v.a[:n], v.b[:n], v.c[:n]
	for j, s := range S {
		ε, u := E[j], std[j]
		own := va[j] * s
		aS := own * (factor[j] + a[j])
		bj := vb[j]*factor[j] + b[j]
		m := aS*ε + bj*(1-ε) + vc[j]*factor[j] + c[j]
		diff[j] = (w.signal[j] - m) * u
		byβ[j] = (aS*R[j] + own*da[j]) * ε * u
		g := (aS - bj) * u
		if exponential {
			g *= ε
		}
		level[j] = g
	}
	if p == 2 {
		slope := k.jac[2][:n]
		for j, x := range d {
			slope[j] = level[j] * x
		}
	}
	for col, kind := range k.kinds {
		to, h := k.jac[1+p+col][:n], η[col]
		if kind.throughput {
			for j, r := range k.gain[col*n : (col+1)*n] {
				ε := E[j]
				to[j] = r * (va[j]*S[j]*ε + vb[j]*(1-ε) + vc[j]) * std[j]
			}
			continue
		}
		clear(to)
		if kind.onA {
			for j := range to {
				f := &v.effect[j*q+col]
				to[j] = S[j] * E[j] * (f.a + va[j]*β*R[j]*(f.c1+f.c2*β))
			}
		}
		if kind.onB {
			for j := range to {
				f := &v.effect[j*q+col]
				to[j] += (1 - E[j]) * (f.b + h*f.bb)
			}
		}
		if kind.onC {
			for j := range to {
				f := &v.effect[j*q+col]
				to[j] += f.c + h*f.cc
			}
		}
		for j, u := range std {
			to[j] *= u
		}
	}
	size := e.size()
	for x, col := range k.jac {
		w.grad[x] = floats.Dot(col, diff)
		for y := range x + 1 {
			h := floats.Dot(col, k.jac[y])
			w.hess[x*size+y], w.hess[y*size+x] = h, h
		}
	}
	w.chi2 = floats.Dot(diff, diff)
	w.addPriors(β, ψ)
	return w.chi2
}
