package fit

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// posteriorOf estimates a reading in the form asked for.
func posteriorOf(t *testing.T, e *Estimator, r Readings, linear bool) *Result {
	t.Helper()
	w, res := e.NewWork(), e.NewResult()
	w.process.forceLinear = linear
	if err := e.EstimateTo(res, w, r); err != nil {
		t.Fatal(err)
	}
	if err := e.IntervalTo(res, w, r, 0.95); err != nil {
		t.Fatal(err)
	}
	if err := e.DiagnoseTo(res, w, r); err != nil {
		t.Fatal(err)
	}
	return res
}

// TestLinearFormEqualsTheLogarithmic: on readings of 20 standard uncertainties and more both
// forms give the same median and the same ends, to a twentieth of the posterior's standard
// deviation (0.016 was measured).
func TestLinearFormEqualsTheLogarithmic(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 9))
	worst := 0.0
	for _, n := range []int{3, 6, 12} {
		for _, rel := range []float64{0.005, 0.05} {
			bands, λ := testBands(t, 0.7, 1.5, 0, n)
			e, err := New(bands, Assume{Emissivity: emissivity.Unknown(), Range: Range{700, 3500}})
			if err != nil {
				t.Fatal(err)
			}
			for range 6 {
				T := pyro.Temperature(1000 + 1200*rng.Float64())
				level, slope := 0.3+0.6*rng.Float64(), 0.3*rng.NormFloat64()
				r := Readings{Signal: make([]float64, n), Std: make([]float64, n)}
				for j, b := range bands {
					s := min(0.98, level*math.Exp(slope*math.Log(λ[j]/1.0))) * b.Radiance(T)
					r.Signal[j] = s * (1 + rel*rng.NormFloat64())
					r.Std[j] = rel * s * 0.98 // so that none is weak by chance
				}
				strong := true
				for j, s := range r.Signal {
					strong = strong && s >= 20*r.Std[j]
				}
				if !strong {
					continue
				}
				a, b := posteriorOf(t, e, r, false), posteriorOf(t, e, r, true)
				u := a.posterior.std
				ia, _ := a.Interval()
				ib, _ := b.Interval()
				for what, pair := range map[string][2]float64{"median": {a.posterior.median, b.posterior.median}, "low": {float64(ia.Low), float64(ib.Low)}, "high": {float64(ia.High), float64(ib.High)}} {
					d := math.Abs(pair[0]-pair[1]) / u
					worst = math.Max(worst, d)
					if d > 0.05 {
						t.Errorf("%d channels, %g %%: %s %.2f and %.2f K, %.2g std apart", n, 100*rel, what, pair[0], pair[1], d)
					}
				}
			}
		}
	}
	t.Logf("worst difference %.2g of the posterior's standard deviation", worst)
}

// TestLinearFormAgainstMonteCarlo integrates over surfaces drawn from the prior: each weighs by
// its likelihood, T flat. One and two channels, some at the noise and below 0.
func TestLinearFormAgainstMonteCarlo(t *testing.T) {
	process := emissivity.NewProcess("test", emissivity.Component{Weight: 1, Level: 0.5, Smooth: emissivity.Term{Std: 0.4, Length: 1}})
	bands, λ := testBands(t, 0.8, 1.1, 0, 2)
	e, err := New(bands, Assume{Emissivity: process, Range: Range{700, 1600}})
	if err != nil {
		t.Fatal(err)
	}
	σ := []float64{0.05 * 0.5 * bands[0].Radiance(1100), 0.02 * 0.5 * bands[1].Radiance(1100)}
	for _, signal := range [][]float64{
		{0.5 * bands[0].Radiance(1100), 0.5 * bands[1].Radiance(1100)},
		{-0.5 * σ[0], 0.5 * bands[1].Radiance(1000)}, {2 * σ[0], 4 * σ[1]},
	} {
		r := Readings{Signal: signal, Std: σ}
		got := posteriorOf(t, e, r, true)
		// The curve at two wavelengths by its covariance, ε ≤ 1 by rejection.
		c00, c01, c11 := process.Covariance(0, bands[0].Mean(), bands[0].Mean()), process.Covariance(0, bands[0].Mean(), bands[1].Mean()), process.Covariance(0, bands[1].Mean(), bands[1].Mean())
		l0 := math.Sqrt(c00)
		l1 := c01 / l0
		l2 := math.Sqrt(c11 - l1*l1)
		rng := rand.New(rand.NewPCG(3, 3))
		const steps = 300
		weight := make([]float64, steps)
		for range 20000 {
			a, b := rng.NormFloat64(), rng.NormFloat64()
			g0, g1 := math.Log(0.5)+l0*a, math.Log(0.5)+l1*a+l2*b
			if g0 > 0 || g1 > 0 {
				continue
			}
			for i := range weight {
				T := pyro.Temperature(700 + 900*(float64(i)+0.5)/steps)
				z0 := (signal[0] - math.Exp(g0)*bands[0].Radiance(T)) / σ[0]
				z1 := (signal[1] - math.Exp(g1)*bands[1].Radiance(T)) / σ[1]
				weight[i] += math.Exp(-(z0*z0 + z1*z1) / 2)
			}
		}
		sum, m1, m2 := 0.0, 0.0, 0.0
		for i, w := range weight {
			T := 700 + 900*(float64(i)+0.5)/steps
			sum, m1, m2 = sum+w, m1+w*T, m2+w*T*T
		}
		mean := m1 / sum
		std := math.Sqrt(m2/sum - mean*mean)
		// Laplace's approximation and the truncation's Gaussian one; Monte Carlo errs by 1 %.
		if d := math.Abs(got.posterior.mean-mean) / std; d > 0.1 {
			t.Errorf("readings %.3g and %.3g σ at %v µm: mean %.1f, Monte Carlo %.1f ± %.1f K", signal[0]/σ[0], signal[1]/σ[1], λ, got.posterior.mean, mean, std)
		}
		if f := got.posterior.std / std; math.Abs(f-1) > 0.1 {
			t.Errorf("readings %.3g and %.3g σ: std %.1f, Monte Carlo %.1f K", signal[0]/σ[0], signal[1]/σ[1], got.posterior.std, std)
		}
	}
}

// TestLinearFormHoldsTheTruth draws surfaces from the process, T flat, and noise by which about
// half of the channels are weak: 95 % intervals hold the truth within 3 binomial standard errors.
func TestLinearFormHoldsTheTruth(t *testing.T) {
	process := emissivity.NewProcess("test", emissivity.Component{Weight: 1, Level: 0.5, Smooth: emissivity.Term{Std: 0.35, Length: 1}, Roughness: 0.01})
	const n, draws = 4, 300
	bands, _ := testBands(t, 0.7, 1.6, 0, n)
	e, err := New(bands, Assume{Emissivity: process, Range: Range{800, 1600}})
	if err != nil {
		t.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(12, 1))
	held, linear := 0, 0
	for drawn := 0; drawn < draws; {
		// A curve by the Cholesky factor of its covariance, those above 1 left out.
		var l [n * n]float64
		g := make([]float64, n)
		for i := range n {
			for j := range i + 1 {
				l[i*n+j] = process.Covariance(0, bands[i].Mean(), bands[j].Mean())
			}
		}
		if !cholesky(l[:], n) {
			t.Fatal("covariance")
		}
		z := make([]float64, n)
		for i := range z {
			z[i] = rng.NormFloat64()
		}
		above := false
		for i := range n {
			g[i] = math.Log(0.5)
			for j := range i + 1 {
				g[i] += l[i*n+j] * z[j]
			}
			above = above || g[i] > 0
		}
		if above {
			continue
		}
		drawn++
		T := 800 + 800*rng.Float64()
		r := Readings{Signal: make([]float64, n), Std: make([]float64, n)}
		for i, b := range bands {
			r.Std[i] = 0.02 * 0.5 * bands[1].Radiance(1200)
			r.Signal[i] = math.Exp(g[i]+0.01*rng.NormFloat64())*b.Radiance(pyro.Temperature(T)) + r.Std[i]*rng.NormFloat64()
		}
		w, res := e.NewWork(), e.NewResult()
		if err := e.EstimateTo(res, w, r); err != nil {
			t.Fatal(err)
		}
		if err := e.IntervalTo(res, w, r, 0.95); err != nil {
			t.Fatal(err)
		}
		if w.process.linear != nil && w.process.linear.on {
			linear++
		}
		iv, _ := res.Interval()
		if (iv.LowOpen || float64(iv.Low) <= T) && (iv.HighOpen || T <= float64(iv.High)) {
			held++
		}
	}
	share := float64(held) / draws
	t.Logf("%d of %d held, %d in the linear form", held, draws, linear)
	if math.Abs(share-0.95) > 3*math.Sqrt(0.95*0.05/draws) {
		t.Errorf("held %.1f %%", 100*share)
	}
	if linear < draws/2 {
		t.Errorf("only %d in the linear form", linear)
	}
}

// Walls brighter than the piece, and a saturated channel: the unknown surface takes them too.
func TestLinearFormOfHotWallsAndSaturation(t *testing.T) {
	bands, _ := testBands(t, 0.9, 1.6, 0, 4)
	read := func(T, wall float64) []float64 {
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = 0.6*b.Radiance(pyro.Temperature(T)) + 0.4*b.Radiance(pyro.Temperature(wall))
		}
		return y
	}
	wall := &pyro.Input{Name: "wall", Unit: "K", Value: 1400, Std: 5, PerReading: true}
	e, err := New(bands, Assume{Emissivity: emissivity.Unknown(), Surroundings: sightline.Enclosure(wall), Range: Range{600, 2500}, Noise: Relative(0.005)})
	if err != nil {
		t.Fatal(err)
	}
	for _, T := range []float64{1000, 1350, 1450} {
		res, err := e.Estimate(Readings{Signal: read(T, 1400), Inputs: []float64{1400}})
		if err != nil {
			t.Fatalf("%g K: %v", T, err)
		}
		iv, _ := res.Interval()
		t.Logf("%g K under walls of 1400 K: %v", T, res)
		if !iv.LowOpen && float64(iv.Low) > T || !iv.HighOpen && float64(iv.High) < T {
			t.Errorf("%g K is outside %v to %v", T, iv.Low, iv.High)
		}
	}
	limit := 0.6 * bands[3].Radiance(1300)
	detectors := make([]detector.Channel, len(bands))
	for i := range detectors {
		detectors[i] = detector.Channel{Saturation: limit, Noise: detector.NoiseModel{Constant: 1e-6 * limit * limit}}
	}
	e, err = New(bands, Assume{Emissivity: emissivity.Unknown(), Detectors: detectors, Range: Range{600, 2500}})
	if err != nil {
		t.Fatal(err)
	}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = min(limit, 0.6*b.Radiance(1400))
	}
	res, err := e.Estimate(Readings{Signal: y})
	if err != nil {
		t.Fatal(err)
	}
	if iv, _ := res.Interval(); float64(iv.Low) > 1400 || float64(iv.High) < 1400 {
		t.Errorf("with a saturated channel: %v", res)
	}
	t.Log(res)
	// Noise alone gives no number.
	for i := range y {
		y[i] = 1e-3 * limit * float64(1-2*(i%2))
	}
	if res, err = e.Estimate(Readings{Signal: y}); err != nil {
		t.Fatal(err)
	}
	if res.State() == Determined {
		t.Errorf("of noise alone: %v", res)
	}
}

// A relative level explains noise at any temperature by being next to nothing: that is refused.
func TestARelativeLevelOfNoiseIsRefused(t *testing.T) {
	bands, _ := testBands(t, 0.9, 1.6, 0, 4)
	e, err := New(bands, Assume{Emissivity: emissivity.Unknown().Relative()})
	if err != nil {
		t.Fatal(err)
	}
	std := []float64{1, 1, 1, 1}
	if _, err := e.Estimate(Readings{Signal: []float64{0.5, -1, 2, 1}, Std: std}); !errors.Is(err, ErrReadings) {
		t.Errorf("noise alone: %v", err)
	}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 20 * b.Radiance(1400) / bands[3].Radiance(1400)
	}
	r, err := e.Estimate(Readings{Signal: y, Std: std})
	if err != nil {
		t.Fatal(err)
	}
	if iv, _ := r.Interval(); !iv.LowOpen && iv.Low > 1400 || !iv.HighOpen && iv.High < 1400 {
		t.Errorf("%v", r)
	}
}

// TestEvidenceOfBothForms: on strong readings both forms give the same evidence.
func TestEvidenceOfBothForms(t *testing.T) {
	bands, _ := testBands(t, 0.8, 1.4, 0, 5)
	e, err := New(bands, Assume{Emissivity: emissivity.Unknown(), Range: Range{700, 3000}})
	if err != nil {
		t.Fatal(err)
	}
	r := Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands))}
	for j, b := range bands {
		r.Signal[j] = 0.5 * b.Radiance(1500) * (1 + 0.004*float64(j%2))
		r.Std[j] = 0.01 * r.Signal[j]
	}
	var log [2]float64
	for k, linear := range []bool{false, true} {
		w, res := e.NewWork(), e.NewResult()
		w.process.forceLinear = linear
		if err := e.EstimateTo(res, w, r); err != nil {
			t.Fatal(err)
		}
		if log[k], err = w.logEvidence(res); err != nil {
			t.Fatal(err)
		}
	}
	if math.Abs(log[0]-log[1]) > 0.02 {
		t.Errorf("ln evidence %.4f in the logarithmic form, %.4f in the linear one", log[0], log[1])
	}
	t.Logf("%.4f and %.4f", log[0], log[1])
}
