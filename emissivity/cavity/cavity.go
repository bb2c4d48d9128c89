// Package cavity returns the effective emissivity of isothermal, diffuse, opaque cavities.
//
//	ε   emissivity of the wall
//	ε_a effective emissivity: radiosity over blackbody exitance, of a place or of the aperture
//	R   radius of the aperture, which is that of the cylinder, L depth
//
// An instrument that looks into a cavity sees its bottom: Cylinder gives the bottom's
// centre, its mean, and the hemispherical value of the aperture. Gouffé's formula covers
// cylinder, cone and sphere by one average over the wall.
//
// A wall that is not isothermal is another job: each function takes the spread of the
// wall's temperature and refuses one that is not 0, since what it does depends on where
// the wall is hotter.
package cavity

import (
	"errors"
	"fmt"
	"math"
)

// Errors of a cavity's description.
var (
	ErrCavity   = errors.New("cavity: description")
	ErrGradient = errors.New("cavity: the wall is not isothermal")
)

func check(ε, depth, spreadK float64) error {
	if !(ε > 0 && ε <= 1) {
		return fmt.Errorf("%w: wall emissivity %g: it must lie above 0 and not above 1", ErrCavity, ε)
	}
	if !(depth > 0) || math.IsInf(depth, 0) {
		return fmt.Errorf("%w: depth over radius %g: it must be positive", ErrCavity, depth)
	}
	if spreadK != 0 {
		return fmt.Errorf("%w: a spread of %g K: the effective emissivity is then no number without the profile; make the wall isothermal or model it", ErrGradient, spreadK)
	}
	return nil
}

// Shape of a cavity for Gouffé's formula.
type Shape int

const (
	CylinderShape Shape = iota // closed at one end by a flat bottom
	ConeShape
	SphereShape
)

// Gouffe returns the effective emissivity of the aperture by Gouffé's formula (A. Gouffé,
// Corrections d'ouverture des corps-noirs artificiels compte tenu des diffusions multiples
// internes, Rev. Opt. 24 (1945) 1; the constants from memory, checked against the sphere's
// exact value),
//
//	ε_a = ε₀(1 + k),  ε₀ = ε/[ε(1 − s/S) + s/S],  k = (1 − ε)(s/S − s/S₀)
//
// s the aperture, S the inner surface with it, S₀ that of a sphere of the same depth.
func Gouffe(shape Shape, ε, depthOverRadius, spreadK float64) (float64, error) {
	if err := check(ε, depthOverRadius, spreadK); err != nil {
		return 0, err
	}
	d := depthOverRadius
	sphere := 1 / (1 + d*d)
	ratio := sphere
	switch shape {
	case CylinderShape:
		ratio = 1 / (2 * (1 + d))
	case ConeShape:
		ratio = 1 / (1 + math.Sqrt(1+d*d))
	}
	return ε / (ε*(1-ratio) + ratio) * (1 + (1-ε)*(ratio-sphere)), nil
}

// Sphere returns the effective emissivity of a sphere of which the fraction f of the
// surface is removed: ε/(ε + (1 − ε)f), exact, the same at every place.
func Sphere(ε, removed, spreadK float64) (float64, error) {
	if err := check(ε, 1, spreadK); err != nil {
		return 0, err
	}
	if !(removed >= 0 && removed < 1) {
		return 0, fmt.Errorf("%w: removed fraction %g of the sphere: from 0 to below 1", ErrCavity, removed)
	}
	return ε / (ε + (1-ε)*removed), nil
}

// Uncertainty returns the standard uncertainty of an effective emissivity f(ε, depth) from
// those of the wall's emissivity and of depth over radius, taken as independent.
func Uncertainty(f func(ε, depth float64) (float64, error), ε, stdEmissivity, depth, stdDepth float64) (float64, error) {
	half := func(a, b, c, d float64) (float64, error) {
		hi, err := f(a, b)
		if err != nil {
			return 0, err
		}
		lo, err := f(c, d)
		return (hi - lo) / 2, err
	}
	byE, err := half(math.Min(ε+stdEmissivity, 1), depth, ε-stdEmissivity, depth)
	if err != nil {
		return 0, err
	}
	byDepth, err := half(ε, depth+stdDepth, ε, depth-stdDepth)
	return math.Hypot(byE, byDepth), err
}
