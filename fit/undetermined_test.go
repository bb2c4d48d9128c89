package fit_test

import (
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// TestWhatReadingsCannotTell: state and direction in words, and no number, for every kind
// of noise.
func TestWhatReadingsCannotTell(t *testing.T) {
	linear := emissivity.Polynomial(1)
	for _, c := range []struct {
		name   string
		bands  []*pyro.Band
		family emissivity.Family
		shared []fit.Shared
		states []fit.State
		words  []string
	}{
		{"one channel, free grey", lines(t, 0.9, 0.9, 1), emissivity.Grey(), nil, []fit.State{fit.Bounded}, []string{"temperature", "level"}},
		{"one channel, relative grey", lines(t, 0.9, 0.9, 1), emissivity.Grey().Relative(), nil, []fit.State{fit.Undetermined}, []string{"temperature", "level"}},
		{"two channels, linear", lines(t, 0.7, 0.9, 2), linear, nil, []fit.State{fit.Bounded}, []string{"temperature", "level", "slope_per_um"}},
		{"two channels, relative power law", lines(t, 0.7, 0.9, 2), emissivity.PowerLaw().Relative(), nil, []fit.State{fit.Undetermined}, []string{"temperature", "exponent"}},
		{"one wavelength three times", lines(t, 0.8, 0.8, 3), linear, nil, []fit.State{fit.Bounded}, []string{"slope_per_um"}},
		{"one wavelength twice and another, linear", append(lines(t, 0.8, 0.8, 2), lines(t, 0.9, 0.9, 1)...), linear, nil, []fit.State{fit.Bounded}, []string{"temperature", "slope_per_um"}},
		{"fewer readings than parameters", lines(t, 0.7, 0.9, 3), emissivity.Polynomial(3), nil, []fit.State{fit.Bounded}, []string{"cubic_per_um3"}},
	} {
		n := len(c.bands)
		cov := make([]float64, n*n)
		signal, std := make([]float64, n), make([]float64, n)
		for i, b := range c.bands {
			signal[i] = 0.6 * b.Radiance(1500)
			std[i] = 0.01 * signal[i]
			cov[i*n+i] = std[i] * std[i]
		}
		for _, noise := range []fit.Noise{fit.PerReading(), fit.Relative(0.01), fit.Constant(1e6), fit.RelativeWithFloor(0.01, 1e5), fit.Covariance(cov)} {
			e, err := fit.New(c.bands, fit.Assume{Emissivity: c.family, Noise: noise, Shared: c.shared})
			if err != nil {
				t.Fatalf("%s: %v", c.name, err)
			}
			r := fit.Readings{Signal: signal}
			if noise.String() == fit.PerReading().String() {
				r.Std = std
			}
			res, err := e.Estimate(r)
			if err != nil {
				t.Errorf("%s, %v: %v", c.name, noise, err)
				continue
			}
			T, state := res.Temperature()
			if T != 0 || state != c.states[0] {
				t.Errorf("%s, %v: %v, %v; want no temperature and %v (%v)", c.name, noise, T, state, c.states[0], res)
			}
			if _, ok := res.Uncertainty(); ok {
				t.Errorf("%s, %v: an uncertainty", c.name, noise)
			}
			for i := range c.bands {
				if _, _, _, ok := res.Emissivity(i); ok {
					t.Errorf("%s, %v: an emissivity", c.name, noise)
				}
			}
			for _, name := range c.family.Parameters() {
				if _, _, state := res.Parameter(name); state != fit.ParameterUndetermined {
					t.Errorf("%s, %v: a value of %s", c.name, noise, name)
				}
			}
			for _, w := range c.words {
				if !strings.Contains(res.Undetermined(), w) || !strings.Contains(res.String(), w) {
					t.Errorf("%s, %v: %q does not name %s", c.name, noise, res.Undetermined(), w)
				}
			}
			if state == fit.Bounded {
				// ε ≤ 1: no colder than the radiance temperature of the brightest channel, less a few u.
				iv, _ := res.Interval()
				radiance := c.bands[0].RadianceTemperature(signal[0])
				if iv.LowOpen || !iv.HighOpen || iv.Low > 1500 || iv.Low < radiance-40 {
					t.Errorf("%s, %v: %+v, radiance temperature %v", c.name, noise, iv, radiance)
				}
			}
		}
	}
}

// TestUnknownSizeOfNoiseWithNothingLeft: as many parameters as readings and noise of
// unknown size leave no interval.
func TestUnknownSizeOfNoiseWithNothingLeft(t *testing.T) {
	bands := lines(t, 0.7, 0.9, 2)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Noise: fit.Relative(0.01).UpToFactor()})
	if err != nil {
		t.Fatal(err)
	}
	r, err := e.Estimate(fit.Readings{Signal: []float64{0.6 * bands[0].Radiance(1500), 0.6 * bands[1].Radiance(1500)}})
	if err != nil {
		t.Fatal(err)
	}
	if T, state := r.Temperature(); state != fit.Undetermined || T != 0 {
		t.Errorf("%v %v", T, state)
	}
	if !strings.Contains(r.String(), "nothing is left to estimate it by") {
		t.Errorf("%v", r)
	}
}

// TestConstantsThatTradeOff: a level known only through a scale that is not known well.
func TestConstantsThatTradeOff(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 6)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Noise: fit.Relative(0.005),
		Shared: []fit.Shared{fit.SharedScale("calibration scale", 0.1, 6)}})
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.5 * b.Radiance(1500)
	}
	r, err := e.Estimate(fit.Readings{Signal: y})
	if err != nil {
		t.Fatal(err)
	}
	// The shape fixes T; the level takes the scale's 10 % and cannot be better.
	if T, state := r.Temperature(); state != fit.Determined || T < 1499.9 || T > 1500.1 {
		t.Errorf("%v %v", T, state)
	}
	if v, u, state := r.Parameter("level"); state != fit.ParameterDetermined || u < 0.1*v {
		t.Errorf("level %g ± %g", v, u)
	}
}
