package fit

import (
	"math"

	"candent/emissivity"
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
		expTo(g, g)
		for j, s := range black {
			m := s * g[j]
			model[j], g[j], v[j] = m, m, rate[j]
		}
		return d
	}
	d = w.effective[:len(black)]
	for j, s := range black {
		n := w.gauss[6*j : 6*j+6]
		lo, hi := math.Exp(θ0+θ1*n[0]), math.Exp(θ0+θ1*n[1])
		a, b := (1-n[2])*lo, n[2]*hi
		ε := a + b
		model[j], g[j] = s*ε, s*ε
		d[j] = (a*n[0] + b*n[1]) / ε
		v[j] = rate[j] + (n[5]*(hi-lo)+θ1*(a*n[3]+b*n[4]))/ε
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
	expTo(black, black)
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

// newtonSolve is jointSolve with Newton's curvature where there is one; jointCov stays
// that of the expected curvature, and bent is how much of the curvature along β is left
// of the expected one. It fails where the point is no minimum's neighbourhood.
func (w *Work) newtonSolve() bool {
	if !w.jointSolve() {
		return false
	}
	w.bent = 1
	if w.newton == ([3]float64{}) {
		return true
	}
	expected, cov := w.jointHess, w.jointCov
	for i, v := range w.newton {
		w.jointHess[i] -= v
	}
	ok := w.jointSolve()
	w.bent = cov[0] / w.jointCov[0]
	w.jointHess, w.jointCov = expected, cov
	return ok
}

// jointSolve solves for the step by a Cholesky factorisation of the scaled matrix and
// sets decrement = gᵀH⁻¹g. It fails where a direction is not fixed.
func (w *Work) jointSolve() bool {
	h := &w.jointHess
	if !(h[0] > 0) || !(h[3] > 0) || !(h[5] > 0) {
		return false
	}
	// order: θ₀, θ₁, β, so that the last pivot is 1/u² of β.
	s0, s1, s2 := 1/math.Sqrt(h[3]), 1/math.Sqrt(h[5]), 1/math.Sqrt(h[0])
	l10 := h[4] * s0 * s1
	d1 := 1 - l10*l10
	if !(d1 > pivotFloor) {
		return false
	}
	p1 := math.Sqrt(d1)
	l20 := h[1] * s0 * s2
	l21 := (h[2]*s1*s2 - l20*l10) / p1
	d2 := 1 - l20*l20 - l21*l21
	if !(d2 > 1e-11) { // closer to degenerate the orthogonal path decides
		return false
	}
	p2 := math.Sqrt(d2)
	y0 := w.jointGrad[1] * s0
	y1 := (w.jointGrad[2]*s1 - l10*y0) / p1
	y2 := (w.jointGrad[0]*s2 - l20*y0 - l21*y1) / p2
	w.decrement = y0*y0 + y1*y1 + y2*y2
	x2 := y2 / p2
	x1 := (y1 - l21*x2) / p1
	x0 := y0 - l10*x1 - l20*x2
	w.jointStep = [3]float64{x2 * s2, x0 * s0, x1 * s1}
	// Inverse, row by row of L⁻¹: C = L⁻ᵀL⁻¹.
	i11 := 1 / p1
	i10 := -l10 * i11
	i22 := 1 / p2
	i21 := -l21 * i11 * i22
	i20 := -(l20 + l21*i10) * i22
	w.jointCov = [6]float64{ // ββ, βθ₀, βθ₁, θ₀θ₀, θ₀θ₁, θ₁θ₁
		i22 * i22 * s2 * s2, i22 * i20 * s2 * s0, i22 * i21 * s2 * s1,
		(1 + i10*i10 + i20*i20) * s0 * s0, (i10*i11 + i20*i21) * s0 * s1, (i11*i11 + i21*i21) * s1 * s1,
	}
	return true
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
