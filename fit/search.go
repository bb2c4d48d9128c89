package fit

import "math"

// gridSteps is the number of steps, equal in ln T, in which the range is searched.
const gridSteps = 96

// basin is a minimum of χ²(T).
type basin struct {
	beta, chi2 float64
	atEnd      bool // the range cuts it off
	atBound    bool // a bound of the emissivity is active in it
}

// maxBasins is how many basins a result keeps; the lowest are kept.
const maxBasins = 6

// scan evaluates the curve on the grid, hottest first.
func (w *Work) scan() {
	e := w.e
	ratio := math.Log(e.coldest / e.hottest)
	ψ := w.psi[:e.p+e.q]
	for i := range w.grid {
		β := e.hottest * math.Exp(ratio*float64(i)/gridSteps)
		if i == gridSteps {
			β = e.coldest
		}
		w.startTheta(β, ψ)
		chi2, slope := w.eliminate(β, ψ)
		w.grid[i] = gridPoint{β, chi2, slope}
	}
}

// findBasins scans the range and refines every minimum.
func (w *Work) findBasins(dst []basin) []basin {
	w.scan()
	dst = dst[:0]
	last := len(w.grid) - 1
	for i, g := range w.grid {
		if math.IsInf(g.chi2, 1) {
			continue
		}
		switch {
		case i == 0 && g.slope > 0 && w.grid[1].chi2 >= g.chi2,
			i == last && g.slope < 0 && w.grid[last-1].chi2 >= g.chi2:
			dst = insertBasin(dst, basin{beta: g.beta, chi2: g.chi2, atEnd: true})
		case i < last && g.slope < 0 && w.grid[i+1].slope > 0:
			dst = insertBasin(dst, w.refine(g, w.grid[i+1]))
		}
	}
	return dst
}

func insertBasin(list []basin, b basin) []basin {
	at := len(list)
	for i, o := range list {
		if math.Abs(o.beta-b.beta) <= 1e-9*b.beta {
			return list
		}
		if b.chi2 < o.chi2 && at == len(list) {
			at = i
		}
	}
	if at == maxBasins {
		return list
	}
	if len(list) < maxBasins {
		list = append(list, basin{})
	}
	copy(list[at+1:], list[at:])
	list[at] = b
	return list
}

// refine finds the minimum between two grid points by the zero of the curve's slope
// (regula falsi with the Illinois rule), then polishes it in all unknowns at once.
func (w *Work) refine(a, b gridPoint) basin {
	ψ := w.psi[:w.e.p+w.e.q]
	lo, hi, flo, fhi := a.beta, b.beta, a.slope, b.slope
	side := 0
	for range 60 {
		β := (lo*fhi - hi*flo) / (fhi - flo)
		if !(β > lo && β < hi) {
			β = (lo + hi) / 2
		}
		w.startTheta(β, ψ)
		_, slope := w.eliminate(β, ψ)
		if math.Abs(slope) == 0 || hi-lo <= 1e-6*β {
			lo = β
			break
		}
		if slope < 0 {
			lo, flo = β, slope
			if side < 0 {
				fhi /= 2
			}
			side = -1
		} else {
			hi, fhi = β, slope
			if side > 0 {
				flo /= 2
			}
			side = 1
		}
	}
	return w.polish(lo, ψ)
}

// polish takes the minimum at 1/T ≈ β to the last digits by steps in all unknowns at
// once. Where a bound of the emissivity is active it stays on the curve.
func (w *Work) polish(β float64, ψ []float64) basin {
	w.startTheta(β, ψ)
	chi2, _ := w.eliminate(β, ψ)
	if len(w.active) > 0 {
		return w.polishOnCurve(β, chi2, ψ)
	}
	e := w.e
	size := e.size()
	before := math.Inf(1)
	for range 50 {
		chi2 = w.evaluate(β, ψ, false)
		if !w.factor(0, size) {
			break
		}
		step := w.step[:size]
		copy(step, w.grad)
		w.backSolve(step, size)
		length := math.Abs(step[0]) / β
		if !(length < 1e-3) || length >= before && length < 1e-9 {
			break
		}
		β += step[0]
		for k := range ψ {
			ψ[k] += step[1+k]
		}
		if length <= 1e-15 {
			break
		}
		before = length
	}
	chi2 = w.evaluate(β, ψ, false)
	return basin{beta: β, chi2: chi2}
}

// polishOnCurve narrows a minimum with an active bound by secant steps on the slope.
func (w *Work) polishOnCurve(β, chi2 float64, ψ []float64) basin {
	h := 1e-5 * β
	at := func(β float64) (float64, float64) {
		w.startTheta(β, ψ)
		return w.eliminate(β, ψ)
	}
	_, f := at(β)
	_, g := at(β + h)
	for range 8 {
		next := β - f*h/(g-f)
		if !(math.Abs(next-β) < 1e-2*β) {
			break
		}
		h = β - next
		β, g = next, f
		chi2, f = at(β)
		if f == 0 || math.Abs(h) < 1e-13*β || g == f {
			break
		}
	}
	return basin{beta: β, chi2: chi2, atBound: true}
}
