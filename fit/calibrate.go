package fit

import (
	"fmt"
	"math"
	"slices"

	"candent/fit/internal/lsq"
	"candent/pyro"
	"candent/pyro/detector"
)

// CalibrationPoint is a signal at a known temperature. StdK and Std are standard
// uncertainties of the temperature (K) and of the signal, independent of each other and of
// other points'.
type CalibrationPoint struct {
	T           pyro.Temperature
	StdK        float64
	Signal, Std float64
}

// Calibration is a band's calibration curve with its covariance.
type Calibration struct {
	Curve  detector.Curve
	points []CalibrationPoint
	std    []float64 // of each point, in K
	free   int       // parameters fitted: C alone, or A, B, C
	cov    []float64 // of the fitted ones, scaled by a0 and t0
	a0, t0 float64
	chi2   float64
}

// Calibrate fits the Sakuma–Hattori equation to points: exactly through three, by least
// squares with uncertainties in both variables beyond (each point weighs by
// u² = u(T)² + (u(S)/S′)²). One or two points need the band, from which A and B are
// predicted; then only C is fitted. Points must rise in temperature and signal.
//
// Where no point has an uncertainty all count alike, and the curve has no covariance.
func Calibrate(points []CalibrationPoint, band *pyro.Band) (*Calibration, error) {
	c := &Calibration{points: slices.Clone(points), free: 3}
	if err := c.check(band); err != nil {
		return nil, err
	}
	if len(points) < 3 {
		c.free = 1
	}
	c.start(band)
	// Weights need the slope of the curve, so the fit is repeated with those of its result.
	for range 3 {
		c.weigh()
		if err := c.fit(); err != nil {
			return nil, err
		}
	}
	return c, nil
}

func (c *Calibration) check(band *pyro.Band) error {
	if err := checkPoints(c.points); err != nil {
		return err
	}
	if len(c.points) < 3 && band == nil {
		return fmt.Errorf("%w: %d points: with fewer than three the band is needed, to predict A and B from", ErrCalibration, len(c.points))
	}
	for i, p := range c.points[1:] {
		if before := c.points[i]; p.T <= before.T || p.Signal <= before.Signal {
			return badPoint(i+1, "%v with signal %g does not rise above %v with %g: sort the points; drop one that contradicts", p.T, p.Signal, before.T, before.Signal)
		}
	}
	return nil
}

// start predicts A, B and C.
func (c *Calibration) start(band *pyro.Band) {
	first, last := c.points[0], c.points[len(c.points)-1]
	if band != nil {
		c.Curve.A, c.Curve.B = detector.Predict(band)
	} else { // the mean wavelength that Wien's law gives for the ends
		c.Curve.A = pyro.C2 * (1/float64(first.T) - 1/float64(last.T)) / math.Log(last.Signal/first.Signal)
	}
	middle := c.points[len(c.points)/2]
	c.Curve.C = middle.Signal * math.Expm1(pyro.C2/(c.Curve.A*float64(middle.T)+c.Curve.B))
}

func (c *Calibration) weigh() {
	c.std = c.std[:0]
	for _, p := range c.points {
		u := math.Hypot(p.StdK, p.Std/c.Curve.Slope(p.T))
		if u == 0 {
			u = 1
		}
		c.std = append(c.std, u)
	}
}

// gradient writes ∂T(S)/∂(ln C, A/A₀, B/(A₀T₀)), scaled so that all are in K of order T.
func (c *Calibration) gradient(dst []float64, signal float64) {
	k := c.Curve
	log := math.Log1p(k.C / signal)
	t := pyro.C2/(k.A*log) - k.B/k.A
	dst[0] = -pyro.C2 / (k.A * log * log) * (k.C / signal) / (1 + k.C/signal)
	if len(dst) > 1 {
		dst[1] = -t / k.A * c.a0
		dst[2] = -1 / k.A * c.a0 * c.t0
	}
}

func (c *Calibration) fit() error {
	n, p := len(c.points), c.free
	solver, err := lsq.New(n, p, lsq.Settings{})
	if err != nil {
		return fmt.Errorf("%w: %w", ErrCalibration, err)
	}
	from := c.Curve
	c.a0, c.t0 = from.A, float64(c.points[0].T)
	set := func(θ []float64) {
		c.Curve = from
		c.Curve.C = from.C * math.Exp(θ[0])
		if p > 1 {
			c.Curve.A = from.A + c.a0*θ[1]
			c.Curve.B = from.B + c.a0*c.t0*θ[2]
		}
	}
	f := func(r, jac, θ []float64) {
		set(θ)
		for i, point := range c.points {
			r[i] = float64(c.Curve.Temperature(point.Signal)-point.T) / c.std[i]
			if jac != nil {
				c.gradient(jac[i*p:(i+1)*p], point.Signal)
				for k := range p {
					jac[i*p+k] /= c.std[i]
				}
			}
		}
	}
	// The unknowns are departures, so that a step is judged against 1, not against itself.
	θ := make([]float64, p)
	if err := solver.Minimise(f, θ); err != nil {
		return fmt.Errorf("%w: %w", ErrCalibration, err)
	}
	set(θ)
	c.chi2 = solver.SumSquares
	c.cov = make([]float64, p*p)
	jac := make([]float64, n*p)
	f(make([]float64, n), jac, θ)
	solver.SetJacobian(jac)
	if err := solver.Covariance(c.cov); err != nil {
		return fmt.Errorf("%w: the points do not fix the curve: %w", ErrCalibration, err)
	}
	if !(c.Curve.A > 0) || !(c.Curve.C > 0) {
		return fmt.Errorf("%w: the points give A = %g m, C = %g: they are no radiation thermometer's", ErrCalibration, c.Curve.A, c.Curve.C)
	}
	return nil
}

// ChiSquared returns the sum of squared departures of the points in units of their
// uncertainty, and its degrees of freedom.
func (c *Calibration) ChiSquared() (chi2 float64, degreesOfFreedom int) {
	return c.chi2, len(c.points) - c.free
}

// Departures returns by how much the temperature read at each point's signal lies above the
// point's own, in K.
func (c *Calibration) Departures() []float64 {
	out := make([]float64, len(c.points))
	for i, p := range c.points {
		out[i] = float64(c.Curve.Temperature(p.Signal) - p.T)
	}
	return out
}

// Covariance returns the covariance of (C, A, B): the first relative to C, A in m, B in m K.
// Where C alone was fitted, the rows of A and B are zero: how far their prediction from the
// band is off is not in it. ok is false where the points have no uncertainty.
//
// The three are correlated to many digits. Carry the whole matrix, with
//
//	∂T/∂ln C = −c₂/(A l²)·(C/S)/(1 + C/S),   ∂T/∂A = −T/A,   ∂T/∂B = −1/A,   l = ln(1 + C/S)
func (c *Calibration) Covariance() (cov [3][3]float64, ok bool) {
	if !c.hasStd() {
		return cov, false
	}
	scale := [3]float64{1, c.a0, c.a0 * c.t0}
	for i := range c.free {
		for k := range c.free {
			cov[i][k] = scale[i] * scale[k] * c.cov[i*c.free+k]
		}
	}
	return cov, true
}

// hasStd reports whether the points have uncertainties.
func (c *Calibration) hasStd() bool { return c.points[0].StdK > 0 || c.points[0].Std > 0 }

// Sensitivities returns ∂T/∂Tᵢ of the temperature t read from the curve to the points'
// temperatures. Through three points they add to 1: a common shift shifts every reading.
func (c *Calibration) Sensitivities(t pyro.Temperature) []float64 {
	p := c.free
	g := make([]float64, p)
	c.gradient(g, c.Curve.Signal(t))
	// gᵀ(JᵀJ)⁻¹Jᵀ
	jac := make([]float64, p)
	row := make([]float64, p)
	for k := range p {
		for l := range p {
			row[k] += g[l] * c.cov[l*p+k]
		}
	}
	out := make([]float64, len(c.points))
	for i, point := range c.points {
		c.gradient(jac, point.Signal)
		for k := range p {
			out[i] += row[k] * jac[k] / (c.std[i] * c.std[i])
		}
	}
	return out
}

// Reading is a temperature read from a calibration curve.
type Reading struct {
	T            pyro.Temperature
	StdK         float64 // of curve and signal together; 0 where the points have none
	Extrapolated bool    // beyond the first or the last point
}

// Read returns the temperature of a blackbody that gives the signal, with the standard
// uncertainty of curve and signal.
func (c *Calibration) Read(signal, std float64) (Reading, error) {
	if !(signal > 0) || math.IsInf(signal, 0) || !(std >= 0) {
		return Reading{}, fmt.Errorf("%w: signal %g ± %g: it must be positive", ErrReadings, signal, std)
	}
	r := Reading{T: c.Curve.Temperature(signal)}
	r.Extrapolated = beyond(r.T, c.points[0].T, c.points[len(c.points)-1].T)
	u := std / c.Curve.Slope(r.T)
	if c.hasStd() {
		for i, s := range c.Sensitivities(r.T) {
			u = math.Hypot(u, s*c.std[i])
		}
	}
	r.StdK = u
	return r, nil
}

// beyond reports whether t lies outside lo to hi, by more than the rounding of a reading at
// one of them.
func beyond(t, lo, hi pyro.Temperature) bool {
	const rounding = 1e-10
	return t < lo*(1-rounding) || t > hi*(1+rounding)
}
