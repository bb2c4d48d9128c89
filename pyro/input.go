package pyro

import (
	"errors"
	"fmt"
	"math"
)

// Input is something known from elsewhere, with its standard uncertainty: a wall temperature,
// the transmittance of a window, a calibration factor. A Std of 0 means that it is fixed,
// +Inf that it is free. The same *Input in two places is one shared unknown.
type Input struct {
	Name, Unit string
	Value, Std float64
	PerReading bool // it has a new value with each reading; otherwise its error is the same in all
}

// ErrInput is what every error of an Input wraps.
var ErrInput = errors.New("pyro: input")

// Check refuses an input without a name, a value that is not finite, and a standard
// uncertainty that is negative or NaN.
func (i *Input) Check() error {
	switch {
	case i == nil:
		return fmt.Errorf("%w: there is none", ErrInput)
	case i.Name == "":
		return fmt.Errorf("%w: value %g %s has no name: name it, budgets list it", ErrInput, i.Value, i.Unit)
	case math.IsNaN(i.Value) || math.IsInf(i.Value, 0):
		return fmt.Errorf("%w %q: value %g must be finite; for a free one give a start and the standard uncertainty +Inf", ErrInput, i.Name, i.Value)
	case !(i.Std >= 0):
		return fmt.Errorf("%w %q: standard uncertainty %g must be 0 (fixed), positive, or +Inf (free)", ErrInput, i.Name, i.Std)
	}
	return nil
}
