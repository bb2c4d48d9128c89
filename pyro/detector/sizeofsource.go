package detector

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// SizeOfSource is the size-of-source effect of an instrument, as measured by the direct
// method: its signal before apertures of rising diameter in front of one uniform source,
// in any unit, since only ratios are used. Straight lines between the points. A large
// surface scatters more into the field than the calibration source's aperture did. It is
// immutable and safe for concurrent use.
type SizeOfSource struct{ diameter, signal, std []float64 }

// ErrSizeOfSource is what errors of SizeOfSource wrap.
var ErrSizeOfSource = errors.New("detector: size of source")

// NewSizeOfSource takes a table of aperture diameters (in any one unit of length), signals,
// and their standard uncertainties in the unit of the signals, taken as independent of each
// other; std nil takes the table for exact. A signal that falls with the diameter by more
// than three standard uncertainties of the step is refused. A bad point is a *TableError.
func NewSizeOfSource(diameter, signal, std []float64) (*SizeOfSource, error) {
	if len(diameter) < 2 || len(diameter) != len(signal) || std != nil && len(std) != len(signal) {
		return nil, fmt.Errorf("%w: table of %d diameters, %d signals and %d uncertainties: two or more are needed, as many of each", ErrSizeOfSource, len(diameter), len(signal), len(std))
	}
	s := &SizeOfSource{slices.Clone(diameter), slices.Clone(signal), make([]float64, len(signal))}
	copy(s.std, std)
	for i := range diameter {
		bad := func(reason string) error { return &TableError{i, diameter[i], signal[i], reason, ErrSizeOfSource} }
		switch {
		case !(diameter[i] > 0) || math.IsInf(diameter[i], 0):
			return nil, bad("the diameter must be positive and finite")
		case !(signal[i] > 0) || math.IsInf(signal[i], 0):
			return nil, bad("the signal must be positive and finite")
		case !(s.std[i] >= 0) || math.IsInf(s.std[i], 0):
			return nil, bad(fmt.Sprintf("the standard uncertainty %g must be finite and not negative", s.std[i]))
		case i > 0 && diameter[i] <= diameter[i-1]:
			return nil, bad("the diameter does not rise above the one before: sort the table")
		case i > 0 && signal[i-1]-signal[i] > 3*math.Hypot(s.std[i-1], s.std[i]):
			return nil, bad("a larger aperture gives less signal, by more than three standard uncertainties: did the source drift?")
		}
	}
	return s, nil
}

// Range returns the smallest and the largest diameter measured.
func (s *SizeOfSource) Range() (lo, hi float64) {
	return s.diameter[0], s.diameter[len(s.diameter)-1]
}

// Factor returns by what factor the signal of a target of the given diameter is larger than
// that of the same radiance in the calibration source's aperture,
//
//	f = s(target)/s(calibration)
//
// and its standard uncertainty, which is 0 for two equal diameters: what they share cancels.
// Straight lines between points err to the low side where the effect levels off; measure
// the calibration's aperture itself. A diameter outside the table is an error.
func (s *SizeOfSource) Factor(target, calibration float64) (factor, std float64, err error) {
	t, err := s.weights("target", target)
	if err != nil {
		return 0, 0, err
	}
	c, err := s.weights("calibration source", calibration)
	if err != nil {
		return 0, 0, err
	}
	over, under := s.sum(t), s.sum(c)
	factor = over / under
	for i, u := range s.std {
		std = math.Hypot(std, (t[i]-factor*c[i])/under*u)
	}
	return factor, std, nil
}

// Gain returns Factor as an input by which the signal is multiplied.
func (s *SizeOfSource) Gain(name string, target, calibration float64) (*pyro.Input, error) {
	f, u, err := s.Factor(target, calibration)
	if err != nil {
		return nil, err
	}
	in := &pyro.Input{Name: name, Value: f, Std: u}
	return in, in.Check()
}

// weights returns those of the points in the interpolation at d.
func (s *SizeOfSource) weights(what string, d float64) ([]float64, error) {
	lo, hi := s.Range()
	if !(d >= lo && d <= hi) {
		return nil, fmt.Errorf("%w: %s of diameter %g: the table covers %g to %g; measure it with an aperture of that size", ErrSizeOfSource, what, d, lo, hi)
	}
	w := make([]float64, len(s.diameter))
	i := segment(s.diameter, d)
	f := (d - s.diameter[i]) / (s.diameter[i+1] - s.diameter[i])
	w[i], w[i+1] = 1-f, f
	return w, nil
}

func (s *SizeOfSource) sum(w []float64) float64 {
	sum := 0.0
	for i, v := range s.signal {
		sum += w[i] * v
	}
	return sum
}
