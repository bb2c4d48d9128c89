package pyro

import "math"

// ratioTable is ln Q of a pair over v = 1/T as polynomials over equal cells: smooth, and
// close to a straight line, it costs one evaluation and no exponential.
type ratioTable struct {
	from, by float64 // first v and cell width, 1/K
	cells    [][tableTerms]float64
	edges    []float64 // ln Q at the cells' ends
	runs     []run     // hottest first
}

// run is a stretch of v over which ln Q rises or falls throughout.
type run struct {
	first, last    int     // cells
	zFirst, zLast  float64 // where it begins in the first and ends in the last
	yFirst, yLast  float64 // ln Q there
	guide          []int32 // cell at equal steps of ln Q from yFirst to yLast
	stepsPerLnUnit float64 // signed
}

const (
	tableTerms    = 8 // degree 7
	leastCells    = 16
	mostCells     = 4096
	tableRounding = 2e-14 // of ln Q, relative to 1 + |ln Q|
)

func tolerance(y float64) float64 { return tableRounding * (1 + math.Abs(y)) }

// newRatioTable tabulates f from v = from to v = to with as many cells as keep it within
// tolerance half-way between the nodes, where the error of interpolation is largest. It
// returns nil where mostCells don't suffice.
func newRatioTable(f func(v float64) float64, from, to float64) *ratioTable {
	for n := leastCells; n <= mostCells; n *= 2 {
		t := &ratioTable{from: from, by: (to - from) / float64(n), cells: make([][tableTerms]float64, n)}
		if t.fill(f) {
			t.edges = make([]float64, n+1)
			for i := range t.cells {
				t.edges[i], _ = t.at(i, -1)
			}
			t.edges[n], _ = t.at(n-1, 1)
			t.findRuns()
			return t
		}
	}
	return nil
}

// fill interpolates f at the Chebyshev nodes of each cell and reports whether it is right
// at both ends and in the middle, which are extremes of the next Chebyshev polynomial.
func (t *ratioTable) fill(f func(v float64) float64) bool {
	var values [tableTerms]float64
	for i := range t.cells {
		for k, z := range chebyshevNodes {
			values[k] = f(t.v(i, z))
		}
		for a := range tableTerms {
			sum := 0.0
			for k, y := range values {
				sum += chebyshevToPower[a][k] * (y - values[0])
			}
			t.cells[i][a] = sum
		}
		t.cells[i][0] += values[0]
		for _, z := range [...]float64{-1, 0, 1} {
			want := f(t.v(i, z))
			if got, _ := t.at(i, z); !(math.Abs(got-want) <= tolerance(want)) {
				return false
			}
		}
	}
	return true
}

// v returns 1/T at the coordinate z of a cell, −1 to 1.
func (t *ratioTable) v(cell int, z float64) float64 {
	return t.from + t.by*(float64(cell)+(z+1)/2)
}

// at returns ln Q and its derivative with respect to z.
func (t *ratioTable) at(cell int, z float64) (y, slope float64) {
	c := &t.cells[cell]
	z2 := z * z
	z4 := z2 * z2
	y = c[0] + c[1]*z + z2*(c[2]+c[3]*z) + z4*(c[4]+c[5]*z+z2*(c[6]+c[7]*z))
	slope = c[1] + 2*c[2]*z + z2*(3*c[3]+4*c[4]*z) + z4*(5*c[5]+6*c[6]*z+7*c[7]*z2)
	return y, slope
}

// logSlope returns d lnQ/d lnT = −v d lnQ/dv.
func (t *ratioTable) logSlope(v float64) float64 {
	u := (v - t.from) / t.by
	cell := min(max(int(u), 0), len(t.cells)-1)
	_, slope := t.at(cell, 2*(u-float64(cell))-1)
	return -v * slope * 2 / t.by
}

// findRuns cuts the table where the slope changes sign, ignoring turns within rounding.
func (t *ratioTable) findRuns() {
	type point struct {
		cell int
		z, y float64
	}
	const looks = 4 // per cell
	points := []point{{0, -1, t.edges[0]}}
	last := len(t.cells) - 1
	for i := range t.cells {
		for k := range looks {
			a := -1 + 2*float64(k)/looks
			b := a + 2.0/looks
			_, sa := t.at(i, a)
			_, sb := t.at(i, b)
			if sa*sb > 0 || sb == 0 && (i < last || k < looks-1) {
				continue
			}
			for range 60 {
				mid := (a + b) / 2
				if _, s := t.at(i, mid); s*sa > 0 {
					a = mid
				} else {
					b = mid
				}
			}
			y, _ := t.at(i, b)
			points = append(points, point{i, b, y})
		}
	}
	points = append(points, point{last, 1, t.edges[last+1]})
	// Keep the turns of a zigzag that are worth more than rounding.
	kept := points[:1:1]
	for _, p := range points[1:] {
		n := len(kept)
		switch {
		case n >= 2 && (p.y-kept[n-1].y)*(kept[n-1].y-kept[n-2].y) >= 0:
			kept[n-1] = p // it goes on the same way
		case math.Abs(p.y-kept[n-1].y) > 2*tolerance(p.y):
			kept = append(kept, p)
		case p == points[len(points)-1]:
			if n == 1 { // a constant ratio
				kept = append(kept, p)
				break
			}
			kept[n-1] = p
		}
	}
	for i := 1; i < len(kept); i++ {
		t.runs = append(t.runs, t.newRun(kept[i-1].cell, kept[i-1].z, kept[i-1].y, kept[i].cell, kept[i].z, kept[i].y))
	}
}

func (t *ratioTable) newRun(first int, zFirst, yFirst float64, last int, zLast, yLast float64) run {
	n := last - first + 1
	r := run{first: first, last: last, zFirst: zFirst, zLast: zLast, yFirst: yFirst, yLast: yLast, guide: make([]int32, n+1)}
	r.stepsPerLnUnit = float64(n) / (yLast - yFirst)
	cell := first
	for k := range r.guide {
		for cell < last && (t.edges[cell+1]-yFirst)*r.stepsPerLnUnit <= float64(k) {
			cell++
		}
		r.guide[k] = int32(cell)
	}
	return r
}

// solve returns the v at which ln Q = y in the run, and d lnQ/d lnT there; ok is false where
// y lies outside the run by more than rounding.
func (t *ratioTable) solve(r *run, y float64) (v, logSlope float64, ok bool) {
	rising := r.stepsPerLnUnit > 0
	if steps := (y - r.yFirst) * r.stepsPerLnUnit; !(steps >= 0 && steps <= float64(len(r.guide)-1)) {
		if y = t.snap(r, y); math.IsNaN(y) {
			return 0, 0, false
		}
	}
	steps := (y - r.yFirst) * r.stepsPerLnUnit
	cell := int(r.guide[min(max(int(steps), 0), len(r.guide)-1)])
	for cell < r.last && y != t.edges[cell+1] && (t.edges[cell+1] < y) == rising {
		cell++
	}
	// The polynomial is nearly straight: start with its series turned round.
	c := &t.cells[cell]
	w := (y - c[0]) / c[1]
	c2, c3 := c[2]/c[1], c[3]/c[1]
	z := w * (1 - w*(c2-w*(2*c2*c2-c3)))
	const margin = 1e-9 // rounding at the cell's ends
	lo, hi := -1.0-margin, 1.0+margin
	if cell == r.first {
		lo = r.zFirst - margin
	}
	if cell == r.last {
		hi = r.zLast + margin
	}
	if !(z >= lo && z <= hi) {
		z = (lo + hi) / 2
	}
	// Newton, halving the bracket where it would leave it. Its error after a step s is of
	// the order of s²·c2 ≪ s².
	var slope float64
	for range 100 {
		var at float64
		at, slope = t.at(cell, z)
		if (at < y) == rising {
			lo = z
		} else {
			hi = z
		}
		next := z - (at-y)/slope
		if !(next >= lo && next <= hi) {
			next = (lo + hi) / 2
		}
		step := next - z
		z = next
		if math.Abs(step) <= 1e-7 {
			break
		}
	}
	v = t.v(cell, z)
	return v, -v * slope * 2 / t.by, true
}

// snap returns y, or the end of the run that it misses within rounding, or NaN.
func (t *ratioTable) snap(r *run, y float64) float64 {
	for _, end := range [...]float64{r.yFirst, r.yLast} {
		if math.Abs(y-end) <= 2*tolerance(end) {
			return end
		}
	}
	return math.NaN()
}

// chebyshevNodes are the interpolation nodes on [−1, 1]; chebyshevToPower takes values
// there to the coefficients of powers.
var chebyshevNodes, chebyshevToPower = func() (nodes [tableTerms]float64, toPower [tableTerms][tableTerms]float64) {
	const m = tableTerms
	var power [m][m]float64 // Chebyshev polynomial k in powers
	power[0][0], power[1][1] = 1, 1
	for k := 2; k < m; k++ {
		for a := range m {
			if a > 0 {
				power[k][a] += 2 * power[k-1][a-1]
			}
			power[k][a] -= power[k-2][a]
		}
	}
	for i := range m {
		angle := math.Pi * (float64(i) + 0.5) / m
		nodes[i] = math.Cos(angle)
		for k := range m {
			c := 2.0 / m * math.Cos(float64(k)*angle)
			if k == 0 {
				c = 1.0 / m
			}
			for a := range m {
				toPower[a][i] += c * power[k][a]
			}
		}
	}
	return nodes, toPower
}()
