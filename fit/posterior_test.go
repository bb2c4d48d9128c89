package fit_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// flat is a curve of one emissivity.
func flat(t testing.TB, ε float64) *pyro.Curve {
	t.Helper()
	c, err := pyro.NewCurve([]pyro.Wavelength{0.1 * µm, 100 * µm}, []float64{ε, ε})
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// TestNoSpreadIsAFixedEmissivity: a process without spread gives the fit with the emissivity
// fixed. With noise of 1e-5, median and minimum differ by the square of u/T, 1e-12; the two
// forms of the likelihood by the noise times u/T, 1e-11.
func TestNoSpreadIsAFixedEmissivity(t *testing.T) {
	const rel = 1e-5
	bands := lines(t, 0.7, 1.5, 9)
	rng := rand.New(rand.NewPCG(9, 1))
	for _, T := range []pyro.Temperature{700, 1500, 3000} {
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = 0.6 * b.Radiance(T) * (1 + rel*rng.NormFloat64())
		}
		reading := fit.Readings{Signal: y, Std: scaled(y, rel)}
		var temperature, std, lo, hi [2]float64
		for k, s := range []emissivity.Surface{emissivity.About("curve", flat(t, 0.6), 0), emissivity.Grey().Fix("level", 0.6)} {
			e, err := fit.New(bands, fit.Assume{Emissivity: s})
			if err != nil {
				t.Fatal(err)
			}
			r, err := e.Estimate(reading)
			if err != nil {
				t.Fatal(err)
			}
			best, state := r.Temperature()
			u, ok := r.Uncertainty()
			iv, _ := r.Interval()
			if state != fit.Determined || !ok {
				t.Fatalf("%v: state %v", s, state)
			}
			temperature[k], std[k], lo[k], hi[k] = float64(best), u, float64(iv.Low), float64(iv.High)
			if want := []fit.IntervalKind{fit.PosteriorInterval, fit.ProfileInterval}[k]; r.IntervalKind() != want {
				t.Errorf("%v: interval is a %v", s, r.IntervalKind())
			}
		}
		if math.Abs(temperature[0]/temperature[1]-1) > 1e-9 {
			t.Errorf("%v: median %.9f K, fit %.9f K", T, temperature[0], temperature[1])
		}
		if math.Abs(std[0]/std[1]-1) > 1e-3 || math.Abs(lo[0]-lo[1]) > 1e-3*std[1] || math.Abs(hi[0]-hi[1]) > 1e-3*std[1] {
			t.Errorf("%v: ± %g, %v to %v; fit ± %g, %v to %v", T, std[0], lo[0], hi[0], std[1], lo[1], hi[1])
		}
	}
}

// TestInfiniteSpreadIsTheGreyFit: one basis function, the level, of infinite spread gives the
// grey fit of relative level.
func TestInfiniteSpreadIsTheGreyFit(t *testing.T) {
	const rel = 1e-5
	bands := lines(t, 0.7, 1.5, 9)
	rng := rand.New(rand.NewPCG(9, 2))
	level := emissivity.NewProcess("level", emissivity.Component{Weight: 1, Level: 0.5, Spread: math.Inf(1)})
	for _, T := range []pyro.Temperature{900, 1500, 3000} {
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = 0.37 * b.Radiance(T) * (1 + rel*rng.NormFloat64())
		}
		reading := fit.Readings{Signal: y, Std: scaled(y, rel)}
		var temperature, std [2]float64
		for k, s := range []emissivity.Surface{level, emissivity.Grey().Relative()} {
			e, err := fit.New(bands, fit.Assume{Emissivity: s})
			if err != nil {
				t.Fatal(err)
			}
			r, err := e.Estimate(reading)
			if err != nil {
				t.Fatal(err)
			}
			best, state := r.Temperature()
			u, ok := r.Uncertainty()
			if state != fit.Determined || !ok {
				t.Fatalf("%v: state %v", s, state)
			}
			temperature[k], std[k] = float64(best), u
		}
		if math.Abs(temperature[0]/temperature[1]-1) > 1e-9 || math.Abs(std[0]/std[1]-1) > 1e-3 {
			t.Errorf("%v: median %.9f ± %.3g K, fit %.9f ± %.3g K", T, temperature[0], std[0], temperature[1], std[1])
		}
	}
}

// TestUnknownHoldsTheLongWaveCase: the case of TestLongWaveCase, in which polynomials of degree
// 0 to 3 come out at 297, 290, 336 and 255 K.
func TestUnknownHoldsTheLongWaveCase(t *testing.T) {
	ε := []float64{.80, .84, .87, .90, .93, .94, .94}
	bands := lines(t, 8, 14, 7)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = ε[i] * b.Radiance(320)
	}
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown(), Noise: fit.Relative(0.005)})
	if err != nil {
		t.Fatal(err)
	}
	r, err := e.Estimate(fit.Readings{Signal: y})
	if err != nil {
		t.Fatal(err)
	}
	iv, ok := r.Interval()
	if !ok || iv.LowOpen || iv.HighOpen || !(iv.Low <= 320 && 320 <= iv.High) {
		t.Errorf("%v: want 320 K inside", r)
	}
	t.Log(r)
}

// TestUnknownHoldsTungsten: the twelve spectra of TestRecreatableSpectra's sets; the default holds all.
func TestUnknownHoldsTungsten(t *testing.T) {
	_, curves := readCurves(t, "../testdata/tungsten.csv")
	for k, T := range []pyro.Temperature{1600, 2000, 2400, 2800} {
		for _, um := range [][]float64{{0.5, 0.6, 0.7, 0.8, 0.9}, equally(0.7, 1.5, 9), {0.4, 0.45, 0.5, 0.6, 0.7}} {
			bands, y := make([]*pyro.Band, len(um)), make([]float64, len(um))
			for i, l := range um {
				b, err := pyro.Line(pyro.Wavelength(l) * µm)
				if err != nil {
					t.Fatal(err)
				}
				bands[i], y[i] = b, curves[k].At(b.Mean())*b.Radiance(T)
			}
			e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown(), Noise: fit.Relative(0.01)})
			if err != nil {
				t.Fatal(err)
			}
			r, err := e.Estimate(fit.Readings{Signal: y})
			if err != nil {
				t.Fatal(err)
			}
			if iv, _ := r.Interval(); !(iv.Low <= T && T <= iv.High) {
				t.Errorf("%v µm at %v: %v", um, T, r)
			}
		}
	}
}

// TestFewBandsNeedAKind: with one or two bands the processes for all surfaces are refused with
// the kinds and what they assume; naming one, a curve, a known emissivity, or declaring the
// width acceptable, is enough.
func TestFewBandsNeedAKind(t *testing.T) {
	for n := 1; n <= 3; n++ {
		bands := lines(t, 0.8, 1.0, n)
		for _, s := range []emissivity.Process{emissivity.Unknown(), emissivity.AnySurface()} {
			_, err := fit.New(bands, fit.Assume{Emissivity: s})
			var wide *fit.WideError
			if n > 2 {
				if err != nil {
					t.Errorf("%d bands, %v: %v", n, s, err)
				}
				continue
			}
			if !errors.As(err, &wide) || !errors.Is(err, fit.ErrAssume) {
				t.Fatalf("%d bands, %v: %v", n, s, err)
			}
			if len(wide.Kinds) != len(emissivity.Kinds()) || wide.Channels != n {
				t.Errorf("%+v", wide)
			}
			for _, k := range emissivity.Kinds() {
				lo, hi := k.Process.Range(bands[0].Mean())
				if want := fmt.Sprintf("%s %.2g to %.2g", k.Name, lo, hi); !strings.Contains(err.Error(), want) {
					t.Errorf("%q is not in %v", want, err)
				}
			}
		}
		accepted := []emissivity.Surface{emissivity.Unknown().AcceptWide(), emissivity.Unknown().KnownAt(0.65*µm, 0.4, 0.04), emissivity.About("handbook curve", flat(t, 0.7), 0.05)}
		for _, k := range emissivity.Kinds() {
			accepted = append(accepted, k.Process)
		}
		for _, s := range accepted {
			e, err := fit.New(bands, fit.Assume{Emissivity: s, Noise: fit.Relative(0.01), Range: fit.Range{Min: 800, Max: 2000}})
			if err != nil {
				t.Errorf("%d bands, %v: %v", n, s, err)
				continue
			}
			y := make([]float64, n)
			for i, b := range bands {
				y[i] = 0.5 * b.Radiance(1200)
			}
			r, err := e.Estimate(fit.Readings{Signal: y})
			if err != nil {
				t.Errorf("%d bands, %v: %v", n, s, err)
				continue
			}
			if line := r.String(); !strings.Contains(line, "assumed: "+s.String()) || !strings.Contains(line, "ε between") {
				t.Errorf("%d bands: the line does not say what is assumed: %s", n, line)
			}
		}
	}
}

// TestProcessesRefuse lists what a process can't be combined with, each named.
func TestProcessesRefuse(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 4)
	short, err := pyro.NewCurve([]pyro.Wavelength{0.6 * µm, 0.9 * µm}, []float64{0.5, 0.5})
	if err != nil {
		t.Fatal(err)
	}
	cov := make([]float64, 16)
	for i := range 4 {
		cov[5*i] = 1
	}
	for want, a := range map[string]fit.Assume{
		"share as inputs":    {Emissivity: emissivity.Unknown(), Noise: fit.Covariance(cov)},
		"state the size":     {Emissivity: emissivity.Unknown(), Noise: fit.Relative(0.01).UpToFactor()},
		"mask":               {Emissivity: emissivity.Unknown(), Loss: fit.Huber(1.345)},
		"exactly known":      {Emissivity: emissivity.Unknown(), Temperature: fit.TemperaturePrior{Value: 1500}},
		"does its curve end": {Emissivity: emissivity.About("short", short, 0.1)},
		"Centre":             {Emissivity: emissivity.NewProcess("x", emissivity.Component{Weight: 1, Level: 0.5, Slope: 1})},
	} {
		_, err := fit.New(bands, a)
		if !errors.Is(err, fit.ErrAssume) || !strings.Contains(err.Error(), want) {
			t.Errorf("want %q in: %v", want, err)
		}
	}
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown()})
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, 4)
	for i, b := range bands {
		y[i] = 0.5 * b.Radiance(1200)
	}
	if _, err := e.Estimate(fit.Readings{Signal: scaled(y, 1e12), Std: scaled(y, 1e10)}); !errors.Is(err, fit.ErrRange) {
		t.Errorf("readings that no temperature gives: %v", err)
	}
	if _, _, err := e.Curve(fit.Readings{Signal: y, Std: scaled(y, 0.01)}, []pyro.Temperature{1000}); !errors.Is(err, fit.ErrAssume) {
		t.Errorf("Curve: %v", err)
	}
}

// TestPosteriorResult: the accessors agree with each other and with the density.
func TestPosteriorResult(t *testing.T) {
	bands := lines(t, 0.55, 1.6, 16)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown(), Noise: fit.Relative(0.005)})
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.45 * math.Pow(float64(b.Mean()/µm), -0.4) * b.Radiance(1700)
	}
	r, err := e.Estimate(fit.Readings{Signal: y})
	if err != nil {
		t.Fatal(err)
	}
	T, f := r.Posterior()
	total, below, mean := 0.0, 0.0, 0.0
	median, state := r.Temperature()
	for i := 1; i < len(T); i++ {
		if !(T[i] > T[i-1]) {
			t.Fatalf("the density's points do not rise at %d", i)
		}
		p := (f[i] + f[i-1]) / 2 * float64(T[i]-T[i-1])
		total += p
		mean += p * float64(T[i]+T[i-1]) / 2
		if T[i] <= median {
			below += p
		}
	}
	if math.Abs(total-1) > 0.01 || math.Abs(below-0.5) > 0.05 {
		t.Errorf("the density integrates to %.4f, to %.4f below the median", total, below)
	}
	u, ok := r.Uncertainty()
	if m, has := r.Mean(); !has || !ok || math.Abs(float64(m)-mean) > 0.1*u {
		t.Errorf("mean %v, of the density %.2f", m, mean)
	}
	iv, _ := r.Interval()
	if state != fit.Determined || !(iv.Low < median && median < iv.High) || math.Abs(float64(iv.High-iv.Low)-4*u) > u {
		t.Errorf("state %v, %v ± %.3g K, interval %v to %v", state, median, u, iv.Low, iv.High)
	}
	for i, b := range bands {
		truth := 0.45 * math.Pow(float64(b.Mean()/µm), -0.4)
		ε, std, hasStd, ok := r.Emissivity(i)
		if !ok || !hasStd || !(std > 0) || math.Abs(ε-truth) > 2.5*std {
			t.Errorf("channel %d: emissivity %.3f ± %.3f, truth %.3f", i, ε, std, truth)
		}
	}
	sum := 0.0
	shares := r.ComponentShares()
	for i, s := range shares {
		sum += s.Share
		if i > 0 && s.Share > shares[i-1].Share {
			t.Error("shares are not sorted")
		}
	}
	if len(shares) != len(emissivity.Unknown().Components()) || math.Abs(sum-1) > 1e-9 {
		t.Errorf("%d shares add up to %g", len(shares), sum)
	}
	if _, _, state := r.Parameter("level"); state != fit.ParameterUndetermined {
		t.Errorf("a process has no level: %v", state)
	}
	if report := r.Report(); !strings.Contains(report, "posterior, 95 %") || !strings.Contains(report, "unknown surface") {
		t.Errorf("report:\n%s", report)
	}
	if _, err := r.MarshalJSON(); err != nil {
		t.Error(err)
	}
}

// TestPosteriorEnds: an interval is open where the range, not the readings, ends the posterior.
func TestPosteriorEnds(t *testing.T) {
	bands := lines(t, 0.9, 0.9, 1)
	y := []float64{0.4 * bands[0].Radiance(1500)}
	for _, c := range []struct {
		min, max  pyro.Temperature
		low, high bool
		state     fit.State
	}{
		{500, 3000, false, false, fit.Determined},
		{500, 1500, false, true, fit.Bounded},
		{1480, 3000, true, false, fit.Bounded},
		{1480, 1500, true, true, fit.Undetermined},
	} {
		e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown().AcceptWide(), Noise: fit.Relative(0.005), Range: fit.Range{Min: c.min, Max: c.max}})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		if iv, _ := r.Interval(); iv.LowOpen != c.low || iv.HighOpen != c.high || r.State() != c.state {
			t.Errorf("%v to %v: %v, %+v", c.min, c.max, r.State(), iv)
		}
	}
}

// TestPosteriorSymmetries: another unit of a relative level changes nothing but the amplitude;
// an absolute one in another order of channels nothing at all.
func TestPosteriorSymmetries(t *testing.T) {
	bands := lines(t, 0.55, 1.6, 12)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.5 * b.Radiance(1800)
	}
	estimate := func(bands []*pyro.Band, y []float64, s emissivity.Surface) (float64, float64) {
		e, err := fit.New(bands, fit.Assume{Emissivity: s, Noise: fit.Relative(0.005)})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		iv, _ := r.Interval()
		return float64(iv.Low), float64(iv.High)
	}
	a, b := estimate(bands, y, emissivity.Unknown().Relative())
	c, d := estimate(bands, scaled(y, 1e-9), emissivity.Unknown().Relative())
	if math.Abs(a-c) > 0.01 || math.Abs(b-d) > 0.01 {
		t.Errorf("relative level: %.3f to %.3f K, in another unit %.3f to %.3f K", a, b, c, d)
	}
	var reversed []*pyro.Band
	var z []float64
	for i := len(bands) - 1; i >= 0; i-- {
		reversed, z = append(reversed, bands[i]), append(z, y[i])
	}
	a, b = estimate(bands, y, emissivity.Unknown())
	c, d = estimate(reversed, z, emissivity.Unknown())
	if math.Abs(a-c) > 0.1 || math.Abs(b-d) > 0.1 {
		t.Errorf("%.3f to %.3f K, in reverse order %.3f to %.3f K", a, b, c, d)
	}
}

// TestKnownEmissivityNarrows: an emissivity known at one wavelength narrows the interval, and
// one known as the truth keeps it inside.
func TestKnownEmissivityNarrows(t *testing.T) {
	bands := lines(t, 0.7, 1.0, 8)
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.4 * b.Radiance(1500)
	}
	width := func(s emissivity.Surface) float64 {
		e, err := fit.New(bands, fit.Assume{Emissivity: s, Noise: fit.Relative(0.005)})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		iv, _ := r.Interval()
		if !(iv.Low <= 1500 && 1500 <= iv.High) {
			t.Errorf("%v: %v", s, r)
		}
		return float64(iv.High - iv.Low)
	}
	plain := width(emissivity.Unknown())
	known := width(emissivity.Unknown().KnownAt(0.8*µm, 0.4, 0.02))
	about := width(emissivity.About("curve", flat(t, 0.4), 0.05))
	if !(known < plain/2) || !(about < plain/2) {
		t.Errorf("%.1f K, with ε known within 5 %% %.1f K, about a curve within 5 %% %.1f K", plain, known, about)
	}
}

func TestPosteriorAllocatesNothing(t *testing.T) {
	bands := lines(t, 0.55, 0.95, 64)
	for _, s := range []emissivity.Surface{emissivity.Unknown(), emissivity.AnySurface(), emissivity.Unknown().Relative()} {
		e, err := fit.New(bands, fit.Assume{Emissivity: s, Shared: []fit.Shared{fit.SharedScale("scale", 0.01, 64)}})
		if err != nil {
			t.Fatal(err)
		}
		all := spectra(bands, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, 8)
		w, r := e.NewWork(), e.NewResult()
		i := 0
		if n := testing.AllocsPerRun(16, func() {
			if err := e.EstimateTo(r, w, all[i%8]); err != nil {
				t.Fatal(err)
			}
			if err := e.IntervalTo(r, w, all[i%8], 0.9); err != nil {
				t.Fatal(err)
			}
			i++
		}); n != 0 {
			t.Errorf("%v: %g allocations", s, n)
		}
	}
}

// TestWideBandsAndAPrior: flat-top bands 10 nm wide, whose tables give the same as lines at
// their middles to the size of the width's effect; and a temperature known beforehand.
func TestWideBandsAndAPrior(t *testing.T) {
	narrow, broad := lines(t, 0.7, 1.0, 8), wide(t, 0.7, 1.0, 8)
	var low, high [3]float64
	for k, bands := range [][]*pyro.Band{narrow, broad, narrow} {
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = 0.4 * b.Radiance(1500)
		}
		a := fit.Assume{Emissivity: emissivity.Unknown(), Noise: fit.Relative(0.005)}
		if k == 2 {
			a.Temperature = fit.TemperaturePrior{Value: 1500, StdK: 5}
		}
		e, err := fit.New(bands, a)
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		iv, _ := r.Interval()
		low[k], high[k] = float64(iv.Low), float64(iv.High)
	}
	if math.Abs(low[0]-low[1]) > 0.5 || math.Abs(high[0]-high[1]) > 0.5 {
		t.Errorf("lines %.2f to %.2f K, bands %.2f to %.2f K", low[0], high[0], low[1], high[1])
	}
	if w := high[2] - low[2]; !(w < 20) || !(w > 15) {
		t.Errorf("with 1500 ± 5 K beforehand %.2f to %.2f K", low[2], high[2])
	}
}
