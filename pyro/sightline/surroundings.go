package sightline

import (
	"fmt"

	"candent/pyro"
)

// Surroundings is what an opaque surface reflects: the radiance that falls on it from the
// half-space before it, weighted by view factors.
//
//	L_s(λ) = Σ F_z ε_z(λ) L(λ,T_z)
//
// The zero value is a cold enclosure: nothing shines in.
type Surroundings struct {
	Zones []Zone
	// Remainder is what the part of the half-space sends that the zones' factors leave.
	Remainder Remainder
}

// Remainder names what fills the half-space beside the zones.
type Remainder int

const (
	// Cold: the rest of the half-space sends nothing, such as an open door.
	Cold Remainder = iota
	// Itself: the surface sees more of itself, or pieces like it at the same temperature.
	// Its apparent emissivity is then ε/(1 − (1−ε)F) with F the remainder.
	Itself
	// LastZone: the last zone has no factor of its own and fills the rest.
	LastZone
)

func (r Remainder) String() string {
	return [...]string{"cold", "the surface itself", "the last zone"}[r]
}

// Zone is a part of what the surface sees: a wall, a roof, a row of burners. It has one of
// Temperature, Radiance and Reading.
type Zone struct {
	Name string
	// Factor is the view factor from the surface to the zone, 0 to 1. nil for the only
	// zone, which then fills the half-space, and for the zone that is the remainder.
	Factor *pyro.Input
	// Temperature, in K. Per reading by nature: walls are not the same every minute.
	Temperature *pyro.Input
	// Emissivity of an open zone that is not part of an isothermal enclosure. nil: 1. What
	// comes from inside an isothermal enclosure is blackbody radiation whatever its lining
	// is made of, so a refractory's emissivity must not be put here for a closed furnace.
	Emissivity pyro.Spectrum
	// Radiance is the zone's spectral radiance where it is known as a spectrum.
	Radiance pyro.Spectrum
	// Reading is what a second instrument with the same bands reads of the zone, one for
	// each band, in that instrument's signal; Gain is its signal per radiance. Where both
	// instruments share a calibration, their gains are the same *pyro.Input.
	Reading, Gain []*pyro.Input
}

// Enclosure is an isothermal furnace around the surface. It is black, whatever its lining.
func Enclosure(temperature *pyro.Input) Surroundings {
	return Surroundings{Zones: []Zone{{Name: "enclosure", Temperature: temperature}}}
}

// Empty reports whether nothing shines in, nor the surface on itself.
func (s Surroundings) Empty() bool { return len(s.Zones) == 0 && s.Remainder != Itself }

// Factor returns the view factor to zone i.
func (s Surroundings) Factor(i int, v Value) float64 {
	z := s.Zones[i]
	if z.Factor != nil {
		return v(z.Factor)
	}
	rest := 1.0
	for k, other := range s.Zones {
		if k != i {
			rest -= v.or(other.Factor, 0)
		}
	}
	return rest
}

// Self returns the view factor of the surface to itself or its like.
func (s Surroundings) Self(v Value) float64 {
	if s.Remainder != Itself {
		return 0
	}
	rest := 1.0
	for _, z := range s.Zones {
		rest -= v.or(z.Factor, 0)
	}
	return rest
}

// Check refuses what can't be: factors above 1 in sum, a zone without or with two radiances,
// temperatures that look like °C, readings that aren't one for each of bands, curves that
// don't cover λ.
func (s Surroundings) Check(bands int, λ ...pyro.Wavelength) error {
	sum, without := 0.0, 0
	for i, z := range s.Zones {
		what := fmt.Sprintf("zone %d (%s)", i, z.Name)
		ways := 0
		for _, has := range []bool{z.Temperature != nil, z.Radiance != nil, z.Reading != nil} {
			if has {
				ways++
			}
		}
		if ways != 1 {
			return fmt.Errorf("%w: %s: it needs one of Temperature, Radiance and Reading, and has %d of them", ErrSightline, what, ways)
		}
		if z.Emissivity != nil && z.Temperature == nil {
			return fmt.Errorf("%w: %s: an emissivity goes with a temperature", ErrSightline, what)
		}
		if z.Factor == nil {
			without++
			if s.Remainder != LastZone && len(s.Zones) > 1 || s.Remainder == LastZone && i != len(s.Zones)-1 || s.Remainder == Itself {
				return fmt.Errorf("%w: %s has no view factor", ErrSightline, what)
			}
		} else {
			if err := checkFraction("the view factor of "+what, z.Factor, false); err != nil {
				return err
			}
			sum += z.Factor.Value
		}
		if z.Temperature != nil {
			if err := checkTemperature(what, z.Temperature); err != nil {
				return err
			}
		}
		if z.Reading != nil && (len(z.Reading) != bands || z.Gain != nil && len(z.Gain) != bands) {
			return fmt.Errorf("%w: %s: %d readings and %d gains for %d bands", ErrSightline, what, len(z.Reading), len(z.Gain), bands)
		}
		for k := range z.Reading {
			if err := z.Reading[k].Check(); err != nil {
				return fmt.Errorf("%w: %s: %w", ErrSightline, what, err)
			}
			if z.Gain != nil && !(z.Gain[k] != nil && z.Gain[k].Value > 0) {
				return fmt.Errorf("%w: %s: gain of band %d must be positive", ErrSightline, what, k)
			}
		}
		for _, l := range λ {
			if err := checkSpectrum("emissivity", z.Name, z.Emissivity, l, 0, 1); err != nil {
				return err
			}
			if err := checkSpectrum("radiance", z.Name, z.Radiance, l, 0, 1e30); err != nil {
				return err
			}
		}
	}
	switch {
	case sum > 1+1e-12:
		return fmt.Errorf("%w: the zones' view factors add to %g: they can't exceed 1", ErrSightline, sum)
	case s.Remainder == LastZone && without != 1:
		return fmt.Errorf("%w: the last zone is to be the remainder, so it alone has no view factor", ErrSightline)
	case s.Remainder == Itself && 1-sum >= 1:
		return fmt.Errorf("%w: a surface that sees nothing but itself is a cavity: its emissivity is package cavity's affair", ErrSightline)
	}
	return nil
}
