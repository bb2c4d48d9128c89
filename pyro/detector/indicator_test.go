package detector_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
	"candent/pyro/detector"
)

const nm = pyro.Nanometre

// c1L and c2 as literals, so that the forward simulation below shares nothing with pyro.
const c1L, c2 = 1.1910429723971884e-16, 0.014387768775039338

// mean is a flat band's mean spectral radiance by its own midpoint rule.
func mean(lo, hi, T float64) float64 {
	if T == 0 {
		return 0
	}
	const steps = 20000
	sum := 0.0
	for i := range steps {
		λ := lo + (hi-lo)*(float64(i)+0.5)/steps
		sum += c1L / math.Pow(λ, 5) / math.Expm1(c2/(λ*T))
	}
	return sum / steps
}

// simulation is how far the midpoint rule is off: h²/24 of the second derivative, which for
// these bands is below 1e-9 of the mean.
const simulation = 2e-9

func flat(t testing.TB, lo, hi pyro.Wavelength) *pyro.Band {
	t.Helper()
	b, err := pyro.FlatTop(lo, hi)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func TestIndicatorAgainstItsOwnArithmetic(t *testing.T) {
	for _, c := range []struct {
		lo, hi, ε, τ, bg, window, T float64
	}{
		{900e-9, 1100e-9, 1, 1, 0, 0, 1200},
		{900e-9, 1100e-9, 0.95, 1, 0, 0, 1500},
		{900e-9, 1100e-9, 0.82, 0.92, 1300, 0, 1150},
		{8e-6, 14e-6, 0.9, 0.85, 296, 310, 420},
		{8e-6, 14e-6, 0.6, 0.7, 900, 305, 420}, // surroundings brighter than the target
	} {
		d := detector.Indicator{Band: flat(t, pyro.Wavelength(c.lo), pyro.Wavelength(c.hi)), Emissivity: c.ε, Window: c.τ,
			Background: pyro.Temperature(c.bg), WindowTemperature: pyro.Temperature(c.window), Low: 250, High: 2500}
		want := c.τ*(c.ε*mean(c.lo, c.hi, c.T)+(1-c.ε)*mean(c.lo, c.hi, c.bg)) + (1-c.τ)*mean(c.lo, c.hi, c.window)
		s, err := d.Radiance(pyro.Temperature(c.T))
		if err != nil || math.Abs(s/want-1) > simulation {
			t.Errorf("%+v: %.12g, %v; want %.12g", c, s, err, want)
		}
		back, err := d.Indicated(want)
		if err != nil || math.Abs(float64(back)-c.T) > simulation*want/d.Slope(back)+1e-9 {
			t.Errorf("%+v came back as %v, %v", c, back, err)
		}
		const h = 0.01
		slope := c.τ * c.ε * (mean(c.lo, c.hi, c.T+h) - mean(c.lo, c.hi, c.T-h)) / (2 * h)
		if got := d.Slope(pyro.Temperature(c.T)); math.Abs(got/slope-1) > 1e-6 {
			t.Errorf("%+v: slope %.9g, differences %.9g", c, got, slope)
		}
	}
}

// TestWrongSettings: what a monochromatic instrument shows that is set to ε = 1 (or 0.85)
// before a surface of another emissivity, and with surroundings ignored; in double
// precision, digits as printed.
func TestWrongSettings(t *testing.T) {
	for _, c := range []struct{ µm, T, ε, bg, set, want float64 }{
		{0.9, 1273.15, 0.8, 0, 1, 1250.9199}, {1.6, 1273.15, 0.8, 0, 1, 1234.1883}, {3.9, 1273.15, 0.8, 0, 1, 1186.3340},
		{5, 1273.15, 0.8, 0, 1, 1168.6727}, {10, 1273.15, 0.8, 0, 1, 1118.4053}, {0.9, 1273.15, 0.8, 0, 0.85, 1267.0326},
		{2.2, 573.15, 0.3, 0, 1, 518.4465}, {10, 573.15, 0.3, 0, 1, 393.5689},
		{10, 323.15, 0.95, 296.15, 0.95, 325.6316}, {10, 323.15, 0.5, 296.15, 0.5, 364.1571},
		{0.9, 1173.15, 0.8, 1473.15, 0.8, 1330.4835}, {3.9, 1173.15, 0.8, 1473.15, 0.8, 1334.6731},
	} {
		λ := pyro.Wavelength(c.µm) * pyro.Micrometre
		line, err := pyro.Line(λ)
		if err != nil {
			t.Fatal(err)
		}
		wrong := detector.Indicator{Band: line, Emissivity: c.set, Window: 1, Low: 250, High: 2500}
		s := c.ε*pyro.Radiance(λ, pyro.Temperature(c.T)) + (1-c.ε)*pyro.Radiance(λ, pyro.Temperature(c.bg))
		shown, err := wrong.Indicated(s)
		if err != nil || math.Abs(float64(shown)-c.want) > 0.5e-4 {
			t.Errorf("%+v: %.5f K, %v", c, float64(shown), err)
		}
		// And back: with the right settings the right temperature.
		seen, err := wrong.Radiance(shown)
		if err != nil {
			t.Fatal(err)
		}
		right := detector.Indicator{Band: line, Emissivity: c.ε, Window: 1, Background: pyro.Temperature(c.bg), Low: 250, High: 2500}
		if T, err := right.Indicated(seen); err != nil || math.Abs(float64(T)-c.T) > 1e-9*c.T {
			t.Errorf("%+v: back at %.9f K, %v", c, float64(T), err)
		}
	}
}

func TestIndicatorEnds(t *testing.T) {
	d := detector.Indicator{Band: flat(t, 900*nm, 1100*nm), Emissivity: 0.9, Window: 1, Low: 800, High: 1600, Resolution: 1}
	inside, err := d.Radiance(1599)
	if err != nil {
		t.Error(err)
	}
	var end *detector.CensoredError
	s, err := d.Radiance(1600)
	if !errors.As(err, &end) || !end.AtHigh || !errors.Is(err, detector.ErrCensored) || !(s > inside) {
		t.Errorf("at the high end: %g, %v", s, err)
	}
	if s, err := d.Radiance(800.4); !errors.As(err, &end) || end.AtHigh || !(s > 0) {
		t.Errorf("at the low end: %g, %v", s, err)
	}
	if T, err := d.Indicated(10 * s); T != 1600 || !errors.Is(err, detector.ErrCensored) {
		t.Errorf("saturated: %v, %v", T, err)
	}
	if T, err := d.Indicated(0); T != 800 || !errors.Is(err, detector.ErrCensored) {
		t.Errorf("dark: %v, %v", T, err)
	}
	for _, T := range []pyro.Temperature{799, 1602, 25, pyro.Temperature(math.NaN())} {
		if s, err := d.Radiance(T); !errors.Is(err, detector.ErrIndicator) || errors.Is(err, detector.ErrCensored) || s != 0 {
			t.Errorf("%v: %g, %v", T, s, err)
		}
	}
	if got, want := d.StdK(), 1/math.Sqrt(12); math.Abs(got-want) > rounding {
		t.Errorf("resolution: %g K, want %g", got, want)
	}
}

func TestIndicatorsThatAreNone(t *testing.T) {
	ok := detector.Indicator{Band: flat(t, 900*nm, 1100*nm), Emissivity: 0.9, Window: 1, Low: 800, High: 1600}
	for name, spoil := range map[string]func(*detector.Indicator){
		"no band":            func(d *detector.Indicator) { d.Band = nil },
		"no emissivity":      func(d *detector.Indicator) { d.Emissivity = 0 },
		"per cent":           func(d *detector.Indicator) { d.Emissivity = 95 },
		"no window":          func(d *detector.Indicator) { d.Window = 0 },
		"window above 1":     func(d *detector.Indicator) { d.Window = 1.01 },
		"background in °C":   func(d *detector.Indicator) { d.Background = 23 },
		"falling range":      func(d *detector.Indicator) { d.High = 700 },
		"resolution below 0": func(d *detector.Indicator) { d.Resolution = -1 },
	} {
		d := ok
		spoil(&d)
		_, err := d.Radiance(1000)
		_, err2 := d.Indicated(1)
		if !errors.Is(err, detector.ErrIndicator) || !errors.Is(err2, detector.ErrIndicator) {
			t.Errorf("%s: %v, %v", name, err, err2)
		}
	}
}

func pair(t testing.TB) *pyro.Pair {
	t.Helper()
	p, err := pyro.NewPair(flat(t, 700*nm, 800*nm), flat(t, 900*nm, 1000*nm), 800, 3000)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func TestRatioIndicatorAgainstItsOwnArithmetic(t *testing.T) {
	d := detector.RatioIndicator{Pair: pair(t), EmissivityRatio: 0.985, Low: 900, High: 2500, Resolution: 1}
	for _, T := range []float64{950, 1400, 2300} {
		want := 0.985 * mean(700e-9, 800e-9, T) / mean(900e-9, 1000e-9, T)
		r, err := d.Ratio(pyro.Temperature(T))
		if err != nil || math.Abs(r/want-1) > 2*simulation {
			t.Errorf("%g K: %.12g, %v; want %.12g", T, r, err, want)
		}
		back, err := d.Indicated(want)
		if err != nil || math.Abs(float64(back)-T) > 2*simulation/d.LogSlope(back)+1e-9 {
			t.Errorf("%g K came back as %v, %v", T, back, err)
		}
		const h = 0.01
		slope := (mean(700e-9, 800e-9, T+h)/mean(900e-9, 1000e-9, T+h) - mean(700e-9, 800e-9, T-h)/mean(900e-9, 1000e-9, T-h)) / (2 * h) * 0.985 / want
		if got := d.LogSlope(pyro.Temperature(T)); math.Abs(got/slope-1) > 1e-5 {
			t.Errorf("%g K: slope %.9g, differences %.9g", T, got, slope)
		}
	}
	var end *detector.CensoredError
	if r, err := d.Ratio(2500); !errors.As(err, &end) || !end.AtHigh || !(r > 0) {
		t.Errorf("at the high end: %g, %v", r, err)
	}
	if T, err := d.Indicated(1e-6); T != 900 || !errors.As(err, &end) || end.AtHigh {
		t.Errorf("ratio below the pair's range: %v, %v", T, err)
	}
	if T, err := d.Indicated(2); T != 2500 || !errors.As(err, &end) || !end.AtHigh {
		t.Errorf("ratio above the pair's range: %v, %v", T, err)
	}
	if r, err := d.Ratio(880); r != 0 || !errors.Is(err, detector.ErrIndicator) {
		t.Errorf("outside: %g, %v", r, err)
	}
	if _, err := d.Indicated(-1); !errors.Is(err, pyro.ErrPair) {
		t.Errorf("negative ratio: %v", err)
	}
}

func TestRatioIndicatorsThatAreNone(t *testing.T) {
	ok := detector.RatioIndicator{Pair: pair(t), EmissivityRatio: 1, Low: 900, High: 2500}
	for name, spoil := range map[string]func(*detector.RatioIndicator){
		"no pair":         func(d *detector.RatioIndicator) { d.Pair = nil },
		"no setting":      func(d *detector.RatioIndicator) { d.EmissivityRatio = 0 },
		"per cent":        func(d *detector.RatioIndicator) { d.EmissivityRatio = 98.5 },
		"beyond the pair": func(d *detector.RatioIndicator) { d.High = 3001 },
		"falling range":   func(d *detector.RatioIndicator) { d.Low = 2600 },
	} {
		d := ok
		spoil(&d)
		_, err := d.Ratio(1000)
		_, err2 := d.Indicated(0.1)
		if !errors.Is(err, detector.ErrIndicator) || !errors.Is(err2, detector.ErrIndicator) {
			t.Errorf("%s: %v, %v", name, err, err2)
		}
	}
}

func ExampleIndicator() {
	// An instrument at 1 µm showed 1180 °C with its emissivity set to 0.95; it is 0.82.
	band, err := pyro.FlatTop(900*nm, 1100*nm)
	if err != nil {
		fmt.Println(err)
		return
	}
	shown := detector.Indicator{Band: band, Emissivity: 0.95, Window: 1, Low: pyro.Celsius(600), High: pyro.Celsius(1600)}
	s, err := shown.Radiance(pyro.Celsius(1180))
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%.1f °C\n", band.RadianceTemperature(s/0.82).Celsius())
	// Output: 1202.2 °C
}
