package fit

import (
	"math"
	"slices"

	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
)

// bandTable holds, for wide bands, smooth functions of β = 1/T as polynomials over equal
// cells: what is left of ln S(β) after its rate, and the first three moments of the
// family's coordinate d under the measure R·L. They make the mean of a polynomial in d up to
// order 3 exactly, and that of its exponential to the third order of the band's width
// (overBand).
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
	tableMean      = 2 // ln S + rate·β; mean of d
	tableFunctions = 4 // and the second and third central moments, where the mean alone doesn't make ε
)

// newBandTable compiles the table over a range of β with the responsivities weighted by through(band, λ), which
// counts relative to its value at the band's mean wavelength; nil counts as 1.
func newBandTable(e *Estimator, hottest, coldest float64, through func(i int, λ pyro.Wavelength) float64) *bandTable {
	t := &bandTable{cells: tableCells, from: hottest, by: (coldest - hottest) / tableCells, n: e.n, functions: tableFunctions}
	if e.link == emissivity.Identity && e.p <= 2 && e.model == nil {
		t.functions = tableMean
	}
	t.coef = make([]float64, t.cells*t.n*t.width())
	var toPower [tableDegree + 1][tableDegree + 1]float64
	nodes := chebyshevNodes(&toPower)
	var f [tableFunctions][tableDegree + 1]float64
	seen := make([]weightedBand, e.n)
	for j, i := range e.used {
		seen[j] = e.weightedBand(j, i, through)
	}
	for cell := range t.cells {
		for j := range e.used {
			for k, z := range nodes {
				β := t.from + t.by*(float64(cell)+(z+1)/2)
				v := seen[j].moments(e.family, β, e.rate[j])
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

// weightedBand is a band as its table sees it.
type weightedBand struct {
	λ, w  []float64 // nodes and weights
	mean  float64
	curve *detector.Curve // of S(T), where one was calibrated
	plain []float64       // weights before what the light passes
}

func (e *Estimator) weightedBand(j, i int, through func(int, pyro.Wavelength) float64) weightedBand {
	c := &e.sight.channel[j]
	b := weightedBand{mean: float64(c.centre), curve: c.Curve}
	if c.Curve != nil { // two nodes have the mean and the variance that A and B tell of
		mean, std := c.Curve.Moments()
		b.λ = []float64{float64(mean) - std, float64(mean) + std}
		b.plain = []float64{0.5, 0.5}
	} else {
		λ, w := e.bands[i].Nodes()
		b.plain = w
		for _, l := range λ {
			b.λ = append(b.λ, float64(l))
		}
	}
	b.w = slices.Clone(b.plain)
	if through == nil {
		return b
	}
	middle := through(i, c.centre)
	for k := range b.w {
		if middle != 0 {
			b.w[k] *= through(i, pyro.Wavelength(b.λ[k])) / middle
		}
	}
	return b
}

// moments returns ln S + rate·β, and the mean, second and third central moment of the
// coordinate under R·L at 1/T = β.
func (b *weightedBand) moments(family emissivity.Family, β, rate float64) [tableFunctions]float64 {
	// Radiances relative to that at the mean wavelength keep the sums in range.
	x := pyro.C2 * β / b.mean
	level := math.Log(pyro.C1L) - 5*math.Log(b.mean) - x - math.Log1p(-math.Exp(-x))
	centre := family.Coordinate(pyro.Wavelength(b.mean))
	var m0, m1, m2, m3, plain float64
	for k, l := range b.λ {
		z := pyro.C2 * β / l
		y := math.Exp(5*math.Log(b.mean/l)-(z-x)) * math.Expm1(-x) / math.Expm1(-z)
		plain += b.plain[k] * y
		y *= b.w[k]
		d := family.Coordinate(pyro.Wavelength(l)) - centre
		m0 += y
		m1 += y * d
		m2 += y * d * d
		m3 += y * d * d * d
	}
	if b.curve != nil {
		level = math.Log(b.curve.Signal(pyro.Temperature(1/β))) - math.Log(plain)
	}
	m1, m2, m3 = m1/m0, m2/m0, m3/m0
	return [tableFunctions]float64{math.Log(m0) + level + rate*β, centre + m1, m2 - m1*m1, m3 - 3*m1*m2 + 2*m1*m1*m1}
}

// spread is what a wide band adds to the coordinate: its second and third central moment
// and their derivatives by β.
type spread struct{ v, s, dv, ds float64 }

// overBand returns the mean of ε over a band whose coordinate has mean μ, its derivative by
// β, and writes ∂/∂θₖ to grad. A polynomial's mean is Σ θₖ E[dᵏ]. For its exponential, with pⱼ
// the Taylor coefficients of the polynomial about μ,
//
//	ln E = p₀ + v(p₂ + p₁²/2) + s(p₃ + p₁p₂ + p₁³/6) + O(width⁴)
func (e *Estimator) overBand(grad, θ []float64, μ, dμ float64, q spread) (mean, dβ float64) {
	if e.link == emissivity.Identity {
		power := [4]float64{1, μ, μ*μ + q.v, μ*μ*μ + 3*μ*q.v + q.s}
		slope := [4]float64{0, dμ, 2*μ*dμ + q.dv, 3*μ*μ*dμ + 3*(dμ*q.v+μ*q.dv) + q.ds}
		for k, v := range θ {
			grad[k] = power[k]
			mean += v * power[k]
			dβ += v * slope[k]
		}
		return mean, dβ
	}
	var p [4]float64
	for k := len(θ) - 1; k >= 0; k-- { // Horner, with the derivatives along
		p[3] = p[3]*μ + p[2]
		p[2] = p[2]*μ + p[1]
		p[1] = p[1]*μ + p[0]
		p[0] = p[0]*μ + θ[k]
	}
	a, b := p[2]+p[1]*p[1]/2, p[3]+p[1]*p[2]+p[1]*p[1]*p[1]/6
	mean = math.Exp(p[0] + q.v*a + q.s*b)
	dβ = mean * (p[1]*dμ + q.dv*a + q.ds*b + dμ*(q.v*(3*p[3]+2*p[1]*p[2])+q.s*(2*p[2]*p[2]+3*p[1]*p[3]+p[1]*p[1]*p[2])))
	// ∂pⱼ/∂θₖ = C(k,j) μ^(k−j)
	c0, c1, c2, c3 := 1.0, 0.0, 0.0, 0.0
	for k := range θ {
		grad[k] = mean * (c0 + q.v*(c2+p[1]*c1) + q.s*(c3+c1*p[2]+p[1]*c2+p[1]*p[1]/2*c1))
		c3 = c3*μ + c2
		c2 = c2*μ + c1
		c1 = c1*μ + c0
		c0 *= μ
	}
	return mean, dβ
}
