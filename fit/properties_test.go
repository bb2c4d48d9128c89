package fit_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// estimate compiles and estimates, or fails the test.
func estimate(t *testing.T, bands []*pyro.Band, a fit.Assume, r fit.Readings) *fit.Result {
	t.Helper()
	e, err := fit.New(bands, a)
	if err != nil {
		t.Fatal(err)
	}
	res, err := e.Estimate(r)
	if err != nil {
		t.Fatal(err)
	}
	return res
}

// determined returns T and u, or fails the test.
func determined(t *testing.T, r *fit.Result) (T, u float64) {
	t.Helper()
	temperature, state := r.Temperature()
	u, ok := r.Uncertainty()
	if state != fit.Determined || !ok {
		t.Fatalf("not determined: %v", r)
	}
	return float64(temperature), u
}

func close(t *testing.T, what string, got, want, allowed float64) {
	t.Helper()
	if !(math.Abs(got-want) <= allowed) {
		t.Errorf("%s: %.12g, want %.12g ± %.2g", what, got, want, allowed)
	}
}

// noisy is one reading of a linear surface that falls with λ, away from degeneracy.
func noisy(t *testing.T, n int) ([]*pyro.Band, fit.Readings) {
	t.Helper()
	bands := lines(t, 0.6, 1.6, n)
	y := truth{"", emissivity.Polynomial(1), []float64{0.4, -0.15}}.signals(bands, 1.1*µm, 1600)
	r := fit.Readings{Signal: y, Std: scaled(y, 0.005)}
	rng := rand.New(rand.NewPCG(4, 2))
	for i := range y {
		y[i] += r.Std[i] * rng.NormFloat64()
	}
	return bands, r
}

func TestUnitsAndOrderDoNotMatter(t *testing.T) {
	bands, r := noisy(t, 12)
	family := emissivity.Polynomial(1).Relative()
	T, u := determined(t, estimate(t, bands, fit.Assume{Emissivity: family}, r))
	for _, f := range []float64{1e-12, 1e9} {
		T2, u2 := determined(t, estimate(t, bands, fit.Assume{Emissivity: family}, fit.Readings{Signal: scaled(r.Signal, f), Std: scaled(r.Std, f)}))
		close(t, "T in another unit", T2, T, 1e-6*u)
		close(t, "u in another unit", u2, u, 1e-6*u)
	}
	perm := rand.New(rand.NewPCG(1, 1)).Perm(len(bands))
	b2 := make([]*pyro.Band, len(bands))
	r2 := fit.Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands))}
	for i, k := range perm {
		b2[i], r2.Signal[i], r2.Std[i] = bands[k], r.Signal[k], r.Std[k]
	}
	T2, u2 := determined(t, estimate(t, b2, fit.Assume{Emissivity: family}, r2))
	close(t, "T in another order", T2, T, 1e-6*u)
	close(t, "u in another order", u2, u, 1e-6*u)
}

func TestAFurtherChannelNeverRaisesU(t *testing.T) {
	bands := lines(t, 0.6, 1.6, 9)
	y := truth{"", emissivity.Polynomial(1), []float64{0.4, -0.15}}.signals(bands, 1.1*µm, 1600)
	std := scaled(y, 0.005)
	family := emissivity.Polynomial(1).CentredOn(1.1 * µm)
	before := math.Inf(1)
	for n := 5; n <= 9; n++ {
		_, u := determined(t, estimate(t, bands[:n], fit.Assume{Emissivity: family}, fit.Readings{Signal: y[:n], Std: std[:n]}))
		if !(u <= before) {
			t.Errorf("%d channels: u rises from %g to %g K", n, before, u)
		}
		before = u
	}
}

func TestFixedEqualsFreeAtItsValue(t *testing.T) {
	bands, r := noisy(t, 12)
	free := estimate(t, bands, fit.Assume{Emissivity: emissivity.Polynomial(1)}, r)
	T, u := determined(t, free)
	slope, _, state := free.Parameter("slope_per_um")
	if state != fit.ParameterDetermined {
		t.Fatalf("slope %v", state)
	}
	fixed := estimate(t, bands, fit.Assume{Emissivity: emissivity.Polynomial(1).Fix("slope_per_um", slope)}, r)
	T2, u2 := determined(t, fixed)
	close(t, "T with the slope fixed", T2, T, 1e-6*u)
	if !(u2 < u) {
		t.Errorf("u with the slope fixed: %g, free %g", u2, u)
	}
	if v, std, state := fixed.Parameter("slope_per_um"); state != fit.ParameterFixed || v != slope || std != 0 {
		t.Errorf("fixed slope %g ± %g", v, std)
	}
	// A prior: ever tighter it becomes the fixed parameter, ever wider the free one.
	tight := estimate(t, bands, fit.Assume{Emissivity: emissivity.Polynomial(1).WithPrior("slope_per_um", slope, 1e-9)}, r)
	T3, u3 := determined(t, tight)
	close(t, "T with a tight prior", T3, T2, 1e-5*u)
	close(t, "u with a tight prior", u3, u2, 1e-5*u)
	wide := estimate(t, bands, fit.Assume{Emissivity: emissivity.Polynomial(1).WithPrior("slope_per_um", slope, 1e6)}, r)
	T4, u4 := determined(t, wide)
	close(t, "T with a wide prior", T4, T, 1e-5*u)
	close(t, "u with a wide prior", u4, u, 1e-5*u)
}

func TestTemperatureKnownBeforehand(t *testing.T) {
	bands, r := noisy(t, 12)
	a := fit.Assume{Emissivity: emissivity.Polynomial(1)}
	T, u := determined(t, estimate(t, bands, a, r))
	a.Temperature = fit.TemperaturePrior{Value: pyro.Temperature(T + 3*u), StdK: u}
	T2, u2 := determined(t, estimate(t, bands, a, r))
	// Two values of equal weight: the mean, with u/√2, to the curvature of χ²(T).
	close(t, "T with a prior of equal weight", T2, T+1.5*u, 0.03*u)
	close(t, "u with a prior of equal weight", u2, u/math.Sqrt2, 0.03*u)
	a.Temperature = fit.TemperaturePrior{Value: 1600}
	fixed := estimate(t, bands, a, r)
	T3, state := fixed.Temperature()
	if T3 != 1600 || state != fit.Determined {
		t.Errorf("fixed temperature: %v %v", T3, state)
	}
	ε, std, hasStd, ok := fixed.Emissivity(6)
	if !ok || !hasStd || math.Abs(ε-(0.4-0.15*(0.6+6.0/11-1.1))) > 4*std {
		t.Errorf("emissivity at the fixed temperature: %g ± %g", ε, std)
	}
}

func TestKnownAtOneWavelength(t *testing.T) {
	bands, r := noisy(t, 12)
	for _, family := range []emissivity.Family{emissivity.Polynomial(1), emissivity.Exponential(1)} {
		_, free := determined(t, estimate(t, bands, fit.Assume{Emissivity: family}, r))
		res := estimate(t, bands, fit.Assume{Emissivity: family.KnownAt(0.65*µm, 0.4-0.15*(0.65-1.1), 0.002)}, r)
		_, u := determined(t, res)
		if !(u < 0.5*free) {
			t.Errorf("%v: u %g K with the emissivity known at 0.65 µm, %g without", family, u, free)
		}
	}
}

func TestASharedScaleDoesNotAverageOut(t *testing.T) {
	// Grey of known level: T = function of the scale alone, u ≥ 0.02·T/n at any number of channels.
	for _, n := range []int{4, 16, 64} {
		bands := lines(t, 0.895, 0.905, n)
		y := truth{"", emissivity.Grey(), []float64{0.8}}.signals(bands, 0.9*µm, 1500)
		res := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 0.8), Noise: fit.Relative(0.001),
			Shared: []fit.Shared{fit.SharedScale("scale", 0.02, n)}}, fit.Readings{Signal: y})
		_, u := determined(t, res)
		// The shape over 10 nm says little about T, so the scale's part stays whole.
		if want := 0.02 * pyro.SensitivityToRadiance(0.9*µm, 1500); u < 0.8*want || u > 1.05*want {
			t.Errorf("%d channels: u = %.3f K, the scale alone %.3f K", n, u, want)
		}
	}
}

func TestBudgetAddsUp(t *testing.T) {
	bands, r := noisy(t, 12)
	res := estimate(t, bands, fit.Assume{Emissivity: emissivity.Polynomial(1).KnownAt(0.65*µm, 0.47, 0.02),
		Temperature: fit.TemperaturePrior{Value: 1590, StdK: 20},
		Shared:      []fit.Shared{fit.SharedScale("scale", 0.02, 12)}}, r)
	_, u := determined(t, res)
	sum := 0.0
	for _, s := range res.Budget() {
		sum += s.StdK * s.StdK
	}
	close(t, "root sum of squares of the budget", math.Sqrt(sum), u, 1e-9*u)
	if len(res.Budget()) != 4 {
		t.Errorf("budget %v", res.Budget())
	}
}

func TestMaskedChannelsDoNotMatter(t *testing.T) {
	bands := lines(t, 0.589, 0.9, 10)
	y := truth{"", emissivity.Grey(), []float64{0.6}}.signals(bands, 0.9*µm, 1800)
	std := scaled(y, 0.01)
	y[0] *= 3 // sodium
	T, _ := determined(t, estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey(), Masks: fit.Sodium}, fit.Readings{Signal: y, Std: std}))
	close(t, "T with sodium masked", T, 1800, 1e-6)
}

func TestRobustLossWithstandsAnOutlier(t *testing.T) {
	bands, r := noisy(t, 20)
	a := fit.Assume{Emissivity: emissivity.Exponential(1)}
	T, u := determined(t, estimate(t, bands, a, r))
	bad := fit.Readings{Signal: append([]float64(nil), r.Signal...), Std: r.Std}
	bad.Signal[13] *= 1.2 // 40 σ
	pulled, _ := determined(t, estimate(t, bands, a, bad))
	for _, loss := range []fit.Loss{fit.Huber(1.345), fit.StudentT(4)} {
		a.Loss = loss
		clean, uClean := determined(t, estimate(t, bands, a, r))
		close(t, "T by a robust loss without outlier", clean, T, 0.8*u)
		if uClean < u || uClean > 1.2*u {
			t.Errorf("u by a robust loss without outlier: %g, least squares %g", uClean, u)
		}
		robust, _ := determined(t, estimate(t, bands, a, bad))
		if math.Abs(robust-T) > 0.2*math.Abs(pulled-T) {
			t.Errorf("the outlier moves T by %.1f K, least squares by %.1f K", robust-T, pulled-T)
		}
	}
}

func TestCurveIsTheMinimumOverTheRest(t *testing.T) {
	bands, r := noisy(t, 12)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Polynomial(1).CentredOn(1.1 * µm)})
	if err != nil {
		t.Fatal(err)
	}
	at := []pyro.Temperature{1580, 1600, 1620} // where no bound of ε is active
	chi2, logDet, err := e.Curve(r, at)
	if err != nil {
		t.Fatal(err)
	}
	for k, T := range at {
		// Brute force over level and slope by the 2×2 normal equations written out.
		var a11, a12, a22, b1, b2, cc float64
		for i, b := range bands {
			m, w := b.Radiance(T), 1/(r.Std[i]*r.Std[i])
			x := b.Mean().Micrometres() - 1.1
			a11 += w * m * m
			a12 += w * m * m * x
			a22 += w * m * m * x * x
			b1 += w * m * r.Signal[i]
			b2 += w * m * x * r.Signal[i]
			cc += w * r.Signal[i] * r.Signal[i]
		}
		det := a11*a22 - a12*a12
		least := cc - (b1*(a22*b1-a12*b2)+b2*(a11*b2-a12*b1))/det
		close(t, "χ²", chi2[k], least, 1e-9*(1+cc)) // cc − … cancels
		close(t, "log det", logDet[k], math.Log(det), 1e-9*math.Abs(math.Log(det)))
	}
}

func TestWideBandsAgainstTheirQuadrature(t *testing.T) {
	for _, c := range []struct {
		width   float64
		s       truth
		allowed float64 // K; the exponential's is the fourth order of the two-node rule
	}{
		{0.02, truth{"", emissivity.Polynomial(1), []float64{0.4, -0.15}}, 2e-6},
		{0.1, truth{"", emissivity.Polynomial(2), []float64{0.4, -0.15, 0.05}}, 2e-5},
		{0.1, truth{"", emissivity.Exponential(1), []float64{-0.9, -0.6}}, 2e-3},
	} {
		var bands []*pyro.Band
		for um := 0.65; um < 1.6; um += 0.1 {
			b, err := pyro.FlatTop(pyro.Wavelength(um-c.width/2)*µm, pyro.Wavelength(um+c.width/2)*µm)
			if err != nil {
				t.Fatal(err)
			}
			bands = append(bands, b)
		}
		y := c.s.signals(bands, 1.1*µm, 1600)
		res := estimate(t, bands, fit.Assume{Emissivity: c.s.family.CentredOn(1.1 * µm)}, fit.Readings{Signal: y, Std: scaled(y, 1e-5)})
		T, _ := determined(t, res)
		close(t, c.s.family.String(), T, 1600, c.allowed)
	}
}

func TestSteadyEstimatesAllocateNothing(t *testing.T) {
	bands, r := noisy(t, 12)
	for name, a := range map[string]fit.Assume{
		"fast":        {Emissivity: emissivity.Polynomial(1)},
		"exponential": {Emissivity: emissivity.Exponential(1)},
		"scan":        {Emissivity: emissivity.Polynomial(2)},
		"shared":      {Emissivity: emissivity.Polynomial(1), Shared: []fit.Shared{fit.SharedScale("scale", 0.02, 12)}},
		"robust":      {Emissivity: emissivity.Grey(), Loss: fit.Huber(2)},
		"known":       {Emissivity: emissivity.Exponential(1).KnownAt(0.65*µm, 0.47, 0.02)},
	} {
		e, err := fit.New(bands, a)
		if err != nil {
			t.Fatal(err)
		}
		w, res := e.NewWork(), e.NewResult()
		n := testing.AllocsPerRun(5, func() {
			if err := e.EstimateTo(res, w, r); err != nil {
				t.Fatal(err)
			}
			if err := e.IntervalTo(res, w, r, 0.95); err != nil {
				t.Fatal(err)
			}
		})
		if n != 0 {
			t.Errorf("%s: %g allocations", name, n)
		}
	}
}

// TestStructureIsNamed: an emission line, a fringe and a curve that the family can't follow.
func TestStructureIsNamed(t *testing.T) {
	bands := lines(t, 0.56, 0.96, 81) // 5 nm apart, one at 0.59 µm
	grey := truth{"", emissivity.Grey(), []float64{0.6}}
	rng := rand.New(rand.NewPCG(2, 7))
	make1 := func(change func(i int, um float64) float64) *fit.Result {
		y := grey.signals(bands, 0.7*µm, 1800)
		std := scaled(y, 0.01)
		for i := range y {
			y[i] = y[i]*change(i, bands[i].Mean().Micrometres()) + std[i]*rng.NormFloat64()
		}
		return estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey()}, fit.Readings{Signal: y, Std: std})
	}
	for _, c := range []struct {
		words  string
		change func(i int, um float64) float64
	}{
		{"Na 589.0/589.6 nm", func(i int, um float64) float64 {
			if math.Abs(um-0.59) < 0.001 {
				return 1.15
			}
			return 1
		}},
		{"fringe of 7 periods", func(_ int, um float64) float64 {
			return 1 + 0.02*math.Sin(2*math.Pi*7*(1/um-1/0.96)/(1/0.56-1/0.96))
		}},
		{"keep their sign over long stretches", func(_ int, um float64) float64 { return 1 + 0.8*(um-0.76)*(um-0.76)/0.04 }},
	} {
		res := make1(c.change)
		if !contains(res.Notes(), c.words) {
			t.Errorf("no note on %q: %q", c.words, res.Notes())
		}
	}
	// False alarms on clean spectra: lack of fit 0.1 %, runs 0.05 %, peak and fringe 0.05 % each.
	alarms, total := 0, 400
	for range total {
		alarms += len(make1(func(int, float64) float64 { return 1 }).Notes())
	}
	if alarms > 6 { // expected 1; more than 6 in one case of 10⁴
		t.Errorf("%d notes on %d clean spectra", alarms, total)
	}
}

func contains(notes []string, words string) bool {
	for _, n := range notes {
		if strings.Contains(n, words) {
			return true
		}
	}
	return false
}
