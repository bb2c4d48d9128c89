package handbook

import (
	"errors"
	"fmt"

	"candent/pyro"
)

// Direction in which a surface was looked at.
type Direction int

const (
	Unstated      Direction = iota // the text read doesn't say
	Normal                         // along the normal
	Hemispherical                  // over the half-space
)

// String implements fmt.Stringer.
func (d Direction) String() string {
	switch d {
	case Normal:
		return "normal"
	case Hemispherical:
		return "hemispherical"
	}
	return "direction not stated"
}

// Mark says how a value came here.
type Mark int

const (
	Data       Mark = iota // read in a text that names the published source
	FromMemory             // recalled: a wide prior and no check value
)

// String implements fmt.Stringer.
func (m Mark) String() string {
	if m == Data {
		return "data"
	}
	return "from memory"
}

// Entry is what spectral and total values have in common.
type Entry struct {
	Material  string
	State     string // of the surface
	Direction Direction
	Source    string
	Spread    string // where the standard uncertainties come from
	Mark      Mark
	Note      string // or empty
}

// String names the material and its state.
func (e Entry) String() string { return e.Material + ", " + e.State }

// during is a range of temperature in words.
func during(coldest, hottest pyro.Temperature) string {
	switch {
	case hottest == 0:
		return "temperature not stated"
	case coldest == hottest:
		return coldest.String()
	}
	return fmt.Sprintf("%g to %v", coldest.Kelvin(), hottest)
}

// Errors of this package.
var (
	ErrUnknown = errors.New("handbook: no such material")
	ErrOutside = errors.New("handbook: outside the table")
	ErrSpread  = errors.New("handbook: the value says no more than that the emissivity is small")
	ErrJoin    = errors.New("handbook: entries that don't join")
)

// known refuses a value of e at a place whose standard uncertainty reaches it.
func known(e, place fmt.Stringer, value, std float64) error {
	if std >= value {
		return fmt.Errorf("%w: %v at %v: %.3g ± %.2g; measure it, or take it as below %.2g", ErrSpread, e, place, value, std, value+2*std)
	}
	return nil
}
