package pyro

import (
	"fmt"
	"math"
)

// What the trade does first with a reading at a temperature that is known from
// elsewhere (a thermocouple, a drilled hole): it notes the emissivity.

// EmissivityAt returns the emissivity that makes the reading (mean spectral radiance,
// W m⁻² sr⁻¹ m⁻¹) of a surface at the known temperature t, and its standard
// uncertainty from those of the reading and of t (K), taken as independent:
//
//	ε = s/S(t),   u(ε)² = (u(s)/S)² + (ε·n·u(t)/t)²,   n = d lnS/d lnT
//
// It holds where nothing else shines in and the target fills the field. A result above
// 1 by more than its uncertainty says that one of these does not hold; it is not clipped.
func (b *Band) EmissivityAt(t Temperature, stdK, reading, std float64) (ε, u float64, err error) {
	if err := checkReference(t, stdK); err != nil {
		return 0, 0, err
	}
	if math.IsNaN(reading) || math.IsInf(reading, 0) || !(std >= 0) || math.IsInf(std, 0) {
		return 0, 0, fmt.Errorf("pyro: reading %g with standard uncertainty %g: both must be finite, the latter not negative", reading, std)
	}
	s := b.Radiance(t)
	ε = reading / s
	return ε, math.Hypot(std/s, ε*b.LogSlope(t)*stdK/float64(t)), nil
}

// EmissivityRatioAt returns the emissivity ratio ε_short/ε_long that makes the reading
// ratio of a surface at the known temperature t, and its standard uncertainty from the
// relative standard uncertainty of the reading ratio and from that of t (K), taken as
// independent.
func (p *Pair) EmissivityRatioAt(t Temperature, stdK, ratio, ratioRel float64) (e, u float64, err error) {
	if err := checkReference(t, stdK); err != nil {
		return 0, 0, err
	}
	if !(ratio > 0) || math.IsInf(ratio, 0) || !(ratioRel >= 0) || math.IsInf(ratioRel, 0) {
		return 0, 0, fmt.Errorf("%w: reading ratio %g with relative standard uncertainty %g: the first must be positive, the second not negative, both finite", ErrPair, ratio, ratioRel)
	}
	e = ratio / p.Ratio(t)
	return e, e * math.Hypot(ratioRel, p.LogSlope(t)*stdK/float64(t)), nil
}

func checkReference(t Temperature, stdK float64) error {
	if !(t >= BandMin && t <= BandMax) {
		return fmt.Errorf("pyro: reference temperature %v is outside %v to %v; is it in °C?", t, BandMin, BandMax)
	}
	if !(stdK >= 0) || math.IsInf(stdK, 0) {
		return fmt.Errorf("pyro: standard uncertainty %g K of the reference temperature must be finite and not negative", stdK)
	}
	return nil
}
