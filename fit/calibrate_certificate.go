package fit

import (
	"errors"
	"fmt"
	"math"

	"candent/pyro"
	"candent/pyro/detector"
)

// CertificateRow is a row of an indicator's calibration certificate.
type CertificateRow struct {
	Reference pyro.Temperature // of the reference blackbody (its radiance temperature in the band)
	Indicated pyro.Temperature // what the indicator showed
	U         float64          // expanded uncertainty of the difference, K
	K         float64          // its coverage factor, 2 as a rule; the certificate states it
	// Emissivity is what the indicator was set to. A certificate that doesn't say so was made
	// at 1, as a rule: say 1.
	Emissivity float64
	// Aperture is the diameter of the source's opening, in the unit of SizeOfSource. Zero:
	// not stated; the row is then taken as it is.
	Aperture float64
}

// Certificate is what turns an indicator's certificate into calibration points.
type Certificate struct {
	// Indicator names the band and the settings other than the emissivity, which each row
	// states. Its range is where the rows must lie.
	Indicator detector.Indicator
	Rows      []CertificateRow
	// SizeOfSource, where it was measured, brings rows of different apertures to one of
	// diameter Aperture. nil: rows of different apertures are refused.
	SizeOfSource *detector.SizeOfSource
	Aperture     float64
}

// Points returns the rows as calibration points of the indicator's nominal scale: Signal is
// the band radiance in W m⁻² sr⁻¹ m⁻¹ that the indicator takes itself to see when it shows
// the row's temperature with the row's setting, StdK is U/K, and Std what the size of the
// source adds. With Calibrate they give the curve that turns any later indication, through
// detector.Indicator.Radiance with its settings then, into a temperature.
//
// U is taken as independent between rows. Certificates don't say how much of it all rows
// share (the reference's own calibration, its emissivity); averaging over rows makes that part
// too small by up to √rows, so carry it on as an input of the reading where it is known. What
// the size of the source adds is taken as independent too. It is zero in rows
// of the common aperture; the step from there to the target is an input of the reading. A
// bad row is a *CalibrationError.
func (c Certificate) Points() ([]CalibrationPoint, error) {
	if len(c.Rows) == 0 {
		return nil, fmt.Errorf("%w: the certificate has no rows", ErrCalibration)
	}
	points := make([]CalibrationPoint, len(c.Rows))
	for i, row := range c.Rows {
		p, err := c.point(row)
		if err != nil {
			return nil, &CalibrationError{What: "certificate row", Row: i, Err: err}
		}
		points[i] = p
	}
	return points, nil
}

func (c Certificate) point(row CertificateRow) (p CalibrationPoint, err error) {
	switch {
	case !(row.Reference >= pyro.BandMin && row.Reference <= pyro.BandMax):
		return p, fmt.Errorf("reference temperature %v is outside %v to %v; is it in °C?", row.Reference, pyro.BandMin, pyro.BandMax)
	case math.Abs(float64(row.Indicated-row.Reference)) > 0.2*float64(row.Reference):
		return p, fmt.Errorf("%v was shown at %v: more than a fifth apart; are both in one unit, and is the row whole?", row.Indicated, row.Reference)
	case !(row.U > 0) || math.IsInf(row.U, 0):
		return p, fmt.Errorf("expanded uncertainty %g K must be positive", row.U)
	case !(row.K >= 1 && row.K <= 5):
		return p, fmt.Errorf("coverage factor %g must lie in 1 to 5: the certificate states it beside U, 2 as a rule", row.K)
	}
	d := c.Indicator
	d.Emissivity = row.Emissivity
	s, err := d.Radiance(row.Indicated)
	if errors.Is(err, detector.ErrCensored) {
		return p, fmt.Errorf("%w: such a row calibrates nothing; leave it out", err)
	}
	if err != nil {
		return p, err
	}
	p = CalibrationPoint{T: row.Reference, StdK: row.U / row.K, Signal: s}
	switch {
	case row.Aperture == 0 || row.Aperture == c.Aperture:
		return p, nil
	case c.SizeOfSource == nil:
		return p, fmt.Errorf("aperture of diameter %g where others have %g: give the measured size-of-source effect", row.Aperture, c.Aperture)
	}
	f, u, err := c.SizeOfSource.Factor(row.Aperture, c.Aperture)
	if err != nil {
		return p, err
	}
	p.Signal /= f
	p.Std = p.Signal * u / f
	return p, nil
}
