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

// Rectangular bands, S = ∫L dλ, T in K: error in mK of (i) an exact fit through three points
// and (ii) A, B predicted and C from the middle point; fitted parameters; sensitivities
// ∂T/∂Tᵢ and u(T) for three independent u = 1. All by 40-digit arithmetic, digits as printed.
var calibrations = []struct {
	lo, hi        float64
	points        [3]float64
	a, b          float64 // predicted, µm and µm K
	fitted        [3]float64
	errors        [][4]float64 // T, S, (i), (ii)
	sensitivities [][5]float64 // T, three, u
}{
	{0.85, 0.95, [3]float64{692.677, 933.473, 1234.93}, 0.894444444444, 7.40111562502, [3]float64{0.895660185301, 6.62377857494, 20306537.5004},
		[][4]float64{{800, 0.0464531086487, 6.0461, -70.021}, {1000, 2.41199482048, -3.5564, 28.355}, {1100, 10.1795614302, -6.0413, 66.328}, {1337.33, 131.729062036, 13.944, 146.23}, {1357.77, 157.533436749, 17.81, 152.89}},
		[][5]float64{{800, 0.44456324, 0.64307084, -0.087634073, 0.7866742}, {1000, -0.11969002, 0.99462222, 0.1250678, 1.0095747}, {1100, -0.17207866, 0.75714352, 0.41493515, 0.88036842}, {1357.77, 0.39918364, -1.1255879, 1.7264042, 2.0992301}}},
	{3.4, 4.4, [3]float64{302.9146, 505.078, 692.677}, 3.77179487179, 39.414225222, [3]float64{3.77763144334, 37.3027922492, 143107.109066},
		[][4]float64{{273.15, 0.204404743354, -41.247, -245.45}, {373.15, 6.87902244729, 29.271, -75.855}, {429.7485, 24.7404635501, 21.172, -35.32}, {600, 278.139319212, -15.246, 42.771}, {933.473, 2572.75059942, 226.01, 379.36}},
		nil},
	{8, 14, [3]float64{302.9146, 505.078, 692.677}, 9.36363636364, 178.360769939, [3]float64{9.35738463991, 175.112594468, 6784.37585249},
		[][4]float64{{253.15, 23.8246849891, 26.641, -295.4}, {273.15, 35.1519619681, 16.152, -290.03}, {373.15, 136.778339094, -20.376, -220.15}, {429.7485, 227.384870221, -17.046, -138.51}, {600, 616.650866362, 14.723, 191.46}, {773.15, 1136.11548504, -44.85, 506.73}},
		[][5]float64{{253.15, 1.4612133, -0.69310413, 0.23189083, 1.6338026}, {373.15, 0.50568497, 0.6527241, -0.15840907, 0.84074935}, {600, -0.0881801, 0.67714414, 0.41103596, 0.79702602}, {773.15, 0.19050791, -0.82452981, 1.6340219, 1.840155}}},
}

// printed is half a unit of the last of n significant digits of v.
func printed(v float64, n int) float64 {
	return 0.5 * math.Pow(10, math.Floor(math.Log10(math.Abs(v)))-float64(n-1))
}

func TestSakumaHattoriAgainstFortyDigits(t *testing.T) {
	for _, c := range calibrations {
		band, err := pyro.FlatTop(pyro.Wavelength(c.lo)*µm, pyro.Wavelength(c.hi)*µm)
		if err != nil {
			t.Fatal(err)
		}
		width := (c.hi - c.lo) * 1e-6
		name := fmt.Sprintf("%g–%g µm", c.lo, c.hi)
		close := func(what string, got, want, allowed float64) {
			t.Helper()
			if !(math.Abs(got-want) <= allowed) {
				t.Errorf("%s, %s: %.14g, want %.12g ± %.1g", name, what, got, want, allowed)
			}
		}
		a, b := detector.Predict(band)
		close("A predicted", a*1e6, c.a, printed(c.a, 12))
		close("B predicted", b*1e6, c.b, printed(c.b, 12))
		var points []fit.CalibrationPoint
		for _, T := range c.points {
			points = append(points, fit.CalibrationPoint{T: pyro.Temperature(T), StdK: 1, Signal: band.Radiance(pyro.Temperature(T)) * width})
		}
		three, err := fit.Calibrate(points, nil)
		if err != nil {
			t.Fatal(err)
		}
		// The parameters are ill-determined: 1e-14 of the signals moves them by 1e-11 or so.
		close("A", three.Curve.A*1e6, c.fitted[0], 1e-9)
		close("B", three.Curve.B*1e6, c.fitted[1], 1e-7)
		close("C", three.Curve.C, c.fitted[2], 1e-8*c.fitted[2])
		one, err := fit.Calibrate(points[1:2], band)
		if err != nil {
			t.Fatal(err)
		}
		for _, e := range c.errors {
			close(fmt.Sprintf("S(%g K)", e[0]), band.Radiance(pyro.Temperature(e[0]))*width, e[1], printed(e[1], 12)+1e-11*e[1])
			s := band.Radiance(pyro.Temperature(e[0])) * width
			close(fmt.Sprintf("(i) at %g K", e[0]), 1000*(float64(three.Curve.Temperature(s))-e[0]), e[2], printed(e[2], 5)+1e-7)
			close(fmt.Sprintf("(ii) at %g K", e[0]), 1000*(float64(one.Curve.Temperature(s))-e[0]), e[3], printed(e[3], 5)+1e-7)
		}
		for _, row := range c.sensitivities {
			T := pyro.Temperature(row[0])
			// The table's T is the true one: the curve is read at the signal that it gives.
			read, err := three.Read(band.Radiance(T)*width, 0)
			if err != nil {
				t.Fatal(err)
			}
			got := three.Sensitivities(read.T)
			sum := 0.0
			for i, v := range got {
				close(fmt.Sprintf("sensitivity %d at %g K", i, row[0]), v, row[1+i], printed(row[1+i], 8)+1e-9)
				sum += v
			}
			close("sum of sensitivities", sum, 1, 1e-10)
			close(fmt.Sprintf("u at %g K", row[0]), read.StdK, row[4], printed(row[4], 8)+1e-9)
			if read.Extrapolated != (row[0] < c.points[0] || row[0] > c.points[2]) {
				t.Errorf("%s at %g K: extrapolated %v", name, row[0], read.Extrapolated)
			}
		}
	}
}

// TestCalibrationUncertaintyAgainstMonteCarlo: six points, uncertainties in temperature and
// signal; the standard deviation of temperatures read over 4,000 simulated calibrations,
// within three standard errors, 3/√(2n), and the second order of 1 % signals.
func TestCalibrationUncertaintyAgainstMonteCarlo(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	truth := []pyro.Temperature{700, 850, 950, 1100, 1250, 1400}
	points := make([]fit.CalibrationPoint, len(truth))
	for i, T := range truth {
		s := band.Radiance(T)
		points[i] = fit.CalibrationPoint{T: T, StdK: 0.3 + 0.1*float64(i), Signal: s, Std: 0.003 * s}
	}
	c, err := fit.Calibrate(points, nil)
	if err != nil {
		t.Fatal(err)
	}
	at := []float64{800, 1000, 1300, 1500}
	const n = 4000
	sum, sum2 := make([]float64, len(at)), make([]float64, len(at))
	rng := rand.New(rand.NewPCG(6, 6))
	for range n {
		trial := make([]fit.CalibrationPoint, len(points))
		for i, p := range points {
			trial[i] = p
			trial[i].T += pyro.Temperature(p.StdK * rng.NormFloat64())
			trial[i].Signal += p.Std * rng.NormFloat64()
		}
		k, err := fit.Calibrate(trial, nil)
		if err != nil {
			t.Fatal(err)
		}
		for i, T := range at {
			d := float64(k.Curve.Temperature(c.Curve.Signal(pyro.Temperature(T)))) - T
			sum[i] += d
			sum2[i] += d * d
		}
	}
	for i, T := range at {
		r, err := c.Read(c.Curve.Signal(pyro.Temperature(T)), 0)
		if err != nil {
			t.Fatal(err)
		}
		sd := math.Sqrt(sum2[i]/n - sum[i]*sum[i]/n/n)
		if math.Abs(r.StdK/sd-1) > 3/math.Sqrt(2*n)+0.01 {
			t.Errorf("u(%g K) = %.4f K, simulated %.4f K", T, r.StdK, sd)
		}
	}
}

func TestCalibrationsThatAreNone(t *testing.T) {
	ok := fit.CalibrationPoint{T: 900, Signal: 1}
	for name, points := range map[string][]fit.CalibrationPoint{
		"none":                 {},
		"one without a band":   {ok},
		"in °C":                {{T: -3, Signal: 1}, ok, {T: 1000, Signal: 2}},
		"dark not subtracted":  {{T: 800, Signal: -0.1}, ok, {T: 1000, Signal: 2}},
		"not rising":           {ok, {T: 950, Signal: 0.9}, {T: 1000, Signal: 2}},
		"a temperature twice":  {ok, {T: 900, Signal: 1.1}, {T: 1000, Signal: 2}},
		"some uncertainties":   {ok, {T: 950, StdK: 1, Signal: 1.5}, {T: 1000, Signal: 2}},
		"infinite uncertainty": {ok, {T: 950, StdK: math.Inf(1), Signal: 1.5}, {T: 1000, Signal: 2}},
	} {
		if _, err := fit.Calibrate(points, nil); !errors.Is(err, fit.ErrCalibration) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func ExampleCalibrate() {
	// A detector at 0.9 µm, its signal in mV at the Zn, Al and Ag points, each ± 0.1 K.
	c, err := fit.Calibrate([]fit.CalibrationPoint{
		{T: 692.677, StdK: 0.1, Signal: 0.02044, Std: 0.00001},
		{T: 933.473, StdK: 0.1, Signal: 8.162, Std: 0.002},
		{T: 1234.93, StdK: 0.1, Signal: 537.0, Std: 0.1},
	}, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, signal := range []float64{26, 1800} {
		r, err := c.Read(signal, 0.001*signal)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%.2f, standard uncertainty %.2f K, extrapolated %v\n", r.T, r.StdK, r.Extrapolated)
	}
	// Output:
	// 1001.00 K, standard uncertainty 0.12 K, extrapolated false
	// 1362.36 K, standard uncertainty 0.25 K, extrapolated true
}
