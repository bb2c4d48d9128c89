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
