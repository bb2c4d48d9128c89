package fit_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
)

// certificate is that of an instrument made for 0.9 to 1.1 µm whose band truly begins at
// 0.88 µm and which reads 0.6 % too much: what it showed before a blackbody at each
// reference temperature and aperture.
func certificate(t testing.TB, sse *detector.SizeOfSource, ε, aperture []float64) (c fit.Certificate, show func(T pyro.Temperature, ε, target float64) pyro.Temperature) {
	t.Helper()
	nominal, err := pyro.FlatTop(0.9*µm, 1.1*µm)
	if err != nil {
		t.Fatal(err)
	}
	truth, err := pyro.FlatTop(0.88*µm, 1.1*µm)
	if err != nil {
		t.Fatal(err)
	}
	set := detector.Indicator{Band: nominal, Emissivity: 1, Window: 1, Low: 850, High: 2000}
	show = func(T pyro.Temperature, ε, target float64) pyro.Temperature {
		f := 1.0
		if sse != nil {
			if f, _, err = sse.Factor(target, 20); err != nil {
				t.Fatal(err)
			}
		}
		d := set
		d.Emissivity = ε
		shown, err := d.Indicated(1.006 * f * truth.Radiance(T))
		if err != nil {
			t.Fatal(err)
		}
		return shown
	}
	c = fit.Certificate{Indicator: set, SizeOfSource: sse, Aperture: 20}
	for i, T := range []pyro.Temperature{1000, 1150, 1300, 1500, 1700} {
		a := 0.0
		if sse != nil {
			a = aperture[i]
		}
		c.Rows = append(c.Rows, fit.CertificateRow{Reference: T, Indicated: show(T, ε[i], a), U: 2.4, K: 2, Emissivity: ε[i], Aperture: a})
	}
	return c, show
}

func sizeOfSource(t testing.TB) *detector.SizeOfSource {
	t.Helper()
	sse, err := detector.NewSizeOfSource([]float64{10, 20, 40, 60}, []float64{0.965, 0.985, 0.996, 1}, []float64{0.002, 0.001, 0.001, 0.001})
	if err != nil {
		t.Fatal(err)
	}
	return sse
}

func TestCertificateThereAndBack(t *testing.T) {
	for name, x := range map[string]struct {
		sse         *detector.SizeOfSource
		ε, aperture []float64
	}{
		"set to 1":                    {nil, []float64{1, 1, 1, 1, 1}, nil},
		"settings and apertures vary": {sizeOfSource(t), []float64{1, 0.95, 1, 0.9, 1}, []float64{60, 40, 20, 20, 10}},
	} {
		c, show := certificate(t, x.sse, x.ε, x.aperture)
		points, err := c.Points()
		if err != nil {
			t.Fatal(err)
		}
		for i, p := range points {
			if p.T != c.Rows[i].Reference || p.StdK != 1.2 || (p.Std == 0) != (c.Rows[i].Aperture == 0 || c.Rows[i].Aperture == 20) {
				t.Errorf("%s, row %d: %+v", name, i, p)
			}
		}
		curve, err := fit.Calibrate(points, c.Indicator.Band)
		if err != nil {
			t.Fatal(err)
		}
		// Later the instrument stands before a target of the common aperture, set to 0.8.
		later := c.Indicator
		later.Emissivity = 0.8
		for _, T := range []pyro.Temperature{1050, 1250, 1600, 1750} {
			s, err := later.Radiance(show(T, 0.8, 20))
			if err != nil {
				t.Fatal(err)
			}
			r, err := curve.Read(s, 0)
			// The interpolation error of a band 20 % wide: 0.1 K within the points, more beyond.
			if err != nil || math.Abs(float64(r.T-T)) > 0.1 || r.Extrapolated != (T > 1700) {
				t.Errorf("%s at %v: %+v, %v", name, T, r, err)
			}
			if off := float64(show(T, 1, 20) - T); math.Abs(off) < 0.5 {
				t.Errorf("%s at %v: the instrument was off by %.2f K only, so the test shows nothing", name, T, off)
			}
		}
	}
}

// TestCertificateUncertaintyAgainstMonteCarlo: certificates whose references and size-of-
// source factors have errors of the stated size; standard deviation of what is read, within
// three standard errors and the second order of 1 % signals.
func TestCertificateUncertaintyAgainstMonteCarlo(t *testing.T) {
	sse := sizeOfSource(t)
	c, _ := certificate(t, sse, []float64{1, 1, 1, 1, 1}, []float64{60, 20, 20, 20, 10})
	points, err := c.Points()
	if err != nil {
		t.Fatal(err)
	}
	curve, err := fit.Calibrate(points, nil)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(9, 9))
	const n = 3000
	at := []pyro.Temperature{1000, 1400, 1800}
	sum, sum2 := make([]float64, len(at)), make([]float64, len(at))
	for range n {
		x := c
		x.SizeOfSource = nil
		x.Rows = append([]fit.CertificateRow(nil), c.Rows...)
		for i := range x.Rows {
			x.Rows[i].Reference += pyro.Temperature(1.2 * rng.NormFloat64())
			x.Rows[i].Aperture = 0
		}
		trial, err := x.Points()
		if err != nil {
			t.Fatal(err)
		}
		for i := range trial { // the factor as it truly was: each row's own error
			f, u, err := sse.Factor(c.Rows[i].Aperture, 20)
			if err != nil {
				t.Fatal(err)
			}
			trial[i].Signal /= f + u*rng.NormFloat64()
			trial[i].Std = points[i].Std
		}
		k, err := fit.Calibrate(trial, nil)
		if err != nil {
			t.Fatal(err)
		}
		for i, T := range at {
			d := float64(k.Curve.Temperature(curve.Curve.Signal(T)) - T)
			sum[i], sum2[i] = sum[i]+d, sum2[i]+d*d
		}
	}
	for i, T := range at {
		r, err := curve.Read(curve.Curve.Signal(T), 0)
		if err != nil {
			t.Fatal(err)
		}
		if sd := math.Sqrt(sum2[i]/n - sum[i]*sum[i]/n/n); math.Abs(r.StdK/sd-1) > 3/math.Sqrt(2*n)+0.01 {
			t.Errorf("u(%v) = %.4f K, simulated %.4f K", T, r.StdK, sd)
		}
	}
}

func TestCertificatesThatAreNone(t *testing.T) {
	for name, spoil := range map[string]func(*fit.Certificate){
		"reference in °C":    func(c *fit.Certificate) { c.Rows[2].Reference = 120 },
		"units mixed":        func(c *fit.Certificate) { c.Rows[2].Indicated -= 273.15 },
		"a hole":             func(c *fit.Certificate) { c.Rows[2].Indicated = pyro.Temperature(math.NaN()) },
		"no U":               func(c *fit.Certificate) { c.Rows[2].U = 0 },
		"no k":               func(c *fit.Certificate) { c.Rows[2].K = 0 },
		"k for U":            func(c *fit.Certificate) { c.Rows[2].K = 95 },
		"no setting":         func(c *fit.Certificate) { c.Rows[2].Emissivity = 0 },
		"at the range's end": func(c *fit.Certificate) { c.Rows[2].Indicated, c.Indicator.High = 1300, 1300 },
		"beyond the range":   func(c *fit.Certificate) { c.Indicator.High = 1250 },
		"another aperture":   func(c *fit.Certificate) { c.Rows[2].Aperture = 40 },
		"aperture too large": func(c *fit.Certificate) { c.Rows[2].Aperture, c.SizeOfSource = 80, sizeOfSource(t) },
	} {
		c, _ := certificate(t, nil, []float64{1, 1, 1, 1, 1}, nil)
		spoil(&c)
		_, err := c.Points()
		var bad *fit.CalibrationError
		if !errors.As(err, &bad) || bad.Row != 2 || !errors.Is(err, fit.ErrCalibration) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if _, err := (fit.Certificate{}).Points(); !errors.Is(err, fit.ErrCalibration) {
		t.Errorf("no rows: %v", err)
	}
	c, _ := certificate(t, nil, []float64{1, 1, 1, 1, 1}, nil)
	c.Indicator.Band = nil
	if _, err := c.Points(); !errors.Is(err, detector.ErrIndicator) {
		t.Errorf("no band: %v", err)
	}
}

func ExampleCertificate() {
	band, err := pyro.FlatTop(0.9*pyro.Micrometre, 1.1*pyro.Micrometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	shown := detector.Indicator{Band: band, Emissivity: 1, Window: 1, Low: pyro.Celsius(600), High: pyro.Celsius(1600)}
	points, err := fit.Certificate{Indicator: shown, Rows: []fit.CertificateRow{
		{Reference: pyro.Celsius(800), Indicated: pyro.Celsius(801.2), U: 2.0, K: 2, Emissivity: 1},
		{Reference: pyro.Celsius(1000), Indicated: pyro.Celsius(1002.1), U: 2.2, K: 2, Emissivity: 1},
		{Reference: pyro.Celsius(1200), Indicated: pyro.Celsius(1203.3), U: 2.6, K: 2, Emissivity: 1},
		{Reference: pyro.Celsius(1400), Indicated: pyro.Celsius(1404.6), U: 3.2, K: 2, Emissivity: 1},
	}}.Points()
	if err != nil {
		fmt.Println(err)
		return
	}
	curve, err := fit.Calibrate(points, band)
	if err != nil {
		fmt.Println(err)
		return
	}
	s, err := shown.Radiance(pyro.Celsius(1100))
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := curve.Read(s, 0)
	fmt.Printf("1100 °C shown is %.1f °C, standard uncertainty %.1f K (%v)\n", r.T.Celsius(), r.StdK, err)
	// Output: 1100 °C shown is 1097.3 °C, standard uncertainty 1.0 K (<nil>)
}
