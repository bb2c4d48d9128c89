package fit_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"candent/fit"
	"candent/pyro"
	"candent/pyro/its90"
)

// TestCovarianceCarriesToReadings: the covariance of (C, A, B) carried through numerical
// derivatives of the curve's inverse gives the uncertainty that Read states.
func TestCovarianceCarriesToReadings(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	for name, temperatures := range map[string][]pyro.Temperature{
		"three":               {700, 950, 1300},
		"six":                 {700, 850, 950, 1100, 1250, 1400},
		"two, A, B predicted": {900, 1100},
	} {
		var points []fit.CalibrationPoint
		for i, T := range temperatures {
			s := band.Radiance(T)
			points = append(points, fit.CalibrationPoint{T: T, StdK: 0.2 + 0.05*float64(i), Signal: s, Std: 0.001 * s})
		}
		c, err := fit.Calibrate(points, band)
		if err != nil {
			t.Fatal(err)
		}
		cov, ok := c.Covariance()
		if !ok {
			t.Fatalf("%s: no covariance", name)
		}
		for i := range 3 {
			for k := range 3 {
				if cov[i][k] != cov[k][i] || len(points) < 3 && i+k > 0 && cov[i][k] != 0 {
					t.Errorf("%s: covariance %d, %d: %g and %g", name, i, k, cov[i][k], cov[k][i])
				}
			}
		}
		for _, T := range []pyro.Temperature{750, 1000, 1500} {
			s := c.Curve.Signal(T)
			moved := func(h [3]float64) float64 {
				k := c.Curve
				k.C *= 1 + h[0]
				k.A += h[1]
				k.B += h[2]
				return float64(k.Temperature(s))
			}
			var g [3]float64
			for i, h := range [3]float64{1e-4, 1e-4 * c.Curve.A, 1e-4 * c.Curve.A * 1000} {
				var up, down [3]float64
				up[i], down[i] = h, -h
				g[i] = (moved(up) - moved(down)) / (2 * h)
			}
			u2 := 0.0
			for i := range 3 {
				for k := range 3 {
					u2 += g[i] * cov[i][k] * g[k]
				}
			}
			r, err := c.Read(s, 0)
			// Central differences are off by 1e-8, and the three cancel to one part in 1e3 or so.
			if err != nil || math.Abs(math.Sqrt(u2)/r.StdK-1) > 1e-4 {
				t.Errorf("%s at %v: u %.8f K from the covariance, %.8f K read, %v", name, T, math.Sqrt(u2), r.StdK, err)
			}
		}
	}
	bare, err := fit.Calibrate([]fit.CalibrationPoint{{T: 700, Signal: 1}, {T: 900, Signal: 150}, {T: 1100, Signal: 3700}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if cov, ok := bare.Covariance(); ok || cov != ([3][3]float64{}) {
		t.Errorf("without uncertainties: %v, %v", cov, ok)
	}
}

func TestCalibrationDepartures(t *testing.T) {
	c, err := fit.Calibrate([]fit.CalibrationPoint{{T: 700, Signal: 1}, {T: 900, Signal: 150}, {T: 1100, Signal: 3700}, {T: 1300, Signal: 34000}}, nil)
	if err != nil {
		t.Fatal(err)
	}
	chi2, _ := c.ChiSquared()
	sum := 0.0
	for i, d := range c.Departures() {
		sum += d * d
		if want := float64(c.Curve.Temperature([]float64{1, 150, 3700, 34000}[i])) - []float64{700, 900, 1100, 1300}[i]; d != want {
			t.Errorf("departure %d: %g, want %g", i, d, want)
		}
	}
	if math.Abs(sum/chi2-1) > 1e-9 {
		t.Errorf("squares of the departures %g, χ² %g", sum, chi2)
	}
}

func TestGainThereAndBack(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	const gain = 3.7e-9
	var points []fit.CalibrationPoint
	for _, T := range []pyro.Temperature{1300, 900, 1100} { // in any order
		s := gain * band.Radiance(T)
		points = append(points, fit.CalibrationPoint{T: T, StdK: 0.3, Signal: s, Std: 0.002 * s})
	}
	for n := 1; n <= 3; n++ {
		c, err := fit.CalibrateGain(points[:n], band)
		if err != nil {
			t.Fatal(err)
		}
		chi2, dof := c.ChiSquared()
		if math.Abs(c.Gain/gain-1) > 1e-12 || chi2 > 1e-15 || dof != n-1 {
			t.Errorf("%d points: gain %.15g, χ² %g with %d", n, c.Gain, chi2, dof)
		}
		// The variance of a weighted mean, by hand.
		sum := 0.0
		for _, p := range points[:n] {
			sum += 1 / (math.Pow(0.002, 2) + math.Pow(band.LogSlope(p.T)*0.3/float64(p.T), 2))
		}
		if want := gain / math.Sqrt(sum); math.Abs(c.Std/want-1) > 1e-10 {
			t.Errorf("%d points: u %.12g, want %.12g", n, c.Std, want)
		}
		r, err := c.Read(gain*band.Radiance(2000), 0)
		if err != nil || math.Abs(float64(r.T)-2000) > 1e-8 || !r.Extrapolated {
			t.Errorf("%d points: %+v, %v", n, r, err)
		}
		if want := 2000 / band.LogSlope(2000) / math.Sqrt(sum); math.Abs(r.StdK/want-1) > 1e-9 {
			t.Errorf("%d points: u(2000 K) %.9g K, want %.9g K", n, r.StdK, want)
		}
		if r, err := c.Read(points[0].Signal, 0); err != nil || r.Extrapolated {
			t.Errorf("%d points, at one of them: %+v, %v", n, r, err)
		}
		if in := c.Input("gain"); in.Check() != nil || in.Value != c.Gain || in.Std != c.Std {
			t.Errorf("as an input: %+v", in)
		}
	}
	bare, err := fit.CalibrateGain([]fit.CalibrationPoint{{T: 1100, Signal: 1.01 * gain * band.Radiance(1100)}, {T: 1300, Signal: 0.99 * gain * band.Radiance(1300)}}, band)
	if err != nil || math.Abs(bare.Gain/gain-1) > 1e-12 || bare.Std != 0 {
		t.Errorf("without uncertainties: %+v, %v", bare, err)
	}
	if d := bare.Departures(); !(d[0] > 0 && d[1] < 0) || math.Abs(d[0]-0.01*1100/band.LogSlope(1100)) > 0.01 {
		t.Errorf("departures %v", d)
	}
}

// TestGainUncertaintyAgainstMonteCarlo: standard deviations of the gain and of a temperature
// read with it, within three standard errors and the second order of 0.5 % signals; mean
// of χ² within three standard errors of its degrees of freedom, √(2·2/n).
func TestGainUncertaintyAgainstMonteCarlo(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	var points []fit.CalibrationPoint
	for _, p := range [][3]float64{{1000, 0.4, 0.005}, {1200, 0.2, 0.002}, {1400, 0.8, 0.001}} {
		s := band.Radiance(pyro.Temperature(p[0]))
		points = append(points, fit.CalibrationPoint{T: pyro.Temperature(p[0]), StdK: p[1], Signal: s, Std: p[2] * s})
	}
	c, err := fit.CalibrateGain(points, band)
	if err != nil {
		t.Fatal(err)
	}
	const n, T = 4000, 1800
	read, err := c.Read(band.Radiance(T), 0)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(8, 8))
	var g, g2, k, k2, chi float64
	for range n {
		trial := make([]fit.CalibrationPoint, len(points))
		for i, p := range points {
			trial[i] = p
			trial[i].T += pyro.Temperature(p.StdK * rng.NormFloat64())
			trial[i].Signal += p.Std * rng.NormFloat64()
		}
		x, err := fit.CalibrateGain(trial, band)
		if err != nil {
			t.Fatal(err)
		}
		r, err := x.Read(band.Radiance(T), 0)
		if err != nil {
			t.Fatal(err)
		}
		d, e := x.Gain-1, float64(r.T)-T
		chi2, _ := x.ChiSquared()
		g, g2, k, k2, chi = g+d, g2+d*d, k+e, k2+e*e, chi+chi2
	}
	allowed := 3/math.Sqrt(2*n) + 0.005
	if sd := math.Sqrt(g2/n - g*g/n/n); math.Abs(c.Std/sd-1) > allowed {
		t.Errorf("u(gain) %.6f, simulated %.6f", c.Std, sd)
	}
	if sd := math.Sqrt(k2/n - k*k/n/n); math.Abs(read.StdK/sd-1) > allowed {
		t.Errorf("u(%d K) %.4f K, simulated %.4f K", T, read.StdK, sd)
	}
	if math.Abs(chi/n-2) > 3*math.Sqrt(4.0/n)+0.02 {
		t.Errorf("mean χ² %.4f of 2 degrees of freedom", chi/n)
	}
}

// TestGainWavelengthSensitivity: a band that was assumed 1 pm too far up, in the calibration
// and in the reading, against a calibration with it; differences are off by the second
// order, 1e-6 or so relative.
func TestGainWavelengthSensitivity(t *testing.T) {
	const δ = 1e-12
	bandAt := func(by pyro.Wavelength) *pyro.Band {
		b, err := pyro.FlatTop(0.85*µm+by, 0.95*µm+by)
		if err != nil {
			t.Fatal(err)
		}
		return b
	}
	truth, wrong := bandAt(0), bandAt(δ)
	var points []fit.CalibrationPoint
	for _, T := range []pyro.Temperature{1200, 1400} {
		s := truth.Radiance(T)
		points = append(points, fit.CalibrationPoint{T: T, StdK: 0.2, Signal: s, Std: 0.001 * s})
	}
	right, err := fit.CalibrateGain(points, truth)
	if err != nil {
		t.Fatal(err)
	}
	for _, T := range []pyro.Temperature{800, 1300, 2000, 2700} {
		c, err := fit.CalibrateGain(points, wrong)
		if err != nil {
			t.Fatal(err)
		}
		r, err := c.Read(truth.Radiance(T), 0)
		if err != nil {
			t.Fatal(err)
		}
		got, want := right.SensitivityToWavelength(T), float64(r.T-T)/δ
		if math.Abs(got-want) > 1e-4*math.Abs(want)+1e-10/δ {
			t.Errorf("%v: %.6g K/m, re-estimated %.6g K/m", T, got, want)
		}
	}
	single, err := fit.CalibrateGain(points[:1], truth)
	if err != nil {
		t.Fatal(err)
	}
	if s := single.SensitivityToWavelength(1200); math.Abs(s*1e-9) > 1e-9 {
		t.Errorf("at the only point: %g K/nm", s*1e-9)
	}
}

func TestITS90BySeveralPoints(t *testing.T) {
	band, err := pyro.FlatTop(0.64*µm, 0.66*µm)
	if err != nil {
		t.Fatal(err)
	}
	signal := func(t90 pyro.Temperature) float64 { return its90.Ratio(band, t90, its90.Silver) }
	// One point: its90.Temperature itself.
	one, err := fit.CalibrateITS90([]fit.FixedPoint{{Point: its90.Copper, Signal: signal(its90.Copper.T)}}, band)
	if err != nil {
		t.Fatal(err)
	}
	for _, T := range []pyro.Temperature{1300, 2000, 3200} {
		want, err := its90.Temperature(band, signal(T)/signal(its90.Copper.T), its90.Copper)
		if err != nil {
			t.Fatal(err)
		}
		r, err := one.Read(signal(T), 0)
		if err != nil || math.Abs(float64(r.T/want-1)) > 1e-12 || math.Abs(float64(r.T/T-1)) > 1e-12 {
			t.Errorf("one point at %v: %v, want %v, %v", T, r.T, want, err)
		}
	}
	// Three, each realised to 10 mK; consistent signals give the scale, and u falls.
	var points []fit.FixedPoint
	for _, p := range []its90.Point{its90.Silver, its90.Gold, its90.Copper} {
		p.StdK = 0.010
		s := signal(p.T)
		points = append(points, fit.FixedPoint{Point: p, Signal: s, Std: 1e-4 * s})
	}
	three, err := fit.CalibrateITS90(points, band)
	if err != nil {
		t.Fatal(err)
	}
	first, err := fit.CalibrateITS90(points[2:], band)
	if err != nil {
		t.Fatal(err)
	}
	r, err := three.Read(signal(2500), 0)
	alone, err2 := first.Read(signal(2500), 0)
	if err != nil || err2 != nil || math.Abs(float64(r.T)-2500) > 1e-9 || !(r.StdK < alone.StdK) {
		t.Errorf("three points %+v, one %+v, %v, %v", r, alone, err, err2)
	}
	// That of one point is its90.Uncertainty.
	if want := its90.Uncertainty(band, 2500, points[2].Point, 1e-4, 0); math.Abs(alone.StdK/want-1) > 1e-4 { // it takes c₂ for c₂′ in n
		t.Errorf("u %.6f K, its90 %.6f K", alone.StdK, want)
	}
	// A point that is off by 50 mK shows.
	points[1].Signal *= 1 + 0.05*band.LogSlope(1337.33)/1337.33
	off, err := fit.CalibrateITS90(points, band)
	if err != nil {
		t.Fatal(err)
	}
	if chi2, dof := off.ChiSquared(); dof != 2 || chi2 < 8 || off.Departures()[1] < 0.02 {
		t.Errorf("χ² %.2f with %d, departures %v K", chi2, dof, off.Departures())
	}
}

func TestGainsThatAreNone(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	open, err := pyro.Tabulated([]pyro.Wavelength{850e-9, 950e-9}, []float64{1, 1}, pyro.PerWatt)
	if err != nil {
		t.Fatal(err)
	}
	ok := fit.CalibrationPoint{T: 900, Signal: 1}
	for name, c := range map[string]struct {
		points []fit.CalibrationPoint
		band   *pyro.Band
		row    int // −1: not a row's fault
	}{
		"none":                 {nil, band, -1},
		"no band":              {[]fit.CalibrationPoint{ok}, nil, -1},
		"in °C":                {[]fit.CalibrationPoint{ok, {T: 12, Signal: 1}}, band, 1},
		"below the bands":      {[]fit.CalibrationPoint{ok, {T: 150, Signal: 1}}, band, 1},
		"dark not subtracted":  {[]fit.CalibrationPoint{{T: 800, Signal: -0.1}, ok}, band, 0},
		"a hole":               {[]fit.CalibrationPoint{ok, ok, {T: 800, Signal: math.NaN()}}, band, 2},
		"some uncertainties":   {[]fit.CalibrationPoint{{T: 800, StdK: 1, Signal: 1}, ok}, band, 1},
		"beyond the table":     {[]fit.CalibrationPoint{ok}, open, 0},
		"infinite uncertainty": {[]fit.CalibrationPoint{{T: 800, StdK: 1, Std: math.Inf(1), Signal: 1}}, band, 0},
	} {
		_, err := fit.CalibrateGain(c.points, c.band)
		var bad *fit.CalibrationError
		if !errors.Is(err, fit.ErrCalibration) || errors.As(err, &bad) != (c.row >= 0) || bad != nil && bad.Row != c.row {
			t.Errorf("%s: %v", name, err)
		}
	}
	// Of the Sakuma–Hattori fit, which rows.
	for row, points := range map[int][]fit.CalibrationPoint{
		2: {ok, {T: 1000, Signal: 5}, {T: 1100, Signal: 4}},
		1: {ok, {T: 800, Signal: 5}, {T: 1100, Signal: 10}},
	} {
		_, err := fit.Calibrate(points, nil)
		var bad *fit.CalibrationError
		if !errors.As(err, &bad) || bad.Row != row {
			t.Errorf("row %d: %v", row, err)
		}
	}
	c, err := fit.CalibrateGain([]fit.CalibrationPoint{ok}, band)
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range [][2]float64{{-1, 0}, {math.NaN(), 0}, {1, -1}, {1, math.Inf(1)}} {
		if _, err := c.Read(s[0], s[1]); !errors.Is(err, fit.ErrReadings) {
			t.Errorf("signal %v: %v", s, err)
		}
	}
}

func ExampleCalibrateGain() {
	// A filter detector of known responsivity, seen at the copper point: 1357.80 ± 0.04 K.
	band, err := pyro.FlatTop(645*pyro.Nanometre, 655*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	cu := its90.CopperThermodynamic
	c, err := fit.CalibrateGain([]fit.CalibrationPoint{{T: cu.T, StdK: cu.StdK, Signal: 0.4321, Std: 0.0001}}, band)
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := c.Read(1228, 0.1)
	fmt.Printf("%.2f, standard uncertainty %.2f K; 0.02 nm of wavelength are worth %.2f K (%v)\n",
		r.T, r.StdK, c.SensitivityToWavelength(r.T)*0.02e-9, err)
	// Output: 2651.18 K, standard uncertainty 0.17 K; 0.02 nm of wavelength are worth 0.08 K (<nil>)
}
