package pyro

import "math"

// polynomials is a smooth function of x as polynomials of degree 7 over equal cells.
type polynomials struct {
	from, by float64 // first x and cell width, which may be negative
	cells    [][terms]float64
}

const (
	terms      = 8
	leastCells = 16
	mostCells  = 4096
)

// newPolynomials interpolates f between from and to with as many cells as keep the error
// within tolerance(f) where the error of interpolation is largest. It returns nil where
// mostCells don't suffice.
func newPolynomials(f func(x float64) float64, from, to float64, tolerance func(y float64) float64) *polynomials {
	for n := leastCells; n <= mostCells; n *= 2 {
		p := &polynomials{from: from, by: (to - from) / float64(n), cells: make([][terms]float64, n)}
		if p.fill(f, tolerance) {
			return p
		}
	}
	return nil
}

// fill interpolates at the Chebyshev nodes of each cell and reports whether f is met at both
// ends and in the middle, which are extremes of the next Chebyshev polynomial.
func (p *polynomials) fill(f, tolerance func(float64) float64) bool {
	var values [terms]float64
	for i := range p.cells {
		for k, z := range chebyshevNodes {
			values[k] = f(p.x(i, z))
		}
		for a := range terms {
			sum := 0.0
			for k, y := range values {
				sum += chebyshevToPower[a][k] * (y - values[0])
			}
			p.cells[i][a] = sum
		}
		p.cells[i][0] += values[0]
		for _, z := range [...]float64{-1, 0, 1} {
			want := f(p.x(i, z))
			if got, _ := p.at(i, z); !(math.Abs(got-want) <= tolerance(want)) {
				return false
			}
		}
	}
	return true
}

// x returns the argument at the coordinate z of a cell, −1 to 1.
func (p *polynomials) x(cell int, z float64) float64 { return p.from + p.by*(float64(cell)+(z+1)/2) }

// locate returns the cell of x, or the nearest one, and the coordinate in it.
func (p *polynomials) locate(x float64) (cell int, z float64) {
	u := (x - p.from) / p.by
	cell = min(max(int(u), 0), len(p.cells)-1)
	return cell, 2*(u-float64(cell)) - 1
}

// at returns the value and its derivative with respect to z.
func (p *polynomials) at(cell int, z float64) (y, slope float64) {
	c := &p.cells[cell]
	z2 := z * z
	z4 := z2 * z2
	y = c[0] + c[1]*z + z2*(c[2]+c[3]*z) + z4*(c[4]+c[5]*z+z2*(c[6]+c[7]*z))
	slope = c[1] + 2*c[2]*z + z2*(3*c[3]+4*c[4]*z) + z4*(5*c[5]+6*c[6]*z+7*c[7]*z2)
	return y, slope
}

// chebyshevNodes are the interpolation nodes on [−1, 1]; chebyshevToPower takes values
// there to the coefficients of powers.
var chebyshevNodes, chebyshevToPower = func() (nodes [terms]float64, toPower [terms][terms]float64) {
	var power [terms][terms]float64 // Chebyshev polynomial k in powers
	power[0][0], power[1][1] = 1, 1
	for k := 2; k < terms; k++ {
		for a := range terms {
			if a > 0 {
				power[k][a] += 2 * power[k-1][a-1]
			}
			power[k][a] -= power[k-2][a]
		}
	}
	for i := range terms {
		angle := math.Pi * (float64(i) + 0.5) / terms
		nodes[i] = math.Cos(angle)
		for k := range terms {
			c := 2.0 / terms * math.Cos(float64(k)*angle)
			if k == 0 {
				c = 1.0 / terms
			}
			for a := range terms {
				toPower[a][i] += c * power[k][a]
			}
		}
	}
	return nodes, toPower
}()
