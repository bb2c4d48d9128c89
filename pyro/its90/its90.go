// Package its90 holds the fixed points of the International Temperature Scale of 1990 that
// radiation thermometers meet, high-temperature fixed points, and the scale above a
// fixed point by the ratio of radiances.
//
//	T₉₀   temperature on the scale, K
//	c₂′   0.014388 m K, the second radiation constant that the scale prescribes
//	c₂    hc/k, the exact one
//	r     S(T)/S(T_ref), the ratio of signals at T and at the fixed point
//
// It needs the standard library and pyro alone; all values are safe for concurrent use.
package its90

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
)

// Point is a fixed point with its standard uncertainty.
type Point struct {
	Name string
	T    pyro.Temperature
	StdK float64 // 0: it defines the scale
}

// Freezing points that define ITS-90 (Preston-Thomas, The International Temperature Scale of
// 1990, Metrologia 27 (1990) 3, Table 1), T₉₀.
var (
	Zinc      = Point{"Zn", 692.677, 0}
	Aluminium = Point{"Al", 933.473, 0}
	Silver    = Point{"Ag", 1234.93, 0}
	Gold      = Point{"Au", 1337.33, 0}
	Copper    = Point{"Cu", 1357.77, 0}
)

// Thermodynamic temperatures of the copper freezing point and of the points of inflection
// of the melting of metal–carbon eutectics (Woolliams et al., Thermodynamic temperature
// assignment to the point of inflection of the melting curve of high-temperature fixed
// points, Phil. Trans. R. Soc. A 374 (2016) 20150044); half the published 95 % uncertainties.
var (
	CopperThermodynamic = Point{"Cu", 1357.80, 0.04}
	CobaltCarbon        = Point{"Co-C", 1597.39, 0.065}
	PlatinumCarbon      = Point{"Pt-C", 2011.43, 0.09}
	RheniumCarbon       = Point{"Re-C", 2747.84, 0.175}
)

// ErrRatio is what errors of this package wrap.
var ErrRatio = errors.New("its90: ratio of radiances")

// A blackbody at T under c₂′ has, up to a factor, the spectrum of one at T·c₂/c₂′ under c₂,
// since both have c₂/λT in common. So the scale needs no Planck's law of its own.
const shift = pyro.C2 / pyro.C2ITS90

// Ratio returns the ratio r of a band's signals at t and at the reference on ITS-90.
func Ratio(b *pyro.Band, t pyro.Temperature, reference Point) float64 {
	return b.Radiance(t*shift) / b.Radiance(reference.T*shift)
}

// Temperature returns T₉₀ from the ratio of a band's signals at T and at the reference, which
// is Ag, Au or Cu where the scale is realised.
func Temperature(b *pyro.Band, ratio float64, reference Point) (pyro.Temperature, error) {
	if !(ratio > 0) || math.IsInf(ratio, 0) {
		return 0, fmt.Errorf("%w: %g to the %s point: it must be positive and finite", ErrRatio, ratio, reference.Name)
	}
	return b.RadianceTemperature(ratio*b.Radiance(reference.T*shift)) / shift, nil
}

// Thermodynamic returns the thermodynamic temperature from the same ratio, by the exact c₂
// and the reference's thermodynamic temperature.
func Thermodynamic(b *pyro.Band, ratio float64, reference Point) (pyro.Temperature, error) {
	if !(ratio > 0) || math.IsInf(ratio, 0) {
		return 0, fmt.Errorf("%w: %g to the %s point: it must be positive and finite", ErrRatio, ratio, reference.Name)
	}
	return b.RadianceTemperature(ratio * b.Radiance(reference.T)), nil
}

// FromITS90 returns the temperature that the exact c₂ gives for the signal ratio that
// realises t90 at the band from the reference, the reference's temperature taken as it is.
// It lies above t90 where t90 lies above the reference: 58 mK at 3000 K from copper at 0.65 µm.
func FromITS90(b *pyro.Band, t90 pyro.Temperature, reference Point) pyro.Temperature {
	return b.RadianceTemperature(Ratio(b, t90, reference) * b.Radiance(reference.T))
}

// ToITS90 is the inverse of FromITS90.
func ToITS90(b *pyro.Band, t pyro.Temperature, reference Point) pyro.Temperature {
	ratio := b.Radiance(t) / b.Radiance(reference.T)
	return b.RadianceTemperature(ratio*b.Radiance(reference.T*shift)) / shift
}

// Uncertainty returns the standard uncertainty in K of a temperature t realised by a ratio,
// from the relative standard uncertainty of the ratio, the standard uncertainty of the
// reference (K), and that of the band's wavelength (relative), taken as independent:
//
//	∂T/∂ln r = T/n,   ∂T/∂T_ref = (T/n)(n_ref/T_ref),   ∂T/∂ln λ = −(T/n)(n − n_ref)
//
// with n = d lnS/d lnT. A wavelength that is off acts at t and at the reference, and is
// the scale's leading term far from it.
func Uncertainty(b *pyro.Band, t pyro.Temperature, reference Point, ratioRel, wavelengthRel float64) float64 {
	n, m := b.LogSlope(t), b.LogSlope(reference.T)
	perLog := float64(t) / n
	return perLog * math.Sqrt(ratioRel*ratioRel+
		math.Pow(m*reference.StdK/float64(reference.T), 2)+
		math.Pow((n-m)*wavelengthRel, 2))
}
