package detector_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"candent/pyro/detector"
)

// rounding is a few ULP of numbers of order 1.
const rounding = 1e-14

func TestPolynomialLinearityThereAndBack(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for _, c := range []struct{ c2, c3, lo, hi float64 }{
		{0, 0, 0, 10}, {0.02, 0, -0.1, 10}, {-0.02, 0, 0, 20}, {-0.05, 0.001, 0, 40}, {0, -1e-4, -1, 50}, {3e-6, -2e-11, 0, 65535},
	} {
		l, err := detector.PolynomialLinearity(c.c2, c.c3, c.lo, c.hi)
		if err != nil {
			t.Errorf("%+v: %v", c, err)
			continue
		}
		for range 200 {
			s := c.lo + (c.hi-c.lo)*rng.Float64()
			want := s + c.c2*math.Pow(s, 2) + c.c3*math.Pow(s, 3)
			v, slope := l.True(s)
			if math.Abs(v-want) > rounding*(math.Abs(want)+math.Abs(s)) {
				t.Errorf("%+v at %g: %.16g, want %.16g", c, s, v, want)
			}
			// What rounding of the value is worth in s.
			if back := l.Raw(v); math.Abs(back-s) > 4*rounding*(math.Abs(v)+math.Abs(s))/slope {
				t.Errorf("%+v: %.16g came back as %.16g (slope %g)", c, s, back, slope)
			}
			h := 1e-5 * (c.hi - c.lo)
			if s-h < c.lo || s+h > c.hi {
				continue
			}
			up, _ := l.True(s + h)
			down, _ := l.True(s - h)
			// Central differences of a cubic are off by c₃h² and by rounding.
			if d := (up - down) / (2 * h); math.Abs(d-slope) > math.Abs(c.c3)*h*h+1e-9 {
				t.Errorf("%+v at %g: slope %.10g, differences %.10g", c, s, slope, d)
			}
		}
		for _, s := range []float64{c.lo - 1e-6*(c.hi-c.lo), c.hi + 1e-6*(c.hi-c.lo), math.NaN()} {
			if v, slope := l.True(s); !math.IsNaN(v) || !math.IsNaN(slope) {
				t.Errorf("%+v outside, at %g: %g, %g", c, s, v, slope)
			}
		}
		top, _ := l.True(c.hi)
		if v := l.Raw(top * 1.001); !math.IsNaN(v) {
			t.Errorf("%+v beyond %g: %g", c, top, v)
		}
	}
}

func TestTabulatedLinearity(t *testing.T) {
	l, err := detector.TabulatedLinearity([]float64{0, 1, 3, 4}, []float64{0, 1, 3.4, 5})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range [][3]float64{{0, 0, 1}, {0.5, 0.5, 1}, {2, 2.2, 1.2}, {3.5, 4.2, 1.6}, {4, 5, 1.6}} { // by hand
		v, slope := l.True(c[0])
		if math.Abs(v-c[1]) > rounding || math.Abs(slope-c[2]) > rounding || math.Abs(l.Raw(v)-c[0]) > rounding {
			t.Errorf("at %g: %g with slope %g, back %g; want %g, %g", c[0], v, slope, l.Raw(v), c[1], c[2])
		}
	}
	for _, s := range []float64{-0.1, 4.1, math.NaN()} {
		if v, _ := l.True(s); !math.IsNaN(v) {
			t.Errorf("outside, at %g: %g", s, v)
		}
		if v := l.Raw(s - 0.1); s < 4 && !math.IsNaN(v) || !math.IsNaN(l.Raw(5.1)) {
			t.Errorf("raw outside, at %g: %g", s, v)
		}
	}
}

func TestNoLinearityIsLinear(t *testing.T) {
	var l *detector.Linearity
	v, slope := l.True(3.25)
	lo, hi := l.Range()
	if v != 3.25 || slope != 1 || l.Raw(3.25) != 3.25 || !math.IsInf(lo, -1) || !math.IsInf(hi, 1) {
		t.Errorf("%g, %g, %g, %g to %g", v, slope, l.Raw(3.25), lo, hi)
	}
}

func TestLinearitiesThatAreNone(t *testing.T) {
	for _, c := range [][4]float64{
		{-0.05, 0, 0, 10.01},   // slope 1 − 0.1s is 0 at 10
		{-0.05, 0.0008, 0, 40}, // vertex at 20.8, slope −0.04 there
		{0.02, 0, -25.1, 1},    // below the low end
		{0, 0, 5, 5}, {0, 0, 5, 4}, {math.NaN(), 0, 0, 1}, {0, 0, 0, math.Inf(1)},
	} {
		if _, err := detector.PolynomialLinearity(c[0], c[1], c[2], c[3]); !errors.Is(err, detector.ErrLinearity) {
			t.Errorf("%v: %v", c, err)
		}
	}
	for _, c := range []struct {
		raw, linear []float64
		index       int
	}{
		{[]float64{0, 1, 1}, []float64{0, 1, 2}, 2}, {[]float64{0, 1, 2}, []float64{0, 1, 1}, 2}, {[]float64{0, math.NaN(), 2}, []float64{0, 1, 2}, 1},
	} {
		var bad *detector.TableError
		if _, err := detector.TabulatedLinearity(c.raw, c.linear); !errors.As(err, &bad) || bad.Index != c.index || !errors.Is(err, detector.ErrLinearity) {
			t.Errorf("%v: %v", c, err)
		}
	}
	if _, err := detector.TabulatedLinearity([]float64{0}, []float64{0}); !errors.Is(err, detector.ErrLinearity) {
		t.Errorf("one point: %v", err)
	}
}
