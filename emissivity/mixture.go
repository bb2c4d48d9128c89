package emissivity

import (
	"fmt"
	"slices"

	"candent/pyro"
)

// Mixture is a surface of which the fraction f is one kind and 1 − f another, side by
// side and both at T: scale patches on steel, slag on a stream of metal.
//
//	ε = f·ε_a + (1 − f)·ε_b
//
// (area-weighted mean of the exitances, exact where neither part shines on the other).
// Where the parts resemble each other over the bands, f can't be told. Make one with
// NewMixture.
//
// Parameters: fraction, from 0 to 1, then those of a, named a.…, and those of b, b.…
type Mixture struct {
	a, b       Model
	nA, nB     int
	parameters []Parameter
}

// NewMixture returns the mixture of a and b. Given makes a model of a known curve.
func NewMixture(a, b Model) (Mixture, error) {
	parameters := []Parameter{{Name: "fraction", Lo: 0, Hi: 1, Start: 0.5}}
	m := Mixture{a: a, b: b}
	for _, part := range []struct {
		prefix string
		model  Model
		n      *int
	}{{"a.", a, &m.nA}, {"b.", b, &m.nB}} {
		if part.model == nil {
			return Mixture{}, fmt.Errorf("%w: mixture: part %snil", ErrModel, part.prefix)
		}
		if err := part.model.Err(); err != nil {
			return Mixture{}, fmt.Errorf("%w: mixture: part %s%w", ErrModel, part.prefix, err)
		}
		for _, p := range part.model.Parameters() {
			p.Name = part.prefix + p.Name
			parameters = append(parameters, p)
			*part.n++
		}
	}
	m.parameters = parameters
	return m, nil
}

// String implements Surface.
func (m Mixture) String() string {
	if m.Err() != nil {
		return "mixture"
	}
	return fmt.Sprintf("mixture of %v and %v", m.a, m.b)
}

// Err implements Surface.
func (m Mixture) Err() error {
	if m.a == nil || m.b == nil {
		return fmt.Errorf("%w: mixture of nothing: make it with NewMixture", ErrModel)
	}
	return nil
}

// Parameters implements Model.
func (m Mixture) Parameters() []Parameter { return slices.Clone(m.parameters) }

// Emissivity implements Model.
func (m Mixture) Emissivity(grad, θ []float64, λ pyro.Wavelength, t pyro.Temperature) (ε, dT float64) {
	checkLengths(grad, θ, len(m.parameters))
	var gradA, gradB []float64
	if grad != nil {
		gradA, gradB = grad[1:1+m.nA], grad[1+m.nA:]
	}
	f := θ[0]
	εa, dTa := m.a.Emissivity(gradA, θ[1:1+m.nA], λ, t)
	εb, dTb := m.b.Emissivity(gradB, θ[1+m.nA:], λ, t)
	if grad != nil {
		grad[0] = εa - εb
		for k := range gradA {
			gradA[k] *= f
		}
		for k := range gradB {
			gradB[k] *= 1 - f
		}
	}
	return f*εa + (1-f)*εb, f*dTa + (1-f)*dTb
}
