package emissivity

import (
	"fmt"
	"math"
	"slices"
)

// declared is a model with what is known of its parameters.
type declared struct {
	Model
	parameters []Parameter
	err        error
}

// Parameters implements Model.
func (d declared) Parameters() []Parameter { return slices.Clone(d.parameters) }

// Err implements Surface.
func (d declared) Err() error { return d.err }

// WithPrior returns the model with the named parameter known as value ± std, in the
// parameter's unit. The value must lie within the bounds; a search begins there.
func WithPrior(m Model, name string, value, std float64) Model {
	if !(std > 0) || math.IsInf(std, 0) {
		return refused(m, fmt.Errorf("%w: prior on %s with standard uncertainty %g: it must be positive; use Fix for a parameter that is exactly known", ErrModel, name, std))
	}
	return declare(m, name, func(p *Parameter) error { return p.know(Prior{value, std, true}) })
}

// Fix returns the model with the named parameter held at value, which must lie within
// the bounds.
func Fix(m Model, name string, value float64) Model {
	return declare(m, name, func(p *Parameter) error { return p.know(Prior{value, 0, true}) })
}

// Between returns the model with the named parameter searched from lo to hi only. A start
// outside moves to the middle; a prior outside is an error.
func Between(m Model, name string, lo, hi float64) Model {
	return declare(m, name, func(p *Parameter) error {
		if !(lo < hi) || math.IsInf(lo, 0) || math.IsInf(hi, 0) {
			return fmt.Errorf("%w: %s between %g and %g: the bounds must be finite and rise", ErrModel, name, lo, hi)
		}
		p.Lo, p.Hi = lo, hi
		if p.Start < lo || p.Start > hi {
			p.Start = lo + (hi-lo)/2
		}
		if p.Prior.Set {
			return p.know(p.Prior)
		}
		return nil
	})
}

// know sets the prior.
func (p *Parameter) know(prior Prior) error {
	if !(prior.Value >= p.Lo && prior.Value <= p.Hi) {
		return fmt.Errorf("%w: %s = %g %s lies outside its bounds %g to %g; is the unit right? Between widens them", ErrModel, p.Name, prior.Value, p.Unit, p.Lo, p.Hi)
	}
	p.Prior, p.Start = prior, prior.Value
	return nil
}

func declare(m Model, name string, change func(*Parameter) error) Model {
	if m == nil {
		return declared{Model: Given{}, err: fmt.Errorf("%w: %s of no model", ErrModel, name)}
	}
	if m.Err() != nil {
		return m
	}
	all := m.Parameters()
	k := slices.IndexFunc(all, func(p Parameter) bool { return p.Name == name })
	if k < 0 {
		names := make([]string, len(all))
		for i, p := range all {
			names[i] = p.Name
		}
		return refused(m, fmt.Errorf("%w: no parameter %q: %v has %v", ErrModel, name, m, names))
	}
	if err := change(&all[k]); err != nil {
		return refused(m, err)
	}
	if d, ok := m.(declared); ok {
		m = d.Model
	}
	return declared{Model: m, parameters: all}
}

func refused(m Model, err error) Model {
	if m == nil {
		m = Given{}
	}
	if m.Err() != nil {
		return m
	}
	return declared{Model: m, parameters: m.Parameters(), err: err}
}
