package fit

import "math"

// gridSteps is the number of steps, equal in ln T, in which the range is searched.
const gridSteps = 96

// basin is a minimum of χ²(T).
type basin struct {
	beta, chi2 float64
	atEnd      bool // the range cuts it off
	atBound    bool // a bound of the emissivity is active in it
	fast       bool // found by the fast path, with θ and the covariance of (β, θ)
	slot       int  // of Work.kept, where a sight's unknowns and covariance are
	theta      [2]float64
	cov        [6]float64
	bent       float64 // how much of the expected curvature along β is there
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
		w.grid[i] = w.gridPoint(β, ψ)
	}
}

func (w *Work) gridPoint(β float64, ψ []float64) gridPoint {
	w.startTheta(β, ψ)
	w.rough = true
	chi2, slope := w.eliminate(β, ψ)
	w.rough = false
	return gridPoint{β, chi2, slope}
}

// levelGround is what two χ² on level ground, as behind a bound, may differ by.
const levelGround = 1e-9

// closer is into how many parts grid steps beside a minimum are cut, since two minima
// may hide in one step.
const closer = 4

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
		case i == 0 && g.slope >= 0 && w.grid[1].chi2 >= g.chi2-levelGround,
			i == last && g.slope <= 0 && w.grid[last-1].chi2 >= g.chi2-levelGround:
			dst = insertBasin(dst, basin{beta: g.beta, chi2: g.chi2, atEnd: true})
		case i < last && w.beside(i):
			next := w.grid[i+1]
			ψ := w.psi[:w.e.p+w.e.q]
			from := g
			for k := 1; k <= closer; k++ {
				to := next
				if k < closer {
					to = w.gridPoint(g.beta+(next.beta-g.beta)*float64(k)/closer, ψ)
				}
				if from.slope < 0 && to.slope > 0 {
					dst = insertBasin(dst, w.refine(from, to))
				}
				from = to
			}
		}
	}
	return dst
}

// beside reports whether the step after grid point i holds a change of the slope's sign,
// or is next to one that does.
func (w *Work) beside(i int) bool {
	for k := max(i-1, 0); k <= min(i+1, len(w.grid)-2); k++ {
		if w.grid[k].slope < 0 && w.grid[k+1].slope > 0 {
			return true
		}
	}
	return false
}

func insertBasin(list []basin, b basin) []basin {
	at := len(list)
	for i, o := range list {
		if math.Abs(o.beta-b.beta) <= 1e-7*b.beta {
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
		if slope == 0 || hi-lo <= 1e-6*β && w.polishes(&β, ψ) || hi-lo <= 1e-14*β {
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
	chi2 := w.at(lo)
	return basin{beta: lo, chi2: chi2, atBound: len(w.active) > 0}
}

// polishes takes β to the minimum's last digits by Gauss–Newton steps in all unknowns at
// once. It reports false where they don't contract, or a bound of the emissivity is active.
func (w *Work) polishes(β *float64, ψ []float64) bool {
	if len(w.active) > 0 {
		return false
	}
	size := w.e.size()
	x, before := *β, math.Inf(1)
	for range 30 {
		w.evaluate(x, ψ, false)
		if !w.factor(0, size) {
			return false
		}
		step := w.step[:size]
		copy(step, w.grad)
		w.backSolve(step, size)
		length := math.Abs(step[0]) / x
		if !(length < 1e-5) || length > 0.5*before && length > 1e-14 {
			return false
		}
		x += step[0]
		for k := range ψ {
			ψ[k] += step[1+k]
		}
		if length <= 1e-14 {
			*β = x
			return true
		}
		before = length
	}
	return false
}
