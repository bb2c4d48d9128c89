package fit_test

import (
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"slices"
	"strconv"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// tungsten reads testdata/tungsten.csv: wavelengths in µm, and the emissivities at them
// for each temperature in K.
func tungsten(t *testing.T) (um []float64, ε map[int][]float64) {
	t.Helper()
	f, err := os.Open("../testdata/tungsten.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	ε = map[int][]float64{}
	for _, row := range rows[1:] {
		for i, field := range row {
			v, err := strconv.ParseFloat(field, 64)
			if err != nil {
				t.Fatal(err)
			}
			if i == 0 {
				um = append(um, v)
				continue
			}
			T, err := strconv.Atoi(rows[0][i])
			if err != nil {
				t.Fatal(err)
			}
			ε[T] = append(ε[T], v)
		}
	}
	return um, ε
}

// TestRecreatableSpectra: noise-free radiances ε(λ)L(λ,T) of tungsten, unweighted least
// squares on ln L with ln ε a polynomial in λ of order m; temperatures and u(T) for 1 % per
// channel from 30-digit Gauss–Newton started at the true T, printed to 1e-4 K and four
// digits.
//
// The library fits radiances, not their logarithms; logFit makes its fit a logarithmic one.
func TestRecreatableSpectra(t *testing.T) {
	um, ε := tungsten(t)
	for _, set := range []struct {
		name string
		um   []float64
		rows map[int][4][3]float64 // T, rms of ln residuals and u(T) for m = 0 … 3
	}{
		{"A", []float64{0.5, 0.6, 0.7, 0.8, 0.9}, map[int][4][3]float64{
			1600: {{1623.5507, .0107, 2.601}, {1589.0824, .00143, 14.49}, {1611.4658, .00102, 102.2}},
			2000: {{2041.4832, .0124, 4.114}, {1980.3901, .00331, 22.48}, {2013.6896, .00316, 159.7}},
			2400: {{2466.7993, .0147, 6.014}, {2362.4341, .00382, 31.92}, {2324.7338, .00374, 213.2}},
			2800: {{2896.7695, .0150, 8.317}, {2749.6914, .00272, 43.09}, {2689.3203, .00255, 285.5}},
		}},
		{"B", []float64{0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.4, 1.5}, map[int][4][3]float64{
			1600: {{1716.3118, .0499, 2.822}, {1545.0994, .0059, 10.63}, {1501.6108, .00515, 49.92}, {1780.7091, .00415, 370.3}},
			2000: {{2163.6973, .0358, 4.516}, {1967.7767, .00335, 17.13}, {1913.2783, .00251, 81.07}, {2028.6655, .00236, 482.3}},
			2400: {{2613.8926, .0252, 6.669}, {2411.8572, .00293, 25.54}, {2365.576, .00265, 123.1}, {2415.2603, .00264, 685.4}},
			2800: {{3061.7342, .0174, 9.299}, {2868.5087, .00253, 35.94}, {2773.7947, .00171, 167.5}, {2904.9436, .00164, 985.3}},
		}},
		{"C", []float64{0.4, 0.45, 0.5, 0.6, 0.7}, map[int][4][3]float64{
			1600: {{1613.3376, .00474, 2.117}, {1600.7767, .00208, 13.24}, {1575.4846, .00161, 85.39}},
			2000: {{2021.2818, .00467, 3.323}, {2001.3999, .00182, 20.7}, {1947.5803, 8.17e-5, 130.5}},
			2400: {{2432.4836, .00518, 4.813}, {2399.1036, .00131, 29.73}, {2357.6608, .000882, 191.4}},
			2800: {{2847.1148, .0064, 6.598}, {2790.0451, .00108, 40.16}, {2770.5348, .00103, 264.6}},
		}},
	} {
		for T, orders := range set.rows {
			bands := make([]*pyro.Band, len(set.um))
			logs := make([]float64, len(set.um))
			for i, l := range set.um {
				b, err := pyro.Line(pyro.Wavelength(l) * µm)
				if err != nil {
					t.Fatal(err)
				}
				bands[i] = b
				logs[i] = math.Log(ε[T][slices.Index(um, l)] * b.Radiance(pyro.Temperature(T)))
			}
			for m, want := range orders {
				if want[0] == 0 {
					continue
				}
				family := emissivity.Grey()
				if m > 0 {
					family = emissivity.Exponential(m)
				}
				e, err := fit.New(bands, fit.Assume{Emissivity: family.Relative(), Noise: fit.Relative(0.01), Range: fit.Range{Min: 300, Max: 15000}})
				if err != nil {
					t.Fatal(err)
				}
				name := fmt.Sprintf("set %s, %d K, m = %d", set.name, T, m)
				got, u := logFit(t, e, logs)
				if math.Abs(got-want[0]) > 0.5e-4+1e-6 {
					t.Errorf("%s: %.5f K, want %.4f", name, got, want[0])
				}
				if math.Abs(u/want[2]-1) > 1e-3 {
					t.Errorf("%s: u = %.5g K, want %.4g", name, u, want[2])
				}
			}
		}
	}
}

// logFit makes the library's fit one of logarithms. Noise relative to the model gives the
// equations Σ (y − m)/m²·∂m = 0. For readings y = m·(1 + ln(s/m)), m being their own fit,
// these are Σ ln(s/m)·∂ln m = 0, those of least squares on ln s. So the fit is repeated on
// such readings until it stays where it is.
func logFit(t *testing.T, e *fit.Estimator, logs []float64) (T, u float64) {
	t.Helper()
	y := make([]float64, len(logs))
	for i := range y {
		y[i] = math.Exp(logs[i])
	}
	for range 400 {
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		got, state := r.Temperature()
		std, ok := r.Uncertainty()
		before := T
		T, u = float64(got), std
		if state != fit.Determined || !ok {
			// The interval may be open for the widest families; the minimum is there all the same.
			b := r.Basins()
			if len(b) == 0 {
				t.Fatalf("no minimum: %v", r)
			}
			T = float64(b[0])
		}
		if math.Abs(T-before) < 1e-7 {
			return T, u
		}
		for i := range y {
			m, _, ok := r.Model(i)
			if !ok {
				t.Fatal("no model")
			}
			y[i] = m * (1 + logs[i] - math.Log(m))
		}
	}
	t.Fatal("no fixed point")
	return 0, 0
}

// TestLongWaveCase: λ = 8 … 14 µm in steps of 1, T = 320 K, ε = .80 .84 .87 .90 .93 .94 .94,
// no noise, unweighted least squares on radiance, ε a polynomial of degree d without bounds;
// computed in double, printed to 1e-5 K. After a published case in which a linear fit of
// that kind came out 15 K high and a quadratic one at 230 K.
func TestLongWaveCase(t *testing.T) {
	ε := []float64{.80, .84, .87, .90, .93, .94, .94}
	bands := lines(t, 8, 14, 7)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = ε[i] * b.Radiance(320)
	}
	for d, want := range []float64{297.49898, 289.56222, 335.88426, 254.85136} {
		family := emissivity.Grey()
		if d > 0 {
			family = emissivity.Polynomial(d)
		}
		e, err := fit.New(bands, fit.Assume{Emissivity: family.Relative(), Noise: fit.Constant(1e4)})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		basins := r.Basins()
		nearest := math.Inf(1)
		for _, b := range basins {
			if math.Abs(float64(b)-want) < math.Abs(nearest-want) {
				nearest = float64(b)
			}
		}
		if math.Abs(nearest-want) > 0.5e-5+1e-9 {
			t.Errorf("degree %d: minima at %v, want one at %.5f K", d, basins, want)
		}
	}
}
