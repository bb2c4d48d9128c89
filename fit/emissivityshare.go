package fit

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// EmissivityShare returns the share of u²(T) that rests on what is assumed of the emissivity
// beforehand; ok is false where there is no u(T), it was not diagnosed, or a process was taken
// in its linear form.
//
// For families and models it is the part of the budget that priors on their parameters and
// points known of ε have; that a family has the right shape is no part of u, and a fixed
// parameter none of it either. For a process it is 1 − u₀²/u², with u₀ the standard
// uncertainty that the readings, what they share and a temperature known beforehand leave if
// the curve is exactly the posterior mean: with J = ∂ ln ε/∂β at the median, V the readings'
// relative variance and R the shared unknowns' relative effects,
//
//	1/u₀²(β) = Jᵀ(V + RRᵀ)⁻¹J
//
// where a level that is declared relative is one more shared unknown, without a prior.
func (r *Result) EmissivityShare() (share float64, ok bool) {
	u, ok := r.Uncertainty()
	if !ok {
		return 0, false
	}
	if o := r.posterior; o != nil {
		if !o.described || !(u > 0) || o.exact < 0 {
			return 0, false
		}
		return max(0, 1-(o.exact/u)*(o.exact/u)), true
	}
	total := 0.0
	for i, v := range r.share {
		total += v
		if i >= firstDatum && i < firstDatum+len(r.e.data) {
			share += v
		}
	}
	if total == 0 {
		return 0, false
	}
	return share / total, true
}

// exactCurveStd returns u₀ of EmissivityShare, in K, at 1/T = β for the reading that the
// posterior was formed of; +Inf where the shared unknowns leave nothing.
func (w *Work) exactCurveStd(β float64) float64 {
	e, p := w.e, w.process
	w.logRatio(p.y, p.dy, β)
	// By the matrix inversion lemma, JᵀV⁻¹J − bᵀ(P + RᵀV⁻¹R)⁻¹b with b = RᵀV⁻¹J and P = 1, but 0
	// for a relative level, whose R is 1.
	information := 0.0
	for j, f := range p.dy {
		information += f * f / p.variance[j]
	}
	q := e.q
	effect := func(j, k int) float64 {
		if k == e.q {
			return 1
		}
		return p.shared[j*e.q+k]
	}
	if p.plan.surface.IsRelative() {
		q++
	}
	if q > 0 {
		inner, b := mat.NewSymDense(q, nil), mat.NewVecDense(q, nil)
		for k := range q {
			for j, f := range p.dy {
				b.SetVec(k, b.AtVec(k)+effect(j, k)*f/p.variance[j])
			}
			for l := range k + 1 {
				v := 0.0
				for j, u := range p.variance {
					v += effect(j, k) * effect(j, l) / u
				}
				if k == l && k < e.q {
					v++
				}
				inner.SetSym(k, l, v)
			}
		}
		var chol mat.Cholesky
		var solved mat.VecDense
		if !chol.Factorize(inner) || chol.SolveVecTo(&solved, b) != nil {
			return math.Inf(1)
		}
		information -= mat.Dot(b, &solved)
	}
	if t := e.assume.Temperature; t.StdK > 0 {
		j := 1 / (β * β * t.StdK)
		information += j * j
	}
	if !(information > 0) {
		return math.Inf(1)
	}
	return 1 / (math.Sqrt(information) * β * β)
}
