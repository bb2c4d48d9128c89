package pyro_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

func TestCurve(t *testing.T) {
	λ, values := []pyro.Wavelength{0.5 * µm, 1 * µm, 3 * µm}, []float64{0.8, 0.9, 0.1}
	c, err := pyro.NewCurve(λ, values)
	if err != nil {
		t.Fatal(err)
	}
	var s pyro.Spectrum = c
	values[0], λ[0] = 7, 0.6*µm // it keeps copies
	for _, r := range []struct {
		λ    pyro.Wavelength
		want float64
	}{{0.5 * µm, 0.8}, {0.75 * µm, 0.85}, {1 * µm, 0.9}, {2 * µm, 0.5}, {3 * µm, 0.1}} {
		near(t, fmt.Sprint("value at ", r.λ), s.At(r.λ), r.want, 1e-15)
	}
	for _, outside := range []pyro.Wavelength{0, 0.49 * µm, 3.01 * µm, -1, pyro.Wavelength(math.NaN()), pyro.Wavelength(math.Inf(1))} {
		if got := s.At(outside); !math.IsNaN(got) {
			t.Errorf("at %v, outside the table: %g", outside, got)
		}
	}
	if lo, hi := c.Range(); lo != 0.5*µm || hi != 3*µm {
		t.Errorf("range %v to %v", lo, hi)
	}
}

func TestCurveNamesTheBadPoint(t *testing.T) {
	for name, r := range map[string]struct {
		λ      []pyro.Wavelength
		values []float64
		index  int // −1: not a point
	}{
		"one point":            {[]pyro.Wavelength{1 * µm}, []float64{1}, -1},
		"lengths":              {[]pyro.Wavelength{1 * µm, 2 * µm}, []float64{1}, -1},
		"falling":              {[]pyro.Wavelength{2 * µm, 1 * µm}, []float64{1, 1}, 1},
		"twice":                {[]pyro.Wavelength{1 * µm, 1 * µm}, []float64{1, 1}, 1},
		"micrometres for m":    {[]pyro.Wavelength{1, 2}, []float64{1, 1}, 0},
		"NaN value":            {[]pyro.Wavelength{1 * µm, 2 * µm}, []float64{1, math.NaN()}, 1},
		"wavelength not given": {[]pyro.Wavelength{0, 2 * µm}, []float64{1, 1}, 0},
	} {
		_, err := pyro.NewCurve(r.λ, r.values)
		if !errors.Is(err, pyro.ErrCurve) {
			t.Errorf("%s: error %v", name, err)
		}
		var p *pyro.PointError
		if errors.As(err, &p) != (r.index >= 0) || p != nil && p.Index != r.index {
			t.Errorf("%s: %v does not name point %d", name, err, r.index)
		}
	}
}

func ExampleNewCurve() {
	window, err := pyro.NewCurve([]pyro.Wavelength{0.7 * pyro.Micrometre, 1.1 * pyro.Micrometre, 2.7 * pyro.Micrometre}, []float64{0.91, 0.93, 0.80})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.3f\n", window.At(900*pyro.Nanometre))
	// Output: 0.920
}
