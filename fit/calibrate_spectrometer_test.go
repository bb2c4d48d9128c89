package fit_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// spectrometer is a set of bands with gains, and sources that it has seen.
type spectrometer struct {
	bands   []*pyro.Band
	gain    []float64
	sources []fit.SourceSpectrum
	lamp    *pyro.Curve
	noise   float64 // relative, of each signal
}

func newSpectrometer(t testing.TB, channels int, noise float64) spectrometer {
	t.Helper()
	var s spectrometer
	s.noise = noise
	var λ []pyro.Wavelength
	var lamp []float64
	for i := range channels {
		λ = append(λ, (650+pyro.Wavelength(i)*400/pyro.Wavelength(channels))*pyro.Nanometre)
		b, err := pyro.Line(λ[i])
		if err != nil {
			t.Fatal(err)
		}
		s.bands = append(s.bands, b)
		s.gain = append(s.gain, 1e-6*(1+0.5*math.Sin(float64(i))))
		lamp = append(lamp, 0.4*pyro.Radiance(λ[i], 2700))
	}
	var err error
	if s.lamp, err = pyro.NewCurve(λ, lamp); err != nil {
		t.Fatal(err)
	}
	s.sources = []fit.SourceSpectrum{
		{Name: "furnace", Temperature: &pyro.Input{Name: "furnace temperature", Unit: "K", Value: 1400, Std: 1.5}, Level: &pyro.Input{Name: "cavity emissivity", Value: 0.998, Std: 0.001}},
		{Name: "lamp", Lamp: s.lamp, Level: &pyro.Input{Name: "lamp certificate", Value: 1, Std: 0.012}},
	}
	s.see(nil, 0, 0, 0)
	return s
}

// see writes the signals with noise and with departures of the three inputs, in standard
// uncertainties: what the source truly was.
func (s *spectrometer) see(rng *rand.Rand, temperature, level, lamp float64) {
	for j := range s.sources {
		x := &s.sources[j]
		x.Signal, x.Std = make([]float64, len(s.bands)), make([]float64, len(s.bands))
		for i, b := range s.bands {
			l := s.lamp.At(b.Mean()) * (1 + 0.012*lamp)
			if j == 0 {
				l = (0.998 + 0.001*level) * pyro.Radiance(b.Mean(), pyro.Temperature(1400+1.5*temperature))
			}
			v := s.gain[i] * l
			x.Signal[i], x.Std[i] = v, s.noise*v
			if rng != nil {
				x.Signal[i] += s.noise * v * rng.NormFloat64()
			}
		}
	}
}

func TestSpectrometerGainsThereAndBack(t *testing.T) {
	s := newSpectrometer(t, 6, 0.003)
	for name, sources := range map[string][]fit.SourceSpectrum{"furnace": s.sources[:1], "lamp": s.sources[1:], "both": s.sources} {
		c, err := fit.CalibrateSpectrometer(s.bands, sources)
		if err != nil {
			t.Fatal(err)
		}
		for i, g := range s.gain {
			if math.Abs(c.Gain[i]/g-1) > 1e-12 {
				t.Errorf("%s, channel %d: gain %.15g, want %.15g", name, i, c.Gain[i], g)
			}
		}
		chi2, dof := c.ChiSquared()
		if chi2 > 1e-15 || dof != 6*(len(sources)-1) {
			t.Errorf("%s: χ² %g with %d", name, chi2, dof)
		}
	}
	// One furnace: what is shared is the temperature, −n u/T, and the cavity; by hand.
	c, err := fit.CalibrateSpectrometer(s.bands, s.sources[:1])
	if err != nil {
		t.Fatal(err)
	}
	if len(c.Effects) != 2 || c.Effects[0].Name != "furnace temperature" || c.Effects[1].Name != "cavity emissivity" {
		t.Fatalf("effects %+v", c.Effects)
	}
	for i, b := range s.bands {
		x := pyro.C2 / (float64(b.Mean()) * 1400)
		if want := -x / (1 - math.Exp(-x)) * 1.5 / 1400; math.Abs(c.Effects[0].Relative[i]/want-1) > 1e-12 {
			t.Errorf("channel %d: temperature %g, want %g", i, c.Effects[0].Relative[i], want)
		}
		if want := -0.001 / 0.998; math.Abs(c.Effects[1].Relative[i]/want-1) > 1e-12 {
			t.Errorf("channel %d: cavity %g, want %g", i, c.Effects[1].Relative[i], want)
		}
		if want := 0.003 * s.gain[i]; math.Abs(c.Std[i]/want-1) > 1e-12 {
			t.Errorf("channel %d: own %g, want %g", i, c.Std[i], want)
		}
		if want := math.Hypot(math.Hypot(0.003, c.Effects[0].Relative[i]), 0.001/0.998); math.Abs(c.RelativeStd(i)/want-1) > 1e-12 {
			t.Errorf("channel %d: whole %g, want %g", i, c.RelativeStd(i), want)
		}
	}
}

// TestSharedSourceInput: one furnace seen twice, at one temperature that is off: the average
// doesn't make its part smaller, while that of two furnaces falls by √2.
func TestSharedSourceInput(t *testing.T) {
	s := newSpectrometer(t, 5, 1e-4)
	once := s.sources[0]
	once.Level = nil
	other := once
	other.Temperature = &pyro.Input{Name: "another", Unit: "K", Value: 1400, Std: 1.5}
	sameC, err := fit.CalibrateSpectrometer(s.bands, []fit.SourceSpectrum{once, once})
	if err != nil {
		t.Fatal(err)
	}
	twoC, err := fit.CalibrateSpectrometer(s.bands, []fit.SourceSpectrum{once, other})
	if err != nil {
		t.Fatal(err)
	}
	one, err := fit.CalibrateSpectrometer(s.bands, []fit.SourceSpectrum{once})
	if err != nil {
		t.Fatal(err)
	}
	for i := range s.bands {
		a, b, c := sameC.Effects[0].Relative[i], twoC.Effects[0].Relative[i], one.Effects[0].Relative[i]
		if len(sameC.Effects) != 1 || math.Abs(a/c-1) > 1e-12 {
			t.Errorf("channel %d: seen twice %g, once %g", i, a, c)
		}
		if len(twoC.Effects) != 2 || math.Abs(math.Hypot(b, twoC.Effects[1].Relative[i])/math.Abs(c)-math.Sqrt(0.5)) > 1e-12 {
			t.Errorf("channel %d: two furnaces %g", i, b)
		}
	}
}

// TestSpectrometerAgainstMonteCarlo: covariances of the gains between all channels over
// simulated calibrations, against own and shared parts together, within 4 standard errors of
// each (21 entries) and the second order of 1 %; mean of χ² within three.
func TestSpectrometerAgainstMonteCarlo(t *testing.T) {
	const channels, n = 6, 4000
	s := newSpectrometer(t, channels, 0.004)
	c, err := fit.CalibrateSpectrometer(s.bands, s.sources)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(10, 10))
	var sum [channels]float64
	var cross [channels][channels]float64
	chi := 0.0
	for range n {
		s.see(rng, rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64())
		x, err := fit.CalibrateSpectrometer(s.bands, s.sources)
		if err != nil {
			t.Fatal(err)
		}
		chi2, _ := x.ChiSquared()
		chi += chi2
		for i := range channels {
			sum[i] += x.Gain[i]/s.gain[i] - 1
			for k := range channels {
				cross[i][k] += (x.Gain[i]/s.gain[i] - 1) * (x.Gain[k]/s.gain[k] - 1)
			}
		}
	}
	want := func(i, k int) float64 {
		v := 0.0
		if i == k {
			v = math.Pow(c.Std[i]/c.Gain[i], 2)
		}
		for _, e := range c.Effects {
			v += e.Relative[i] * e.Relative[k]
		}
		return v
	}
	for i := range channels {
		for k := i; k < channels; k++ {
			got := cross[i][k]/n - sum[i]*sum[k]/n/n
			scale := math.Sqrt(want(i, i)*want(k, k) + want(i, k)*want(i, k)) // × √(1/n): its standard error
			if math.Abs(got-want(i, k)) > 4*scale/math.Sqrt(n)+0.01*scale {
				t.Errorf("covariance of %d and %d: %.4g simulated, %.4g stated", i, k, got, want(i, k))
			}
		}
	}
	if math.Abs(chi/n-channels) > 3*math.Sqrt(2*channels/float64(n))+0.01*channels {
		t.Errorf("mean χ² %.3f of %d degrees of freedom", chi/n, channels)
	}
	// A spectrum that doesn't fit its source shows.
	s.see(nil, 0, 0, 0)
	s.sources[1].Signal[2] *= 1.05
	off, err := fit.CalibrateSpectrometer(s.bands, s.sources)
	if err != nil {
		t.Fatal(err)
	}
	if chi2, _ := off.ChiSquared(); chi2 < 25 {
		t.Errorf("a channel 5 %% off: χ² %.1f", chi2)
	}
	for i := range channels {
		if d := off.Gain[i]/s.gain[i] - 1; i != 2 && math.Abs(d) > 1e-12 {
			t.Errorf("channel %d moved by %g", i, d)
		}
	}
}

// TestSharedEffectsOfACalibration: temperatures of a grey surface by a spectrometer that was
// calibrated at one furnace. The standard deviation of their errors is what the estimate
// states with the effects, within 3 standard errors; without them it states much less.
func TestSharedEffectsOfACalibration(t *testing.T) {
	const channels, n = 8, 300
	s := newSpectrometer(t, channels, 0.002)
	first, err := fit.CalibrateSpectrometer(s.bands, s.sources[:1])
	if err != nil {
		t.Fatal(err)
	}
	assume := fit.Assume{Emissivity: emissivity.Grey(), Noise: fit.PerReading(), Range: fit.Range{Min: 1000, Max: 2600}}
	without, err := fit.New(s.bands, assume)
	if err != nil {
		t.Fatal(err)
	}
	assume.Shared = first.Effects
	with, err := fit.New(s.bands, assume)
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(12, 12))
	const T, ε = 1800.0, 0.6
	var sum, sum2, u, uWithout float64
	for range n {
		s.see(rng, rng.NormFloat64(), rng.NormFloat64(), 0)
		c, err := fit.CalibrateSpectrometer(s.bands, s.sources[:1])
		if err != nil {
			t.Fatal(err)
		}
		reading := fit.Readings{Signal: make([]float64, channels), Std: make([]float64, channels)}
		for i, b := range s.bands {
			v := s.gain[i] * ε * pyro.Radiance(b.Mean(), T) * (1 + 0.002*rng.NormFloat64())
			reading.Signal[i] = v / c.Gain[i]
			reading.Std[i] = reading.Signal[i] * math.Hypot(0.002, c.Std[i]/c.Gain[i])
		}
		r, err := with.Estimate(reading)
		if err != nil {
			t.Fatal(err)
		}
		got, _ := r.Temperature()
		std, ok := r.Uncertainty()
		if !ok {
			t.Fatal("no uncertainty")
		}
		d := float64(got) - T
		sum, sum2, u = sum+d, sum2+d*d, u+std/n
		if r, err = without.Estimate(reading); err != nil {
			t.Fatal(err)
		}
		std, _ = r.Uncertainty()
		uWithout += std / n
	}
	sd := math.Sqrt(sum2/n - sum*sum/n/n)
	t.Logf("standard deviation %.2f K, stated %.2f K, without the shared effects %.2f K", sd, u, uWithout)
	if math.Abs(u/sd-1) > 3/math.Sqrt(2*n) {
		t.Errorf("standard deviation %.3f K, stated %.3f K", sd, u)
	}
	if uWithout > 0.9*u {
		t.Errorf("without the shared effects %.3f K, with them %.3f K", uWithout, u)
	}
}

func TestSpectraThatAreNone(t *testing.T) {
	for name, c := range map[string]struct {
		spoil func(*spectrometer)
		row   int
	}{
		"dark not subtracted": {func(s *spectrometer) { s.sources[1].Signal[3] = -1 }, 3},
		"a hole":              {func(s *spectrometer) { s.sources[0].Signal[4] = math.NaN() }, 4},
		"no noise":            {func(s *spectrometer) { s.sources[0].Std[4] = 0 }, 4},
		"lamp ends early":     {func(s *spectrometer) { s.sources[1].Lamp = cut(t, s.lamp, s.bands[:4]) }, 4},
		"no source":           {func(s *spectrometer) { s.sources[1].Lamp = nil }, 1},
		"two sources in one":  {func(s *spectrometer) { s.sources[0].Lamp = s.lamp }, 0},
		"a short spectrum":    {func(s *spectrometer) { s.sources[1].Signal = s.sources[1].Signal[:5] }, 1},
		"in °C":               {func(s *spectrometer) { s.sources[0].Temperature.Value = 100 }, 0},
		"source unknown":      {func(s *spectrometer) { s.sources[1].Level.Std = math.Inf(1) }, 1},
		"input without name":  {func(s *spectrometer) { s.sources[0].Temperature.Name = "" }, 0},
		"some uncertainties":  {func(s *spectrometer) { s.sources[1].Std = nil }, 1},
		"no band":             {func(s *spectrometer) { s.bands[2] = nil }, 2},
	} {
		s := newSpectrometer(t, 6, 0.003)
		c.spoil(&s)
		_, err := fit.CalibrateSpectrometer(s.bands, s.sources)
		var bad *fit.CalibrationError
		if !errors.As(err, &bad) || bad.Row != c.row || !errors.Is(err, fit.ErrCalibration) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if _, err := fit.CalibrateSpectrometer(nil, nil); !errors.Is(err, fit.ErrCalibration) {
		t.Errorf("nothing: %v", err)
	}
}

func cut(t testing.TB, c *pyro.Curve, bands []*pyro.Band) *pyro.Curve {
	t.Helper()
	var λ []pyro.Wavelength
	var v []float64
	for _, b := range bands {
		λ, v = append(λ, b.Mean()), append(v, c.At(b.Mean()))
	}
	out, err := pyro.NewCurve(λ, v)
	if err != nil {
		t.Fatal(err)
	}
	return out
}
