package pyro

import (
	"errors"
	"fmt"
	"math"
)

// ShinesIn declares what else than the surface itself sends light into a reading: walls and
// lamps by reflection, flame and gas on the path.
type ShinesIn int

const (
	ShinesInUndeclared ShinesIn = iota // not said; no bound is given
	NothingShinesIn                    // declared: what reaches the detector comes from the surface alone
	SomethingShinesIn                  // declared: walls, lamps, flame or gas add to it; no bound is given
)

// ErrNoBound is what every refusal of a lower bound wraps.
var ErrNoBound = errors.New("pyro: lower bound")

// Bound is a temperature that a surface does not fall below, and what that rests on.
type Bound struct {
	Temperature Temperature
	Channel     int     // that gives it, from 0
	K           float64 // standard uncertainties taken off that channel's reading
}

// String names the bound with its conditions.
func (b Bound) String() string {
	return fmt.Sprintf("at least %.5v (reading less %g u) if ε ≤ 1 and nothing else shines in", b.Temperature, b.K)
}

// LowerBound returns the temperature that a surface of emissivity ε ≤ 1 can't be below: the
// highest of the channels' radiance temperatures, each of its reading less k standard
// uncertainties. Readings and std are absolute mean spectral radiances, W m⁻² sr⁻¹ m⁻¹; what
// a window, a gas or an unfilled field takes away leaves the bound true. Whatever shines in
// breaks it: near hot walls it can lie above the surface's temperature. Hence it is given
// only where the caller declares NothingShinesIn. The chance that the highest of n channels
// is too high by noise is up to n times that of one channel.
func LowerBound(bands []*Band, readings, std []float64, k float64, declared ShinesIn) (Bound, error) {
	switch {
	case declared != NothingShinesIn:
		return Bound{}, fmt.Errorf("%w: ε ≤ 1 bounds the temperature only where nothing else shines in: declare NothingShinesIn if that is so; near hot walls it is not", ErrNoBound)
	case len(bands) == 0 || len(readings) != len(bands) || len(std) != len(bands):
		return Bound{}, fmt.Errorf("%w: %d bands, %d readings, %d standard uncertainties: one of each per channel", ErrNoBound, len(bands), len(readings), len(std))
	case !(k >= 0) || math.IsInf(k, 0):
		return Bound{}, fmt.Errorf("%w: %g standard uncertainties: take a finite number that is not negative, such as 2", ErrNoBound, k)
	}
	bound := Bound{K: k}
	for i, b := range bands {
		switch {
		case b == nil:
			return Bound{}, fmt.Errorf("%w: channel %d has no band", ErrNoBound, i)
		case math.IsNaN(readings[i]) || math.IsInf(readings[i], 0) || !(std[i] >= 0) || math.IsInf(std[i], 0):
			return Bound{}, fmt.Errorf("%w: channel %d: reading %g with standard uncertainty %g: both must be finite, the latter not negative", ErrNoBound, i, readings[i], std[i])
		}
		if least := readings[i] - k*std[i]; least > 0 {
			if t := b.RadianceTemperature(least); t > bound.Temperature {
				bound.Temperature, bound.Channel = t, i
			}
		}
	}
	if bound.Temperature == 0 {
		return Bound{}, fmt.Errorf("%w: no reading is above %g of its standard uncertainties", ErrNoBound, k)
	}
	return bound, nil
}
