package handbook

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"candent/emissivity"
	"candent/pyro"
)

// Spectral is an emissivity at one wavelength or a curve over several.
type Spectral struct {
	Entry
	// Coldest and Hottest are the temperatures of the source. Both 0: not stated there; the
	// note may say more.
	Coldest, Hottest pyro.Temperature
	Wavelengths      []pyro.Wavelength // rising
	Emissivities     []float64
	Std              []float64 // standard uncertainties of the emissivities, 1
}

// String names the material, its state and the temperature.
func (s Spectral) String() string { return s.Entry.String() + ", " + during(s.Coldest, s.Hottest) }

// edge is how far from its first or last wavelength an entry still serves, relative. The
// steepest metal in the visible, gold at 0.6 µm, changes there by an eighth, within its spread.
const edge = 0.02

// At implements pyro.Spectrum: straight lines between the entry's wavelengths, its end values
// within 2 % of its ends, NaN elsewhere.
func (s Spectral) At(λ pyro.Wavelength) float64 { return s.between(s.Emissivities, λ) }

// StdAt is the standard uncertainty of At, likewise. Neighbouring wavelengths err together.
func (s Spectral) StdAt(λ pyro.Wavelength) float64 { return s.between(s.Std, λ) }

// Known returns the emissivity at λ as a datum for a family. Outside the table it is
// ErrOutside, and ErrSpread where the standard uncertainty reaches the value.
func (s Spectral) Known(λ pyro.Wavelength) (emissivity.Known, error) {
	ε, std := s.At(λ), s.StdAt(λ)
	if math.IsNaN(ε) {
		if len(s.Wavelengths) == 0 {
			return emissivity.Known{}, fmt.Errorf("%w: an entry without values: take one from SpectralOf", ErrOutside)
		}
		return emissivity.Known{}, fmt.Errorf("%w: %v at %v: it has %v to %v", ErrOutside, s, λ, s.Wavelengths[0], s.Wavelengths[len(s.Wavelengths)-1])
	}
	if err := known(s, λ, ε, std); err != nil {
		return emissivity.Known{}, err
	}
	return emissivity.Known{Wavelength: λ, Value: ε, Std: std}, nil
}

func (s Spectral) between(values []float64, λ pyro.Wavelength) float64 {
	return interpolate(s.Wavelengths, values, λ, edge)
}

// interpolate returns the value at x of straight lines through the points at the rising axis,
// NaN beyond the ends by more than the relative margin.
func interpolate[X pyro.Wavelength | pyro.Temperature](axis []X, values []float64, x X, margin float64) float64 {
	last := len(axis) - 1
	if last < 0 || !(float64(x) >= float64(axis[0])*(1-margin) && float64(x) <= float64(axis[last])*(1+margin)) {
		return math.NaN()
	}
	i, found := slices.BinarySearch(axis, x)
	switch {
	case found:
		return values[i]
	case i == 0:
		return values[0]
	case i > last:
		return values[last]
	}
	f := float64((x - axis[i-1]) / (axis[i] - axis[i-1]))
	return (1-f)*values[i-1] + f*values[i]
}

// clone returns a copy that shares nothing.
func (s Spectral) clone() Spectral {
	s.Wavelengths, s.Emissivities, s.Std = slices.Clone(s.Wavelengths), slices.Clone(s.Emissivities), slices.Clone(s.Std)
	return s
}

// Join makes one table over λ and T of entries of one material that differ in temperature
// only: each at one temperature, all at the same wavelengths. Its scale's relative standard uncertainty is
// the largest of the entries. Entries that don't join are ErrJoin.
func Join(entries ...Spectral) (emissivity.Tabulated, error) {
	if len(entries) < 2 {
		return emissivity.Tabulated{}, fmt.Errorf("%w: %d of them: it takes two temperatures or more", ErrJoin, len(entries))
	}
	entries = slices.Clone(entries)
	slices.SortStableFunc(entries, func(a, b Spectral) int { return cmp.Compare(a.Coldest, b.Coldest) })
	λ := entries[0].Wavelengths
	var t []pyro.Temperature
	rows := make([][]float64, len(λ))
	std := 0.0
	for _, s := range entries {
		switch {
		case s.Coldest == 0 || s.Coldest != s.Hottest:
			return emissivity.Tabulated{}, fmt.Errorf("%w: %v holds for no single temperature", ErrJoin, s)
		case s.Material != entries[0].Material:
			return emissivity.Tabulated{}, fmt.Errorf("%w: %s and %s", ErrJoin, entries[0].Material, s.Material)
		case len(t) > 0 && t[len(t)-1] == s.Coldest:
			return emissivity.Tabulated{}, fmt.Errorf("%w: two entries at %v", ErrJoin, s.Coldest)
		case !slices.Equal(s.Wavelengths, λ):
			return emissivity.Tabulated{}, fmt.Errorf("%w: %v has other wavelengths", ErrJoin, s)
		}
		t = append(t, s.Coldest)
		for i, ε := range s.Emissivities {
			rows[i] = append(rows[i], ε)
			std = max(std, s.Std[i]/ε)
		}
	}
	return emissivity.NewTabulated(λ, t, rows, std)
}
