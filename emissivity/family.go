package emissivity

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
)

// MaxOrder is the highest order of a polynomial in λ. For 1 % of noise on nine channels
// from 0.7 to 1.5 µm at 1600 K, u(T) is 2.8, 10.6, 50 and 370 K for orders 0 to 3 (ln ε a
// polynomial, least squares in 30-digit arithmetic): beyond three nothing is left.
const MaxOrder = 3

// ErrFamily is what every error of a family's description wraps.
var ErrFamily = errors.New("emissivity: family")

// Link says how a family's linear form Σ θₖφₖ(λ) becomes an emissivity.
type Link int

const (
	Identity Link = iota // ε = Σ θₖφₖ
	Exp                  // ε = exp(Σ θₖφₖ)
)

// Family is a curve of few parameters, ε(λ) = link(Σ θₖφₖ(λ)). The zero value is Grey.
type Family struct {
	kind     kind
	order    int
	centre   pyro.Wavelength
	relative bool
	priors   [MaxOrder + 1]Prior
	known    []Known
	err      error
}

type kind int

const (
	grey kind = iota
	polynomial
	exponential
	powerLaw
)

// Grey is one emissivity for all wavelengths.
func Grey() Family { return Family{kind: grey} }

// Polynomial is ε as a polynomial in λ − λc of order 1 to 3.
func Polynomial(order int) Family { return ordered(polynomial, order) }

// Exponential is ln ε as a polynomial in λ − λc of order 1 to 3; it is positive everywhere.
func Exponential(order int) Family { return ordered(exponential, order) }

// PowerLaw is ε = level·(λ/λc)^exponent.
func PowerLaw() Family { return Family{kind: powerLaw, order: 1} }

func ordered(k kind, order int) Family {
	if order < 1 || order > MaxOrder {
		return Family{err: fmt.Errorf("%w: order %d is not among 1 to %d: each order multiplies the uncertainty of the temperature by four to twelve", ErrFamily, order, MaxOrder)}
	}
	return Family{kind: k, order: order}
}

// CentredOn returns the family with its λc at λ. Without it λc is set to the middle of
// the bands where the family is put to use.
func (f Family) CentredOn(λ pyro.Wavelength) Family {
	if !(λ > 0) || math.IsInf(float64(λ), 0) {
		f.err = fmt.Errorf("%w: centre %v", ErrFamily, λ)
		return f
	}
	f.centre = λ
	return f
}

// Centre returns λc, and whether it is set.
func (f Family) Centre() (λ pyro.Wavelength, set bool) { return f.centre, f.centre > 0 }

// Err returns what is wrong with the description, or nil.
func (f Family) Err() error { return f.err }

// Link returns how the linear form becomes an emissivity.
func (f Family) Link() Link {
	if f.kind == exponential || f.kind == powerLaw {
		return Exp
	}
	return Identity
}

// String names the family.
func (f Family) String() string {
	switch f.kind {
	case polynomial:
		return [...]string{"linear", "quadratic", "cubic"}[f.order-1] + " emissivity"
	case exponential:
		return fmt.Sprintf("exponential emissivity of order %d", f.order)
	case powerLaw:
		return "power-law emissivity"
	}
	return "grey emissivity"
}

// Parameters returns the names of θ in order. Wavelengths in them are in µm.
func (f Family) Parameters() []string {
	switch f.kind {
	case polynomial:
		return []string{"level", "slope_per_um", "curvature_per_um2", "cubic_per_um3"}[:f.order+1]
	case exponential:
		return []string{"log_level", "log_slope_per_um", "log_curvature_per_um2", "log_cubic_per_um3"}[:f.order+1]
	case powerLaw:
		return []string{"log_level", "exponent"}
	}
	return []string{"level"}
}

// Coordinate returns d, whose powers are the basis φₖ: (λ − λc)/µm, or ln(λ/λc) for the
// power law. The family must be centred.
func (f Family) Coordinate(λ pyro.Wavelength) float64 {
	if f.kind == powerLaw {
		return math.Log(float64(λ / f.centre))
	}
	return (λ - f.centre).Micrometres()
}

// Basis writes φₖ(λ), one for each parameter, to dst and returns it. The family must
// be centred; dst must be as long as Parameters, or Basis panics.
func (f Family) Basis(dst []float64, λ pyro.Wavelength) []float64 {
	if len(dst) != f.order+1 {
		panic("emissivity: Basis: dst and parameters differ in length")
	}
	d := f.Coordinate(λ)
	v := 1.0
	for k := range dst {
		dst[k] = v
		v *= d
	}
	return dst
}

// Emissivity returns ε(λ) for the parameters θ and, where grad is not nil, writes
// ∂ε/∂θₖ to it. The result is not held to 0 < ε ≤ 1.
func (f Family) Emissivity(grad, θ []float64, λ pyro.Wavelength) float64 {
	var room [MaxOrder + 1]float64
	φ := f.Basis(room[:f.order+1], λ)
	sum := 0.0
	for k := range φ {
		sum += θ[k] * φ[k]
	}
	slope := 1.0
	if f.Link() == Exp {
		sum = math.Exp(sum)
		slope = sum
	}
	if grad != nil {
		for k := range φ {
			grad[k] = slope * φ[k]
		}
	}
	return sum
}
