package fit

import (
	"errors"
	"fmt"
)

// Sentinels for errors.Is.
var (
	// ErrAssume is what every error of an assumption wraps (New).
	ErrAssume = errors.New("fit: assumption")
	// ErrReadings is what every error of a reading wraps.
	ErrReadings = errors.New("fit: readings")
	// ErrRange says that no minimum of χ²(T) lies inside the temperature range.
	ErrRange = errors.New("fit: temperature range")
)

// ReadingError names the channel of a reading that can't be used. It wraps ErrReadings.
type ReadingError struct {
	Channel int // index into the bands
	Name    string
	Value   float64
	Advice  string
}

func (e *ReadingError) Error() string {
	return fmt.Sprintf("fit: readings: channel %d: %s = %g: %s", e.Channel, e.Name, e.Value, e.Advice)
}

func (e *ReadingError) Unwrap() error { return ErrReadings }

// WallsError says that no temperature in the range explains the readings: what the surroundings
// and the path alone give is more than was measured. It wraps ErrReadings.
type WallsError struct {
	Channel         int     // where it is clearest
	Alone, Measured float64 // in the unit of the signal net of the dark level, per gain
}

func (e *WallsError) Error() string {
	return fmt.Sprintf("fit: readings: the walls alone give more than was measured: %.4g against %.4g in channel %d. Are the wall temperature, its view factor or the reflectance taken too high, or the transmittance?", e.Alone, e.Measured, e.Channel)
}

func (e *WallsError) Unwrap() error { return ErrReadings }

// UnitError says that the spectrum's shape fixes a temperature at which the readings would
// need an emissivity that no surface has: their unit is wrong, or the level is relative and
// not declared so. It wraps ErrReadings.
type UnitError struct {
	Level       float64 // mean emissivity that the readings would need
	Temperature float64 // K, that the shape fixes
}

func (e *UnitError) Error() string {
	return fmt.Sprintf("fit: readings: their shape is that of %.0f K, where they would need an emissivity of %.2g: are they in W m⁻² sr⁻¹ m⁻¹ (1e6 times the figure per µm, 1e9 times that per nm)? For a signal in arbitrary units declare the family Relative", e.Temperature, e.Level)
}

func (e *UnitError) Unwrap() error { return ErrReadings }
