package fit

import (
	"errors"
	"fmt"
	"math"
)

// ErrCalibration is what errors of calibrations wrap.
var ErrCalibration = errors.New("fit: calibration")

// CalibrationError is the error of one row of what a calibration is made from. It wraps
// ErrCalibration, and Err where another error is the reason.
type CalibrationError struct {
	What string // "point", "certificate row", "source spectrum 1, channel"
	Row  int    // from 0
	Err  error
}

func (e *CalibrationError) Error() string {
	return fmt.Sprintf("%v: %s %d: %v", ErrCalibration, e.What, e.Row, e.Err)
}

// Unwrap returns ErrCalibration and the reason.
func (e *CalibrationError) Unwrap() []error { return []error{ErrCalibration, e.Err} }

// badPoint is the error of a CalibrationPoint.
func badPoint(row int, format string, args ...any) error {
	return &CalibrationError{What: "point", Row: row, Err: fmt.Errorf(format, args...)}
}

// checkPoints refuses points with values that none can have, and uncertainties in some of
// the points only.
func checkPoints(points []CalibrationPoint) error {
	if len(points) == 0 {
		return fmt.Errorf("%w: no points", ErrCalibration)
	}
	with, without := 0, -1
	for i, p := range points {
		switch {
		case !(p.T >= 20 && p.T <= 20000):
			return badPoint(i, "temperature %v; is it in °C?", p.T)
		case !(p.Signal > 0) || math.IsInf(p.Signal, 0):
			return badPoint(i, "signal %g must be positive: subtract the dark level first", p.Signal)
		case !(p.StdK >= 0) || !(p.Std >= 0) || math.IsInf(p.StdK, 0) || math.IsInf(p.Std, 0):
			return badPoint(i, "standard uncertainties %g K and %g must be finite and not negative", p.StdK, p.Std)
		}
		if p.StdK > 0 || p.Std > 0 {
			with++
		} else if without < 0 {
			without = i
		}
	}
	if with > 0 && without >= 0 {
		return badPoint(without, "it has no uncertainty, and %d of %d points have one: give one for each, or for none", with, len(points))
	}
	return nil
}
