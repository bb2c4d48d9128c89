package detector_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"candent/pyro/detector"
)

func TestSizeOfSource(t *testing.T) {
	d, s, u := []float64{10, 20, 40, 60}, []float64{0.950, 0.980, 0.995, 1.000}, []float64{0.002, 0.001, 0.001, 0.001}
	sse, err := detector.NewSizeOfSource(d, s, u)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ target, calibration, factor, std float64 }{ // by hand
		{60, 20, 1.000 / 0.980, math.Hypot(0.001, 0.001*1.000/0.980) / 0.980},
		{20, 60, 0.980, math.Hypot(0.001, 0.001*0.980)},
		{40, 40, 1, 0},
		{15, 60, 0.965, math.Hypot(math.Hypot(0.001, 0.0005), 0.965*0.001)},
		{33, 33, 1, 0},
	} {
		f, std, err := sse.Factor(c.target, c.calibration)
		if err != nil || math.Abs(f-c.factor) > rounding || math.Abs(std-c.std) > rounding {
			t.Errorf("%g from %g: %.12g ± %.12g, %v; want %.12g ± %.12g", c.target, c.calibration, f, std, err, c.factor, c.std)
		}
		in, err := sse.Gain("size of source", c.target, c.calibration)
		if err != nil || in.Value != f || in.Std != std {
			t.Errorf("%g from %g as an input: %+v, %v", c.target, c.calibration, in, err)
		}
	}
	for _, c := range [][2]float64{{61, 20}, {20, 9}, {math.NaN(), 20}} {
		if _, _, err := sse.Factor(c[0], c[1]); !errors.Is(err, detector.ErrSizeOfSource) {
			t.Errorf("%v: %v", c, err)
		}
	}
}

// TestSizeOfSourceAgainstMonteCarlo: tables with errors of the stated size; standard
// deviation of the factor within 3 standard errors, 3/√(2n), and the second order of 1 %.
func TestSizeOfSourceAgainstMonteCarlo(t *testing.T) {
	d, s, u := []float64{10, 20, 40, 60}, []float64{0.950, 0.980, 0.995, 1.000}, []float64{0.01, 0.004, 0.006, 0.002}
	sse, err := detector.NewSizeOfSource(d, s, u)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(3, 4))
	const n = 4000
	for _, c := range [][2]float64{{30, 20}, {13, 17}, {60, 10}} {
		_, std, err := sse.Factor(c[0], c[1])
		if err != nil {
			t.Fatal(err)
		}
		sum, sum2 := 0.0, 0.0
		for range n {
			trial := make([]float64, len(s))
			for i := range s {
				trial[i] = s[i] + u[i]*rng.NormFloat64()
			}
			x, err := detector.NewSizeOfSource(d, trial, []float64{1, 1, 1, 1}) // no refusal
			if err != nil {
				t.Fatal(err)
			}
			f, _, err := x.Factor(c[0], c[1])
			if err != nil {
				t.Fatal(err)
			}
			sum, sum2 = sum+f, sum2+f*f
		}
		if sd := math.Sqrt(sum2/n - sum*sum/n/n); math.Abs(std/sd-1) > 3/math.Sqrt(2*n)+0.01 {
			t.Errorf("%v: u %.5f, simulated %.5f", c, std, sd)
		}
	}
}

func TestSizeOfSourceTablesThatAreNone(t *testing.T) {
	for name, c := range map[string]struct {
		d, s, u []float64
		index   int
	}{
		"not sorted":  {[]float64{10, 10}, []float64{1, 1}, nil, 1},
		"falls":       {[]float64{10, 20, 30}, []float64{0.9, 0.95, 0.94}, []float64{0.001, 0.001, 0.001}, 2},
		"no diameter": {[]float64{0, 20}, []float64{0.9, 0.95}, nil, 0},
		"no signal":   {[]float64{10, 20}, []float64{0.9, math.NaN()}, nil, 1},
		"negative u":  {[]float64{10, 20}, []float64{0.9, 0.95}, []float64{0, -1}, 1},
	} {
		var bad *detector.TableError
		if _, err := detector.NewSizeOfSource(c.d, c.s, c.u); !errors.As(err, &bad) || bad.Index != c.index || !errors.Is(err, detector.ErrSizeOfSource) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if _, err := detector.NewSizeOfSource([]float64{1, 2}, []float64{1}, nil); !errors.Is(err, detector.ErrSizeOfSource) {
		t.Errorf("a hole: %v", err)
	}
	// Within three standard uncertainties of the step a fall is noise.
	if _, err := detector.NewSizeOfSource([]float64{1, 2}, []float64{1, 0.996}, []float64{0.001, 0.001}); err != nil {
		t.Errorf("noise: %v", err)
	}
}

func ExampleSizeOfSource_Factor() {
	// Calibrated before an aperture of 20 mm; the target is a wall, measured as 60 mm.
	sse, err := detector.NewSizeOfSource([]float64{10, 20, 40, 60}, []float64{0.950, 0.980, 0.995, 1}, []float64{0.002, 0.001, 0.001, 0.001})
	if err != nil {
		fmt.Println(err)
		return
	}
	f, u, err := sse.Factor(60, 20)
	fmt.Printf("%.4f, standard uncertainty %.4f (%v)\n", f, u, err)
	// Output: 1.0204, standard uncertainty 0.0015 (<nil>)
}
