package handbook

import (
	"fmt"
	"math"
	"slices"

	"candent/emissivity"
	"candent/pyro"
)

// Total is an emissivity over the whole spectrum of a blackbody at the surface's own
// temperature. It belongs into heat balances. It is not the emissivity of any band.
type Total struct {
	Entry
	// Temperatures rise. Empty: one value, its temperature not stated in the source.
	Temperatures []pyro.Temperature
	Emissivities []float64
	Std          []float64 // standard uncertainties of the emissivities, 1
}

// String names the material, its state and the temperatures.
func (e Total) String() string {
	if len(e.Temperatures) == 0 {
		return e.Entry.String() + ", " + during(0, 0)
	}
	return e.Entry.String() + ", " + during(e.Temperatures[0], e.Temperatures[len(e.Temperatures)-1])
}

// warm is how far beyond its first or last temperature an entry still serves, relative: a
// clean metal's total emissivity, about ∝ T, changes there by less than its spread.
const warm = 0.05

// Emissivity returns the total emissivity at t with its standard uncertainty: straight lines
// between the entry's temperatures, its end values within 5 % of its ends, NaN elsewhere.
func (e Total) Emissivity(t pyro.Temperature) (ε, std float64) {
	if len(e.Temperatures) == 0 && len(e.Emissivities) == 1 && t > 0 {
		return e.Emissivities[0], e.Std[0]
	}
	return interpolate(e.Temperatures, e.Emissivities, t, warm), interpolate(e.Temperatures, e.Std, t, warm)
}

// greyStd is the standard uncertainty of a spectral emissivity for which a total one is
// taken, ε(1 − ε): a bright surface may be twice as bright in another band, a dark one can't
// be much darker. A judgement; tungsten, from 1600 to 2800 K, has at 0.65 µm 1.3 to 2.2 times
// its total emissivity, at 1 µm 1.1 to 1.9 times, at 3 µm 0.58 times.
func greyStd(ε float64) float64 { return ε * (1 - ε) }

// AssumeGrey takes the total emissivity at t for the one at λ, as if the surface were grey.
// Nearly no surface is: a clean metal's emissivity at 1 µm is up to twice its total one,
// beyond 3 µm it is lower; white oxides do the reverse and worse. The standard uncertainty
// of what is returned holds ε(1 − ε) for that, a judgement, beside the entry's own; the note
// says so and belongs into the report. Prefer any Spectral, however old.
//
// Errors: ErrOutside for a temperature that the entry hasn't, ErrSpread where its standard
// uncertainty reaches the value.
func (e Total) AssumeGrey(λ pyro.Wavelength, t pyro.Temperature) (k emissivity.Known, note string, err error) {
	if !(λ > 0) || math.IsInf(float64(λ), 0) {
		return k, "", fmt.Errorf("%w: wavelength %v", ErrOutside, λ)
	}
	ε, std := e.Emissivity(t)
	if math.IsNaN(ε) {
		return k, "", fmt.Errorf("%w: %v at %v", ErrOutside, e, t)
	}
	std = math.Hypot(std, greyStd(ε))
	if err := known(e, t, ε, std); err != nil {
		return k, "", err
	}
	at := fmt.Sprintf("at %v", t)
	if len(e.Temperatures) == 0 {
		at = "at a temperature that is not stated"
	}
	note = fmt.Sprintf("the emissivity at %v is not known: the total emissivity of %v %s (%s, %v) stands for it as if the surface were grey, which it is not; %.2g ± %.2g", λ, e.Entry, at, e.Direction, e.Mark, ε, std)
	return emissivity.Known{Wavelength: λ, Value: ε, Std: std}, note, nil
}

// clone returns a copy that shares nothing.
func (e Total) clone() Total {
	e.Temperatures, e.Emissivities, e.Std = slices.Clone(e.Temperatures), slices.Clone(e.Emissivities), slices.Clone(e.Std)
	return e
}
