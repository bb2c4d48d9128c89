package emissivity

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// Surface is what an estimator takes as its assumption on the emissivity. Of its kinds
// this package has three: Family, few parameters and a formula; Model, few parameters and a
// physics; Process, a random curve.
type Surface interface {
	String() string
	Err() error
}

// Prior is what is known of a parameter beforehand: Value with the standard uncertainty
// Std. Set tells a prior from none; Std = 0 fixes the parameter.
type Prior struct {
	Value, Std float64
	Set        bool
}

// Known is an emissivity known at one wavelength, with its standard uncertainty.
type Known struct {
	Wavelength pyro.Wavelength
	Value, Std float64
}

// WithPrior returns the family with the named parameter known as value ± std.
func (f Family) WithPrior(name string, value, std float64) Family {
	if !(std > 0) || math.IsInf(std, 0) {
		return f.fail("prior on %s with standard uncertainty %g: it must be positive; use Fix for a parameter that is exactly known", name, std)
	}
	return f.setPrior(name, Prior{value, std, true})
}

// Fix returns the family with the named parameter held at value.
func (f Family) Fix(name string, value float64) Family {
	return f.setPrior(name, Prior{value, 0, true})
}

func (f Family) setPrior(name string, p Prior) Family {
	if f.err != nil {
		return f
	}
	k := slices.Index(f.Parameters(), name)
	if k < 0 {
		return f.fail("no parameter %q: %v has %v", name, f, f.Parameters())
	}
	if math.IsNaN(p.Value) || math.IsInf(p.Value, 0) {
		return f.fail("%s = %g", name, p.Value)
	}
	f.priors[k] = p
	return f
}

// KnownAt returns the family with its emissivity at λ known as value ± std, a datum
// beside the readings. For families of ln ε it acts on ln ε with std/value, which is the
// same to first order: keep std/value below about 0.2 there.
func (f Family) KnownAt(λ pyro.Wavelength, value, std float64) Family {
	if !(value > 0 && value <= 1) || !(std > 0) || math.IsInf(std, 0) || !(λ > 0) {
		return f.fail("emissivity %g ± %g at %v: it must lie above 0 and not above 1, with a positive standard uncertainty", value, std, λ)
	}
	f.known = append(slices.Clip(f.known), Known{λ, value, std})
	return f
}

// Relative returns the family with its level declared relative: the readings carry an
// unknown common gain, ε may exceed 1, and what is fitted is an amplitude.
func (f Family) Relative() Family {
	f.relative = true
	return f
}

// IsRelative reports whether the level is declared relative.
func (f Family) IsRelative() bool { return f.relative }

// Prior returns what is known of parameter k.
func (f Family) Prior(k int) Prior { return f.priors[k] }

// KnownPoints returns the emissivities known at single wavelengths.
func (f Family) KnownPoints() []Known { return slices.Clone(f.known) }

func (f Family) fail(format string, args ...any) Family {
	if f.err == nil {
		f.err = fmt.Errorf("%w: "+format, append([]any{ErrFamily}, args...)...)
	}
	return f
}
