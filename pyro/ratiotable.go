package pyro

import "math"

// ratioTable is ln Q of a pair over v = 1/T, cut where it turns round.
type ratioTable struct {
	*polynomials
	runs []run // hottest first
}

// run is a stretch of v over which ln Q rises or falls throughout.
type run struct {
	first, last turn
	inverse     *polynomials // v of ln Q; nil where a turn at an end is too sharp for it
}

// turn is a point of the table.
type turn struct {
	cell int
	z, y float64
}

// tableRounding is what a table may miss, relative to 1 + |ln Q| or to v: quadrature and
// rounding are below it.
const tableRounding = 2e-14

func tableTolerance(y float64) float64 { return tableRounding * (1 + math.Abs(y)) }

// newRatioTable tabulates logQ from v = from to v = to; nil where it is too sharp for it.
func newRatioTable(logQ func(v float64) float64, from, to float64) *ratioTable {
	p := newPolynomials(logQ, from, to, tableTolerance)
	if p == nil {
		return nil
	}
	t := &ratioTable{polynomials: p}
	turns := t.turns()
	for i := 1; i < len(turns); i++ {
		r := run{first: turns[i-1], last: turns[i]}
		r.inverse = newPolynomials(func(y float64) float64 { v, _ := t.search(&r, y); return v },
			r.first.y, r.last.y, func(v float64) float64 { return 5 * tableRounding * v })
		t.runs = append(t.runs, r)
	}
	return t
}

// logSlope returns d lnQ/d lnT = −v d lnQ/dv.
func (t *ratioTable) logSlope(v float64) float64 {
	_, slope := t.at(t.locate(v))
	return -v * slope * 2 / t.by
}

// turns returns both ends of the table and the points between at which the slope changes
// sign, but for those within rounding.
func (t *ratioTable) turns() []turn {
	const looks = 4 // per cell
	point := func(cell int, z float64) turn { y, _ := t.at(cell, z); return turn{cell, z, y} }
	last := len(t.cells) - 1
	all := []turn{point(0, -1)}
	for i := range t.cells {
		for k := range looks {
			a := -1 + 2*float64(k)/looks
			b := a + 2.0/looks
			_, before := t.at(i, a)
			if _, after := t.at(i, b); before*after > 0 {
				continue
			}
			for range 60 {
				mid := (a + b) / 2
				if _, s := t.at(i, mid); s*before > 0 {
					a = mid
				} else {
					b = mid
				}
			}
			all = append(all, point(i, b))
		}
	}
	end := point(last, 1)
	kept := all[:1:1]
	for _, p := range append(all[1:], end) {
		n := len(kept)
		switch {
		case n >= 2 && (p.y-kept[n-1].y)*(kept[n-1].y-kept[n-2].y) >= 0:
			kept[n-1] = p // it goes on the same way
		case math.Abs(p.y-kept[n-1].y) > 2*tableTolerance(p.y):
			kept = append(kept, p)
		}
	}
	if n := len(kept); n == 1 {
		kept = append(kept, end) // a ratio that doesn't change
	} else {
		kept[n-1] = end
	}
	return kept
}

// solve returns the v at which ln Q = y in the run and d lnQ/d lnT there; ok is false where
// y lies outside the run by more than rounding.
func (t *ratioTable) solve(r *run, y float64) (v, logSlope float64, ok bool) {
	if (y-r.first.y)*(y-r.last.y) > 0 {
		switch {
		case math.Abs(y-r.first.y) <= 2*tableTolerance(r.first.y):
			y = r.first.y
		case math.Abs(y-r.last.y) <= 2*tableTolerance(r.last.y):
			y = r.last.y
		default:
			return 0, 0, false
		}
	}
	if r.inverse == nil {
		v, logSlope = t.search(r, y)
		return v, logSlope, true
	}
	v, slope := r.inverse.at(r.inverse.locate(y))
	return v, -v * r.inverse.by / (2 * slope), true
}

// search is solve on the table of ln Q itself.
func (t *ratioTable) search(r *run, y float64) (v, logSlope float64) {
	rising := r.last.y > r.first.y
	lo, hi := r.first.cell, r.last.cell
	for lo < hi { // the last cell that begins before y
		mid := (lo + hi + 1) / 2
		if at, _ := t.at(mid, -1); (at < y) == rising {
			lo = mid
		} else {
			hi = mid - 1
		}
	}
	// Newton from the middle, halving the bracket where it would leave it.
	const margin = 1e-9 // for rounding at the cell's ends
	cell, a, b := lo, -1-margin, 1+margin
	if cell == r.first.cell {
		a = r.first.z - margin
	}
	if cell == r.last.cell {
		b = r.last.z + margin
	}
	z := (a + b) / 2
	for range 100 {
		at, slope := t.at(cell, z)
		if (at < y) == rising {
			a = z
		} else {
			b = z
		}
		next := z - (at-y)/slope
		if !(next >= a && next <= b) {
			next = (a + b) / 2
		}
		done := math.Abs(next-z) <= 1e-9 // the error is its square
		if z = next; done {
			break
		}
	}
	_, slope := t.at(cell, z)
	v = t.x(cell, z)
	return v, -v * slope * 2 / t.by
}
