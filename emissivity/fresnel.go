package emissivity

import (
	"fmt"
	"math"
	"math/cmplx"
	"strconv"

	"candent/pyro"
)

// Angle is an angle to the surface's normal, in radians: 45*Degree.
type Angle float64

// Degree is 1°.
const Degree Angle = math.Pi / 180

// String prints the angle in degrees.
func (a Angle) String() string { return strconv.FormatFloat(float64(a/Degree), 'g', 10, 64) + "°" }

// Polarisation is what the instrument sees of the radiation.
type Polarisation int

const (
	Unpolarised Polarisation = iota // the mean of both
	P                               // electric field in the plane of view and normal
	S                               // electric field perpendicular to it
)

// String implements fmt.Stringer.
func (p Polarisation) String() string {
	switch p {
	case Unpolarised:
		return "unpolarised"
	case P:
		return "p-polarised"
	case S:
		return "s-polarised"
	}
	return fmt.Sprintf("Polarisation(%d)", int(p))
}

// view is a direction and a polarisation.
type view struct {
	angle        Angle
	polarisation Polarisation
}

func (v view) err(model string) error {
	if !(v.angle >= 0 && v.angle < 90*Degree) {
		return fmt.Errorf("%w: %s: angle %v to the normal: it must lie from 0° to below 90°; is it in radians, as in 45*Degree?", ErrModel, model, v.angle)
	}
	if v.polarisation < Unpolarised || v.polarisation > S {
		return fmt.Errorf("%w: %s: %v", ErrModel, model, v.polarisation)
	}
	return nil
}

// mean calls f for each polarisation seen and returns the means of what it returns.
func (v view) mean(f func(p Polarisation) (ε, a, b float64)) (ε, a, b float64) {
	if v.polarisation != Unpolarised {
		return f(v.polarisation)
	}
	εs, as, bs := f(S)
	εp, ap, bp := f(P)
	return (εs + εp) / 2, (as + ap) / 2, (bs + bp) / 2
}

// wave is a plane wave in one medium: its normal wavenumber q in units of 2π/λ and its
// admittance η in units of that of free space, with the derivatives by the index ñ:
//
//	q = √(ñ² − sin²),  ηs = q,  ηp = ñ²/q
type wave struct{ q, η, dq, dη complex128 }

func (v view) wave(ñ complex128, p Polarisation) wave {
	sin := math.Sin(float64(v.angle))
	q := ñ
	if sin != 0 { // at the normal √ñ² could lose digits
		q = cmplx.Sqrt(ñ*ñ - complex(sin*sin, 0))
	}
	dq := ñ / q
	if p == P {
		return wave{q, ñ * ñ / q, dq, ñ * (2 - dq*ñ/q) / q}
	}
	return wave{q, q, dq, dq}
}

// free returns the admittance of free space: cos for s, 1/cos for p.
func (v view) free(p Polarisation) float64 {
	cos := math.Cos(float64(v.angle))
	if p == P {
		return 1 / cos
	}
	return cos
}

// absorbed returns 1 − |r|² of a surface of admittance y seen through free space of
// admittance η₀, r = (η₀ − y)/(η₀ + y), in the form without cancellation
//
//	1 − |r|² = 4η₀·Re y/|η₀ + y|²
func absorbed(η0 float64, y complex128) float64 {
	s := complex(η0, 0) + y
	return 4 * η0 * real(y) / (real(s)*real(s) + imag(s)*imag(s))
}

// absorbedSlope returns the change of absorbed for a change dy.
func absorbedSlope(η0 float64, y, dy complex128) float64 {
	s := complex(η0, 0) + y
	d := real(s)*real(s) + imag(s)*imag(s)
	return 4 * η0 * (real(dy) - 2*real(y)*(real(s)*real(dy)+imag(s)*imag(dy))/d) / d
}

// Fresnel is a smooth, opaque, homogeneous surface of refractive index n + ik in air
// or vacuum, by Fresnel's equations: ε = 1 − |r|², which at the normal is
//
//	ε = 4n/((n + 1)² + k²)
//
// (M. Born, E. Wolf, Principles of Optics, the chapters on Fresnel's formulae and on the
// optics of metals; written from memory.) It is the same at every temperature, as far
// as n and k are.
//
// Parameters: none where N and K are given; refractive_index and extinction where both
// are nil: one n and one k for all wavelengths.
type Fresnel struct {
	N, K         pyro.Spectrum // both, or none; Constant makes one of a number
	Angle        Angle         // to the normal
	Polarisation Polarisation
}

// String implements Surface.
func (f Fresnel) String() string {
	if f.Angle == 0 {
		return "Fresnel emissivity at the normal"
	}
	return fmt.Sprintf("Fresnel emissivity at %v, %v", f.Angle, f.Polarisation)
}

// Err implements Surface.
func (f Fresnel) Err() error {
	if (f.N == nil) != (f.K == nil) {
		return fmt.Errorf("%w: Fresnel: n without k, or k without n: give both, Constant(0) for a k of 0, or neither to have them free", ErrModel)
	}
	return view{f.Angle, f.Polarisation}.err("Fresnel")
}

// Parameters implements Model. The bounds take in metals to 10 µm.
func (f Fresnel) Parameters() []Parameter {
	if f.N != nil {
		return nil
	}
	return []Parameter{
		{Name: "refractive_index", Lo: 0.05, Hi: 100, Start: 2},
		{Name: "extinction", Lo: 0, Hi: 200, Start: 3},
	}
}

// Emissivity implements Model.
func (f Fresnel) Emissivity(grad, θ []float64, λ pyro.Wavelength, _ pyro.Temperature) (ε, dT float64) {
	free := f.N == nil
	var ñ complex128
	if free {
		checkLengths(grad, θ, 2)
		ñ = complex(θ[0], θ[1])
	} else {
		checkLengths(grad, θ, 0)
		ñ = complex(f.N.At(λ), f.K.At(λ))
	}
	v := view{f.Angle, f.Polarisation}
	ε, dn, dk := v.mean(func(p Polarisation) (ε, dn, dk float64) {
		w, η0 := v.wave(ñ, p), v.free(p)
		// η is analytic in n + ik: ∂η/∂n = η′, ∂η/∂k = iη′
		return absorbed(η0, w.η), absorbedSlope(η0, w.η, w.dη), absorbedSlope(η0, w.η, 1i*w.dη)
	})
	if free && grad != nil {
		grad[0], grad[1] = dn, dk
	}
	if math.IsNaN(ε) {
		return ε, ε
	}
	return ε, 0
}
