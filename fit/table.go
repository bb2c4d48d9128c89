package fit

import (
	"math"

	"candent/emissivity"
	"candent/pyro"
)

// bandTable holds, for wide bands, smooth functions of β = 1/T as polynomials over equal
// cells: what is left of ln S(β) after its rate, and the two-node Gauss rule of the
// measure R·L within the band. A linear emissivity enters with its mean coordinate, which
// is exact; another enters as w₋ε(λ₋) + w₊ε(λ₊), which is exact
// for polynomials in λ up to order 3 and leaves for others the fourth order,
// (σ⁴/24)(κ−1−γ²)·ε⁗ with σ, γ, κ width, skewness and kurtosis of the measure.
type bandTable struct {
	cells     int
	from, by  float64   // first β and cell width
	coef      []float64 // [cell][channel][function][power]
	n         int
	functions int // tableMean or tableFunctions
}

const (
	tableCells     = 128
	tableDegree    = 5
	tableMean      = 2 // ln S + rate·β; mean of the family's coordinate d
	tableFunctions = 5 // and d₋, d₊, w₊ where the mean alone doesn't make ε
)

func newBandTable(e *Estimator) *bandTable {
	t := &bandTable{cells: tableCells, from: e.hottest, by: (e.coldest - e.hottest) / tableCells, n: e.n, functions: tableFunctions}
	if e.link == emissivity.Identity && e.p <= 2 {
		t.functions = tableMean
	}
	t.coef = make([]float64, t.cells*t.n*t.width())
	var toPower [tableDegree + 1][tableDegree + 1]float64
	nodes := chebyshevNodes(&toPower)
	var f [tableFunctions][tableDegree + 1]float64
	for cell := range t.cells {
		for j, i := range e.used {
			for k, z := range nodes {
				β := t.from + t.by*(float64(cell)+(z+1)/2)
				v := gaussRule(e.bands[i], β, e.rate[j])
				v[2] = e.family.Coordinate(pyro.Wavelength(v[2]))
				v[3] = e.family.Coordinate(pyro.Wavelength(v[3]))
				v[1] = (1-v[4])*v[2] + v[4]*v[3]
				for g := range v {
					f[g][k] = v[g]
				}
			}
			row := t.row(cell, j)
			for g := range t.functions {
				for a := range tableDegree + 1 {
					sum := 0.0
					for k := range f[g] {
						sum += toPower[a][k] * f[g][k]
					}
					row[g*(tableDegree+1)+a] = sum
				}
			}
		}
	}
	return t
}

func (t *bandTable) row(cell, channel int) []float64 {
	at := (cell*t.n + channel) * t.width()
	return t.coef[at : at+t.width()]
}

func (t *bandTable) width() int { return t.functions * (tableDegree + 1) }

// locate returns the cell of β and the coordinate in it, −1 to 1.
func (t *bandTable) locate(β float64) (cell int, z float64) {
	u := (β - t.from) / t.by
	cell = min(max(int(u), 0), t.cells-1)
	return cell, 2*(u-float64(cell)) - 1
}

// chebyshevNodes returns the interpolation nodes on [−1, 1] and the matrix that takes
// values there to the coefficients of powers.
func chebyshevNodes(toPower *[tableDegree + 1][tableDegree + 1]float64) (nodes [tableDegree + 1]float64) {
	const m = tableDegree + 1
	var power [m][m]float64 // Chebyshev polynomial k in powers
	power[0][0] = 1
	power[1][1] = 1
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
	return nodes
}

// gaussRule returns ln S + rate·β, an empty place, and λ₋, λ₊, w₊ of the two-node Gauss rule of R·L at 1/T = β.
func gaussRule(b *pyro.Band, β, rate float64) [tableFunctions]float64 {
	λ, w := b.Nodes()
	// Radiances relative to that at the mean keep the sums in range.
	mean := b.Mean()
	logMean := math.Log(pyro.C1L) - 5*math.Log(float64(mean)) - pyro.C2*β/float64(mean) - math.Log1p(-math.Exp(-pyro.C2*β/float64(mean)))
	var m0, m1, m2, m3 float64
	for k := range λ {
		l := float64(λ[k])
		x := pyro.C2 * β / l
		y := w[k] * math.Exp(5*math.Log(float64(mean)/l)-(x-pyro.C2*β/float64(mean))) *
			math.Expm1(-pyro.C2*β/float64(mean)) / math.Expm1(-x)
		d := l - float64(mean)
		m0 += y
		m1 += y * d
		m2 += y * d * d
		m3 += y * d * d * d
	}
	m1, m2, m3 = m1/m0, m2/m0, m3/m0
	v := [tableFunctions]float64{math.Log(m0) + logMean + rate*β, 0, float64(mean), float64(mean), 0.5}
	variance := m2 - m1*m1
	if len(λ) == 1 || variance <= 0 {
		return v
	}
	σ := math.Sqrt(variance)
	half := (m3 - 3*m1*m2 + 2*m1*m1*m1) / (2 * variance * σ) // half the skewness
	root := math.Hypot(1, half)
	v[2] = float64(mean) + m1 + σ*(half-root)
	v[3] = float64(mean) + m1 + σ*(half+root)
	v[4] = (1 - half/root) / 2
	return v
}
