package fit

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
	"candent/pyro/its90"
)

// GainCalibration is the gain of a band whose relative spectral responsivity is known,
//
//	signal = g · S(T),   S the band's mean spectral radiance, W m⁻² sr⁻¹ m⁻¹
//
// so that one point suffices, and Planck's law does the rest.
type GainCalibration struct {
	Gain float64 // unit of the signal per W m⁻² sr⁻¹ m⁻¹
	Std  float64 // standard uncertainty from the points; 0 where they have none

	band    *pyro.Band
	points  []CalibrationPoint
	weights []float64 // of the points' s/S in the gain, sum 1
	scale   float64   // temperatures times this are thermodynamic: 1, or c₂/c₂′ for ITS-90
	chi2    float64
}

// CalibrateGain finds the gain by least squares from one point or more, with uncertainties
// in temperature and signal, u² = u(s)² + (g S n u(T)/T)². Points may stand in any order. It
// takes the band for exact; see GainCalibration.SensitivityToWavelength.
//
// Where no point has an uncertainty all count alike, relative to their signal, and the gain
// has none.
func CalibrateGain(points []CalibrationPoint, band *pyro.Band) (*GainCalibration, error) {
	return calibrateGain(points, band, 1)
}

// FixedPoint is a signal at a fixed point, with the signal's standard uncertainty. That of
// the point's temperature is the realisation's, in Point.StdK.
type FixedPoint struct {
	Point       its90.Point
	Signal, Std float64
}

// CalibrateITS90 realises the scale above silver with a band from one fixed point or more,
// by least squares: what the calibration reads is T₉₀ (with the scale's own c₂). The scale
// defines itself by any one of Ag, Au and Cu; several average their realisations, and χ²
// shows whether they agree.
func CalibrateITS90(points []FixedPoint, band *pyro.Band) (*GainCalibration, error) {
	list := make([]CalibrationPoint, len(points))
	for i, p := range points {
		list[i] = CalibrationPoint{T: p.Point.T, StdK: p.Point.StdK, Signal: p.Signal, Std: p.Std}
	}
	// A blackbody at T under c₂′ has, up to a factor, the spectrum of one at T·c₂/c₂′ under c₂.
	return calibrateGain(list, band, pyro.C2/pyro.C2ITS90)
}

func calibrateGain(points []CalibrationPoint, band *pyro.Band, scale float64) (*GainCalibration, error) {
	if band == nil {
		return nil, fmt.Errorf("%w: a gain needs the band, whose responsivity is known", ErrCalibration)
	}
	if err := checkPoints(points); err != nil {
		return nil, err
	}
	for i, p := range points {
		if err := band.Check(p.T); err != nil {
			return nil, &CalibrationError{What: "point", Row: i, Err: err}
		}
		if !(p.T >= pyro.BandMin && p.T <= pyro.BandMax) {
			return nil, badPoint(i, "temperature %v is outside %v to %v; is it in °C?", p.T, pyro.BandMin, pyro.BandMax)
		}
	}
	c := &GainCalibration{band: band, points: slices.Clone(points), weights: make([]float64, len(points)), scale: scale}
	n := len(points)
	model, rel := make([]float64, n), make([]float64, n)
	for i, p := range points {
		model[i] = band.Radiance(c.thermodynamic(p.T))
		c.Gain += p.Signal / model[i] / float64(n)
	}
	// A signal's uncertainty is weighed against the model, so the fit is repeated with its result.
	for range 3 {
		sum := 0.0
		for i, p := range points {
			rel[i] = math.Hypot(p.Std/(c.Gain*model[i]), band.LogSlope(c.thermodynamic(p.T))*p.StdK/float64(p.T))
			if c.weights[i] = 1; c.hasStd() {
				c.weights[i] = 1 / (rel[i] * rel[i])
			}
			sum += c.weights[i]
		}
		c.Gain = 0
		for i, p := range points {
			c.weights[i] /= sum
			c.Gain += c.weights[i] * p.Signal / model[i]
		}
	}
	for i, p := range points {
		d := p.Signal/(c.Gain*model[i]) - 1
		if rel[i] > 0 {
			d /= rel[i]
		}
		c.chi2 += d * d
		c.Std = math.Hypot(c.Std, c.Gain*c.weights[i]*rel[i])
	}
	return c, nil
}

func (c *GainCalibration) hasStd() bool { return c.points[0].StdK > 0 || c.points[0].Std > 0 }

func (c *GainCalibration) thermodynamic(t pyro.Temperature) pyro.Temperature {
	return t * pyro.Temperature(c.scale)
}

// Input returns the gain as an input of that name.
func (c *GainCalibration) Input(name string) *pyro.Input {
	return &pyro.Input{Name: name, Value: c.Gain, Std: c.Std}
}

// ChiSquared returns the sum of squared departures of the points in units of their
// uncertainty (relative to the signal where they have none), and its degrees of freedom.
func (c *GainCalibration) ChiSquared() (chi2 float64, degreesOfFreedom int) {
	return c.chi2, len(c.points) - 1
}

// Departures returns by how much the temperature read at each point's signal lies above the
// point's own, in K.
func (c *GainCalibration) Departures() []float64 {
	out := make([]float64, len(c.points))
	for i, p := range c.points {
		out[i] = float64(c.temperature(p.Signal) - p.T)
	}
	return out
}

// Signal returns the signal of a blackbody at t.
func (c *GainCalibration) Signal(t pyro.Temperature) float64 {
	return c.Gain * c.band.Radiance(c.thermodynamic(t))
}

func (c *GainCalibration) temperature(signal float64) pyro.Temperature {
	return c.band.RadianceTemperature(signal/c.Gain) / pyro.Temperature(c.scale)
}

// Read returns the temperature of a blackbody that gives the signal, with the standard
// uncertainty of gain and signal. Extrapolated says that it lies beyond the points, where
// the responsivity and the detector's linearity carry it.
func (c *GainCalibration) Read(signal, std float64) (Reading, error) {
	if !(signal > 0) || math.IsInf(signal, 0) || !(std >= 0) || math.IsInf(std, 0) {
		return Reading{}, fmt.Errorf("%w: signal %g ± %g: it must be positive, and both finite", ErrReadings, signal, std)
	}
	t := c.temperature(signal)
	if err := c.band.Check(t); err != nil {
		return Reading{}, fmt.Errorf("%w: signal %g: %w", ErrReadings, signal, err)
	}
	r := Reading{T: t}
	lo, hi := c.points[0].T, c.points[0].T
	for _, p := range c.points {
		lo, hi = min(lo, p.T), max(hi, p.T)
	}
	r.Extrapolated = beyond(t, lo, hi)
	r.StdK = float64(t) / c.band.LogSlope(c.thermodynamic(t)) * math.Hypot(std/signal, c.Std/c.Gain)
	return r, nil
}

// SensitivityToWavelength returns ∂T/∂λ in K per m: what a band assumed too far towards
// long wavelengths as a whole adds to the temperature t that is read, when the gain was
// found with the same wrong band,
//
//	∂T/∂λ = (T/n)·( Σ wᵢ h(Tᵢ) − h(T) ),   h = ∂ lnS/∂λ
//
// It vanishes at a single calibration point. Both the measurement and the calibration are in
// it: the band's own SensitivityToWavelength, alone, would say too much near the points.
func (c *GainCalibration) SensitivityToWavelength(t pyro.Temperature) float64 {
	h := func(t pyro.Temperature) float64 {
		at := c.thermodynamic(t)
		return -c.band.SensitivityToWavelength(at) * c.band.LogSlope(at) / float64(at)
	}
	sum := -h(t)
	for i, p := range c.points {
		sum += c.weights[i] * h(p.T)
	}
	return float64(t) / c.band.LogSlope(c.thermodynamic(t)) * sum
}
