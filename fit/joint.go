package fit

import (
	"math"

	"candent/emissivity"
	"candent/fit/internal/elementary"
)

// The joint system of β, level and slope in unrolled form: what evaluate does for any
// family, for families of two parameters without shared inputs.

// describe fills, at (β, θ), the model m of each channel, g = ∂m/∂θ₀, v = (∂m/∂β)/g, and
// returns the effective coordinates d = (∂m/∂θ₁)/g.
func (w *Work) describe(β, θ0, θ1 float64) (d []float64) {
	w.blackbody(β)
	e := w.e
	black, rate := w.black, w.rate[:len(w.black)]
	model, g, v := w.model[:len(black)], w.gain[:len(black)], w.slope[:len(black)]
	d = w.coord[:len(black)]
	if e.link == emissivity.Identity {
		for j, s := range black {
			ε := θ0 + θ1*d[j]
			model[j], g[j], v[j] = s*ε, s, ε*rate[j]
		}
		if !e.lines {
			for j, by := range w.dcoord {
				v[j] += θ1 * by
			}
		}
		return d
	}
	if e.lines {
		for j := range black {
			g[j] = θ0 + θ1*d[j]
		}
		elementary.ExpTo(g, g)
		for j, s := range black {
			m := s * g[j]
			model[j], g[j], v[j] = m, m, rate[j]
		}
		return d
	}
	// overBand for two parameters: ln E = θ₀ + θ₁μ + θ₁²v/2 + θ₁³s/6.
	μ, dμ := d, w.dcoord[:len(black)]
	d = w.effective[:len(black)]
	h := θ1 * θ1 / 2
	c := h * θ1 / 3
	for j := range black {
		q := &w.spread[j]
		g[j] = θ0 + θ1*μ[j] + h*q.v + c*q.s
		d[j] = μ[j] + θ1*q.v + h*q.s
		v[j] = rate[j] + θ1*dμ[j] + h*q.dv + c*q.ds
	}
	elementary.ExpTo(g, g)
	for j, s := range black {
		g[j] *= s
		model[j] = g[j]
	}
	return d
}

// joint forms the gradient and the curvature of (β, θ₀, θ₁).
func (w *Work) joint(β, θ0, θ1 float64) {
	if w.rel == 0 && w.e.lines && w.e.link == emissivity.Identity {
		w.jointLines(β, θ0, θ1)
		return
	}
	w.newton, w.jointCost = [3]float64{}, 0
	d := w.describe(β, θ0, θ1)
	var g0, g1, g2, h00, h01, h02, h11, h12, h22 float64
	signal := w.signal[:len(d)]
	model, gain, slope, inverse := w.model[:len(d)], w.gain[:len(d)], w.slope[:len(d)], w.inverse[:len(d)]
	if w.rel > 0 {
		r2 := w.rel * w.rel
		for j, m := range model {
			inverse[j] = 1 / (w.std[j]*w.std[j] + r2*m*m)
		}
	}
	for j, x := range d {
		g, v, iv := gain[j], slope[j], inverse[j]
		u := (signal[j] - model[j]) * iv * g
		q := iv * g * g
		g0 += u * v
		g1 += u
		g2 += u * x
		qv, qx := q*v, q*x
		h00 += qv * v
		h01 += qv
		h02 += qv * x
		h11 += q
		h12 += qx
		h22 += qx * x
	}
	if w.e.p == 1 {
		g2, h02, h12, h22 = 0, 0, 0, 1
	}
	w.jointGrad = [3]float64{g0, g1, g2}
	w.jointHess = [6]float64{h00, h01, h02, h11, h12, h22}
}

// jointLines is joint for lines and ε = θ₀ + θ₁d under given σ, in one pass, with χ² and
// what Newton's method adds to the curvature: Σ (s−m)/σ²·∂²m, where ∂²m/∂β² = mR²(1+e⁻ˣ)
// for R = d lnS/dβ, and ∂²m/∂β∂θ = R ∂m/∂θ.
func (w *Work) jointLines(β, θ0, θ1 float64) {
	e := w.e
	rates := e.rate
	black := w.black[:len(rates)]
	for j, k := range rates {
		black[j] = -k * β
	}
	elementary.ExpTo(black, black)
	var g0, g1, g2, h00, h01, h02, h11, h12, h22, n00, n01, n02, cost float64
	coord, peak := e.coord[:len(rates)], e.peak[:len(rates)]
	signal, inverse, model := w.signal[:len(rates)], w.inverse[:len(rates)], w.model[:len(rates)]
	for j, k := range rates {
		y, x, iv := black[j], coord[j], inverse[j]
		rest := 1 - y // 1 − e^(−kβ)
		if y > 0.5 {
			rest = -math.Expm1(-k * β)
		}
		r := 1 / rest
		g := peak[j] * y * r
		ε := θ0 + θ1*x
		m := g * ε
		model[j] = m
		rate := -k * r
		v := ε * rate
		diff := signal[j] - m
		cost += diff * diff * iv
		u := diff * iv * g
		bent := u * rate
		q := iv * g * g
		g0 += u * v
		g1 += u
		g2 += u * x
		qv, qx := q*v, q*x
		h00 += qv * v
		h01 += qv
		h02 += qv * x
		h11 += q
		h12 += qx
		h22 += qx * x
		n00 += u * v * rate * (2 - rest)
		n01 += bent
		n02 += bent * x
	}
	w.beta = math.NaN() // black holds exponentials
	if e.p == 1 {
		g2, h02, h12, h22, n02 = 0, 0, 0, 1, 0
	}
	w.jointCost = cost
	w.newton = [3]float64{n00, n01, n02}
	w.jointGrad = [3]float64{g0, g1, g2}
	w.jointHess = [6]float64{h00, h01, h02, h11, h12, h22}
}

// linearAt is χ² of the curve at 1/T = β for ε = θ₀ + θ₁d under given σ, in closed form; ok
// is false where a bound of the emissivity is active, or the cancellation in χ² too deep.
func (w *Work) linearAt(β float64) (chi2 float64, ok bool) {
	w.blackbody(β)
	e := w.e
	var a11, a12, a22, b1, b2, c float64
	coord, inverse, signal := w.coord[:e.n], w.inverse[:e.n], w.signal[:e.n]
	for j, m := range w.black[:e.n] {
		d, s := coord[j], signal[j]
		q := inverse[j] * m
		a := q * m
		a11 += a
		a12 += a * d
		a22 += a * d * d
		b1 += q * s
		b2 += q * s * d
		c += inverse[j] * s * s
	}
	θ0, θ1 := b1/a11, 0.0
	if e.p == 2 {
		det := a11*a22 - a12*a12
		if !(det > 1e-9*a11*a22) {
			return 0, false
		}
		θ0, θ1 = (a22*b1-a12*b2)/det, (a11*b2-a12*b1)/det
	}
	chi2 = c - θ0*b1 - θ1*b2
	return chi2, e.within(θ0, θ1) && chi2 > 1e-7*c
}

// newtonSolve is jointSolve with Newton's curvature, where there is one. It fails where the
// point is in no minimum's neighbourhood.
func (w *Work) newtonSolve() bool {
	if w.newton == ([3]float64{}) {
		return w.jointSolve()
	}
	expected := w.jointHess
	for i, v := range w.newton {
		w.jointHess[i] -= v
	}
	ok := w.jointSolve()
	w.jointHess = expected
	return ok
}

// jointSolve solves for the step by LDLᵀ, in the order θ₀, θ₁, β, and sets decrement to
// gᵀH⁻¹g, the squared length of the step in units of u. It fails where a direction is not
// fixed; pivots are judged against their diagonal, so units don't matter.
func (w *Work) jointSolve() bool {
	h, g := &w.jointHess, &w.jointGrad
	if !(h[3] > 0) {
		return false
	}
	r0 := 1 / h[3]
	l1, l2 := h[4]*r0, h[1]*r0
	d1 := h[5] - l1*h[4]
	if !(d1 > pivotFloor*h[5]) {
		return false
	}
	r1 := 1 / d1
	t := h[2] - l2*h[4]
	l3 := t * r1
	d2 := h[0] - l2*h[1] - l3*t
	if !(d2 > 1e-11*h[0]) { // closer to degenerate the orthogonal path decides
		return false
	}
	r2 := 1 / d2
	y0 := g[1]
	y1 := g[2] - l1*y0
	y2 := g[0] - l2*y0 - l3*y1
	w.decrement = y0*y0*r0 + y1*y1*r1 + y2*y2*r2
	x2 := y2 * r2
	x1 := y1*r1 - l3*x2
	w.jointStep = [3]float64{x2, y0*r0 - l1*x1 - l2*x2, x1}
	w.jointVar = r2
	return true
}

// expectedCov returns the inverse of the expected curvature, in the order ββ, βθ₀, βθ₁,
// θ₀θ₀, θ₀θ₁, θ₁θ₁, and how much of the curvature along β is left of the expected one.
func (w *Work) expectedCov() (c [6]float64, bent float64, ok bool) {
	newton := w.jointVar
	h := w.jointHess
	r0 := 1 / h[3]
	l1, l2 := h[4]*r0, h[1]*r0
	r1 := 1 / (h[5] - l1*h[4])
	t := h[2] - l2*h[4]
	l3 := t * r1
	r2 := 1 / (h[0] - l2*h[1] - l3*t)
	m2 := l1*l3 - l2 // row of L⁻¹ for β: (m2, −l3, 1); for θ₁: (−l1, 1)
	c = [6]float64{r2, m2 * r2, -l3 * r2, r0 + l1*l1*r1 + m2*m2*r2, -l1*r1 - l3*m2*r2, r1 + l3*l3*r2}
	return c, r2 / newton, r2 > 0 && r1 > 0
}

// jointChi2 returns χ² at the point of the last joint.
func (w *Work) jointChi2() float64 {
	if w.jointCost > 0 {
		return w.jointCost
	}
	sum := 0.0
	if w.rel == 0 {
		for j, m := range w.model {
			r := w.signal[j] - m
			sum += r * r * w.inverse[j]
		}
		return sum
	}
	for j, m := range w.model {
		sum += deviance(w.signal[j], m, w.std[j], w.rel)
	}
	return sum
}
