package cavity

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mat"
)

// CylinderValues are effective emissivities of a cylindrical cavity with a flat bottom.
type CylinderValues struct {
	BottomCentre float64
	BottomMean   float64
	Aperture     float64 // hemispherical: what leaves the aperture over what a black one sends
}

// Cylinder solves the integral equation of diffuse radiosity in an open cylinder with a flat
// bottom, to 1e-4 (E. M. Sparrow, L. U. Albers, E. R. G. Eckert, Thermal radiation
// characteristics of cylindrical enclosures, J. Heat Transfer 84 (1962) 73, cited from memory),
//
//	ε_a(x) = ε + (1 − ε) ∫ ε_a(y) dF(x→y)
//
// With R = 1, h the height over the bottom, d the distance of two rings, and
// B = (r² + h² + 1)² − 4r², the elements of dF are
//
//	wall → wall    ½[1 − d(d² + 6)/(d² + 4)^(3/2)] dz
//	wall → bottom  2h(1 + h² − r²)/B^(3/2) r dr
//	bottom → wall  2h(1 + h² − r²)/B^(3/2) dz
//
// by Nyström's method on meshes that narrow towards the corner, each row scaled to the known
// view factor of the whole part.
func Cylinder(ε, depthOverRadius, spreadK float64) (CylinderValues, error) {
	if err := check(ε, depthOverRadius, spreadK); err != nil {
		return CylinderValues{}, err
	}
	depth := depthOverRadius
	wall := newMesh(depth, true)
	bottom := newMesh(1, false)
	nw, nb := len(wall.x), len(bottom.x)
	// wall.x is the height over the bottom; bottom.x the distance from its rim.
	radius := func(i int) float64 { return 1 - bottom.x[i] }
	a := mat.NewDense(nw+nb, nw+nb, nil)
	rhs := mat.NewVecDense(nw+nb, nil)
	fill := func(row, from int, kernel func(j int) float64, weights []float64, whole float64) {
		sum := 0.0
		values := make([]float64, len(weights))
		for j, w := range weights {
			values[j] = kernel(j) * w
			sum += values[j]
		}
		if sum == 0 {
			return
		}
		for j, v := range values {
			a.Set(row, from+j, a.At(row, from+j)-(1-ε)*v*whole/sum)
		}
	}
	for i, h := range wall.x {
		rhs.SetVec(i, ε)
		a.Set(i, i, 1)
		toBottom, toOpening := wallToDisk(h), wallToDisk(depth-h)
		fill(i, 0, func(j int) float64 { return ringToRing(math.Abs(h - wall.x[j])) }, wall.w, 1-toBottom-toOpening)
		fill(i, nw, func(j int) float64 { r := radius(j); return wallBottom(h, r) * r }, bottom.w, toBottom)
	}
	for i := range bottom.x {
		r := radius(i)
		rhs.SetVec(nw+i, ε)
		a.Set(nw+i, nw+i, 1)
		fill(nw+i, 0, func(j int) float64 { return wallBottom(wall.x[j], r) }, wall.w, 1-bottomToDisk(depth, r))
	}
	var x mat.VecDense
	if err := x.SolveVec(a, rhs); err != nil {
		return CylinderValues{}, fmt.Errorf("cavity: the integral equation for ε = %g, L/R = %g: %w", ε, depth, err)
	}
	var out CylinderValues
	sum := 0.0
	for j, h := range wall.x {
		v := wallBottom(h, 0) * wall.w[j]
		sum += v
		out.BottomCentre += v * x.AtVec(j)
		out.Aperture += 2 * x.AtVec(j) * wallToDisk(depth-h) * wall.w[j]
	}
	out.BottomCentre = ε + (1-ε)*out.BottomCentre*(1-bottomToDisk(depth, 0))/sum
	for i, w := range bottom.w {
		r := radius(i)
		out.BottomMean += 2 * r * w * x.AtVec(nw+i)
		out.Aperture += 2 * r * w * x.AtVec(nw+i) * bottomToDisk(depth, r)
	}
	return out, nil
}

// ringToRing is the density of the view factor between rings of the wall a distance d apart.
func ringToRing(d float64) float64 {
	return 0.5 * (1 - d*(d*d+6)/math.Pow(d*d+4, 1.5))
}

// wallBottom is the common kernel of wall and bottom.
func wallBottom(h, r float64) float64 {
	b := r*r + h*h + 1
	return 2 * h * (1 + h*h - r*r) / math.Pow(b*b-4*r*r, 1.5)
}

// wallToDisk is the view factor from a wall element to the end disk at distance h.
func wallToDisk(h float64) float64 {
	return (h*h+2)/(2*math.Sqrt(h*h+4)) - h/2
}

// bottomToDisk is that from a place at radius r of the bottom to the opening at distance h.
func bottomToDisk(h, r float64) float64 {
	s := r*r + h*h
	return 0.5 * (1 - (s-1)/math.Sqrt((s+1)*(s+1)-4*r*r))
}

// mesh is a composite Gauss–Legendre rule on [0, length], panels narrowing towards 0 and,
// with both, towards the other end too.
type mesh struct{ x, w []float64 }

func newMesh(length float64, both bool) mesh {
	const (
		perPanel = 6
		shortest = 1e-4
	)
	edges := []float64{0}
	half := length
	if both {
		half = length / 2
	}
	for e := shortest; e < half; e *= 2 {
		edges = append(edges, e)
		if e > 0.4 { // no panel longer than about half a radius
			for e += 0.4; e < half; e += 0.4 {
				edges = append(edges, e)
			}
			break
		}
	}
	edges = append(edges, half)
	if both {
		for i := len(edges) - 2; i >= 0; i-- {
			edges = append(edges, length-edges[i])
		}
	}
	var m mesh
	for i := 1; i < len(edges); i++ {
		x, w := make([]float64, perPanel), make([]float64, perPanel)
		quad.Legendre{}.FixedLocations(x, w, edges[i-1], edges[i])
		m.x, m.w = append(m.x, x...), append(m.w, w...)
	}
	return m
}
