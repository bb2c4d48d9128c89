package fit_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// drawCurves draws curves of ln ε from one component at the wavelengths, each point with the
// component's roughness, none above ε = 1.
func drawCurves(t testing.TB, rng *rand.Rand, c emissivity.Component, λ []pyro.Wavelength, count int) []fit.MeasuredCurve {
	t.Helper()
	p := emissivity.NewProcess("truth", c)
	if p.Err() != nil {
		t.Fatal(p.Err())
	}
	n := len(λ)
	cov := mat.NewSymDense(n, nil)
	for i := range n {
		for j := range i + 1 {
			cov.SetSym(i, j, p.Covariance(0, λ[i], λ[j]))
		}
		cov.SetSym(i, i, cov.At(i, i)+1e-12)
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("not positive definite")
	}
	var lower mat.TriDense
	chol.LTo(&lower)
	var list []fit.MeasuredCurve
	for len(list) < count {
		z, f := mat.NewVecDense(n, nil), mat.NewVecDense(n, nil)
		for i := range n {
			z.SetVec(i, rng.NormFloat64())
		}
		f.MulVec(&lower, z)
		m := fit.MeasuredCurve{Wavelength: λ, Emissivity: make([]float64, n)}
		inside := true
		for i := range n {
			m.Emissivity[i] = math.Exp(p.LogMean(0, λ[i]) + f.AtVec(i) + c.Roughness*rng.NormFloat64())
			inside = inside && m.Emissivity[i] <= 1
		}
		if inside {
			list = append(list, m)
		}
	}
	return list
}

func geometric(lo, hi float64, n int) []pyro.Wavelength {
	λ := make([]pyro.Wavelength, n)
	for i := range λ {
		λ[i] = pyro.Wavelength(lo*math.Pow(hi/lo, float64(i)/float64(n-1))) * µm
	}
	return λ
}

// TestLearnRecovers: over many simulated sets of curves the mean of each hyperparameter (of its
// logarithm) lies within three of its standard errors of the truth, and the pulls are of size
// one: their standard deviation between 0.7 and 1.4 (a standard error of it is 1/√(2·sets)).
// The truths keep clear of ε = 1, by which drawCurves would change them.
func TestLearnRecovers(t *testing.T) {
	sets := 40
	if testing.Short() {
		sets = 15
	}
	rng := rand.New(rand.NewPCG(31, 7))
	λ := geometric(0.6, 2.4, 16)
	for _, k := range []struct {
		name  string
		slope bool
		c     emissivity.Component
	}{
		{"level alone", false, emissivity.Component{Weight: 1, Level: 0.3, Smooth: emissivity.Term{Std: 0.2, Length: 0.7}, Roughness: 0.01}},
		{"rough, with a slope", true, emissivity.Component{Weight: 1, Level: 0.2, Slope: -0.5, Centre: 1.2 * µm, Smooth: emissivity.Term{Std: 0.3, Length: 0.4}, Roughness: 0.03}},
	} {
		truth := map[string]float64{"spread": math.Log(k.c.Smooth.Std), "length": math.Log(k.c.Smooth.Length), "roughness": math.Log(k.c.Roughness)}
		off, square, pulls := map[string]float64{}, map[string]float64{}, map[string]float64{}
		for range sets {
			_, r, err := fit.Learn(drawCurves(t, rng, k.c, λ, 12), fit.LearnSettings{Slope: k.slope})
			if err != nil {
				t.Fatal(err)
			}
			level, _ := r.Parameter("level")
			truth["level"] = math.Log(k.c.Level)
			if k.slope {
				truth["level"] += k.c.Slope * math.Log(float64(r.Centre/k.c.Centre))
				truth["slope"] = k.c.Slope
			}
			if !level.HasStd || r.Curves != 12 || r.Points != 192 {
				t.Fatalf("%+v", r)
			}
			for name, want := range truth {
				p, ok := r.Parameter(name)
				if !ok || !p.HasStd {
					t.Fatalf("%s: no %s, or none with an uncertainty: %v", k.name, name, r)
				}
				d, u := math.Log(p.Value)-want, p.LogStd
				if name == "slope" {
					d, u = p.Value-want, p.Std
				}
				off[name] += d
				square[name] += d * d
				pulls[name] += d * d / (u * u)
			}
		}
		n := float64(sets)
		for name := range truth {
			mean := off[name] / n
			se := math.Sqrt((square[name]/n - mean*mean) / (n - 1))
			pull := math.Sqrt(pulls[name] / n)
			t.Logf("%s: ln %s off by %+.4f ± %.4f, pulls %.2f", k.name, name, mean, se, pull)
			if math.Abs(mean) > 3*se {
				t.Errorf("%s: %s is off by %.1f standard errors", k.name, name, mean/se)
			}
			if pull < 0.7 || pull > 1.4 {
				t.Errorf("%s: %s: pulls of size %.2f", k.name, name, pull)
			}
		}
	}
}

// TestLearnRefuses: bad curves, with the curve and the row named.
func TestLearnRefuses(t *testing.T) {
	λ := geometric(0.6, 2.4, 5)
	good := func() fit.MeasuredCurve {
		return fit.MeasuredCurve{Name: "a", Wavelength: append([]pyro.Wavelength(nil), λ...), Emissivity: []float64{0.4, 0.38, 0.37, 0.33, 0.3}, Std: []float64{0.01, 0.01, 0.01, 0.01, 0.01}}
	}
	for _, k := range []struct {
		name       string
		bend       func(c *fit.MeasuredCurve)
		row        int
		wordInside string
	}{
		{"in per cent", func(c *fit.MeasuredCurve) { c.Emissivity[3] = 33 }, 3, "per cent"},
		{"zero", func(c *fit.MeasuredCurve) { c.Emissivity[0] = 0 }, 0, "above 0"},
		{"not a number", func(c *fit.MeasuredCurve) { c.Emissivity[2] = math.NaN() }, 2, "above 0"},
		{"in µm", func(c *fit.MeasuredCurve) { c.Wavelength[0] = 0.6 }, 0, "Micrometre"},
		{"falling", func(c *fit.MeasuredCurve) { c.Wavelength[2] = c.Wavelength[1] }, 2, "rise"},
		{"negative std", func(c *fit.MeasuredCurve) { c.Std[4] = -1 }, 4, "standard uncertainty"},
		{"lengths", func(c *fit.MeasuredCurve) { c.Std = c.Std[:3] }, -1, "one of each"},
		{"short", func(c *fit.MeasuredCurve) {
			c.Wavelength, c.Emissivity, c.Std = c.Wavelength[:2], c.Emissivity[:2], nil
		}, -1, "3 or more"},
	} {
		bad := good()
		k.bend(&bad)
		_, _, err := fit.Learn([]fit.MeasuredCurve{good(), bad}, fit.LearnSettings{})
		var c *fit.CurveError
		if !errors.As(err, &c) || !errors.Is(err, fit.ErrCurves) {
			t.Errorf("%s: %v", k.name, err)
			continue
		}
		if c.Curve != 1 || c.Row != k.row || !strings.Contains(err.Error(), k.wordInside) || !strings.Contains(err.Error(), "curve 1 (a)") {
			t.Errorf("%s: %v", k.name, err)
		}
	}
	if _, _, err := fit.Learn(nil, fit.LearnSettings{}); !errors.Is(err, fit.ErrCurves) {
		t.Errorf("no curves: %v", err)
	}
	one := fit.MeasuredCurve{Wavelength: λ, Emissivity: []float64{0.4, 0.4, 0.4, 0.4, 0.4}}
	if _, _, err := fit.Learn([]fit.MeasuredCurve{one}, fit.LearnSettings{}); !errors.Is(err, fit.ErrCurves) || !strings.Contains(err.Error(), "About") {
		t.Errorf("one level curve: %v", err)
	}
}

// TestLearnSaysFew: fewer than three curves bring a warning and Student's factor, many neither.
// Two curves that differ in level alone leave one degree of freedom, whose factor is
// 12.706/1.960 (Student's and the normal 97.5 % quantile).
func TestLearnSaysFew(t *testing.T) {
	λ := geometric(0.6, 2.4, 12)
	level := func(ε float64) fit.MeasuredCurve {
		c := fit.MeasuredCurve{Wavelength: λ, Emissivity: make([]float64, len(λ))}
		for i := range λ {
			c.Emissivity[i] = ε * (1 + 0.05*math.Pow(-1, float64(i)))
		}
		return c
	}
	p, r, err := fit.Learn([]fit.MeasuredCurve{level(0.3), level(0.4)}, fit.LearnSettings{})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Warnings) == 0 || !strings.Contains(r.Warnings[0], "2 curves, fewer than 3") {
		t.Errorf("warnings %q", r.Warnings)
	}
	// At a long length: mean ½(ln 0.3 + ln 0.4), spread |Δ ln ε|/√2, of the level 1/√2 of it.
	last := r.Lengths[len(r.Lengths)-1]
	if math.Abs(last.Factor-12.7062/1.95996) > 0.35 || math.Abs(last.Freedom-1) > 0.05 {
		t.Errorf("factor %.3f with %.3f degrees of freedom", last.Factor, last.Freedom)
	}
	k := p.Components()[len(r.Lengths)-1]
	s := math.Log(0.4/0.3) / math.Sqrt2
	if math.Abs(k.Smooth.Std/last.Factor/s-1) > 0.1 || math.Abs(k.Spread/k.Smooth.Std-math.Sqrt(0.5)) > 0.05 || math.Abs(k.Level-math.Sqrt(0.12)) > 0.002 {
		t.Errorf("%+v, want a spread of %.3g", k, s)
	}

	rng := rand.New(rand.NewPCG(5, 5))
	many := drawCurves(t, rng, emissivity.Component{Weight: 1, Level: 0.3, Smooth: emissivity.Term{Std: 0.2, Length: 0.7}, Roughness: 0.01}, λ, 25)
	_, r, err = fit.Learn(many, fit.LearnSettings{Name: "tiles"})
	if err != nil {
		t.Fatal(err)
	}
	for _, l := range r.Lengths {
		if l.Factor > 1.05 {
			t.Errorf("factor %.3f from 25 curves", l.Factor)
		}
	}
	if len(r.Warnings) != 0 || !strings.Contains(r.String(), "learned from 25 curves, 300 points") {
		t.Errorf("%v", r)
	}
	if _, r, err = fit.Learn(many[:1], fit.LearnSettings{}); err != nil || !strings.Contains(r.String(), "warning: one curve") {
		t.Errorf("one curve: %v, %v", r, err)
	}
}

// TestLearnedKindHolds: the 95 % interval of T of the learned process, on readings of new
// surfaces from the same population, holds the truth within three binomial standard errors,
// from twelve curves and from three.
func TestLearnedKindHolds(t *testing.T) {
	sets, each := 25, 40
	if testing.Short() {
		sets, each = 10, 30
	}
	rng := rand.New(rand.NewPCG(77, 1))
	truth := emissivity.Component{Weight: 1, Level: 0.35, Smooth: emissivity.Term{Std: 0.25, Length: 0.8}, Roughness: 0.008}
	λ := geometric(0.6, 1.6, 14)
	bands := make([]*pyro.Band, len(λ))
	for i, l := range λ {
		b, err := pyro.Line(l)
		if err != nil {
			t.Fatal(err)
		}
		bands[i] = b
	}
	for _, count := range []int{12, 3} {
		inside, width := 0, 0.0
		for range sets {
			p, _, err := fit.Learn(drawCurves(t, rng, truth, λ, count), fit.LearnSettings{})
			if err != nil {
				t.Fatal(err)
			}
			e, err := fit.New(bands, fit.Assume{Emissivity: p, Range: fit.Range{Min: 500, Max: 4000}})
			if err != nil {
				t.Fatal(err)
			}
			for _, surface := range drawCurves(t, rng, truth, λ, each) {
				T := pyro.Temperature(1000 + 1500*rng.Float64())
				y, u := make([]float64, len(bands)), make([]float64, len(bands))
				for i, b := range bands {
					m := surface.Emissivity[i] * b.Radiance(T)
					u[i] = 0.005 * m
					y[i] = m + u[i]*rng.NormFloat64()
				}
				r, err := e.Estimate(fit.Readings{Signal: y, Std: u})
				if err != nil {
					t.Fatal(err)
				}
				iv, _ := r.Interval()
				if iv.Low <= T && T <= iv.High {
					inside++
				}
				width += float64((iv.High-iv.Low)/T) / float64(sets*each)
			}
		}
		n := sets * each
		share := float64(inside) / float64(n)
		t.Logf("from %d curves: %.1f %% of %d inside, mean width %.3g of T", count, 100*share, n, width)
		if math.Abs(share-0.95) > 3*binomial(0.95, n) {
			t.Errorf("from %d curves: %.1f %% inside", count, 100*share)
		}
	}
}

// TestReferenceCurve: a curve measured with a scale error in common isn't as good as its points
// would be if they were independent, and is as good where the error in common is 0; with the
// points exact, the common part is what is left: σ of ln ε is then that of the scale.
func TestReferenceCurve(t *testing.T) {
	bands := lines(t, 0.6, 1.6, 12)
	var known []emissivity.Known
	single := emissivity.WhiteCeramic()
	for i := range 20 {
		λ := pyro.Wavelength(0.6+1.0*float64(i)/19) * µm
		known = append(known, emissivity.Known{Wavelength: λ, Value: 0.4, Std: 0.012})
		single = single.KnownAt(λ, 0.4, 0.012)
	}
	y, std := make([]float64, len(bands)), make([]float64, len(bands))
	for i, b := range bands {
		y[i] = 0.4 * b.Radiance(1500)
		std[i] = 0.005 * y[i]
	}
	u := func(p emissivity.Process) float64 {
		e, err := fit.New(bands, fit.Assume{Emissivity: p, Range: fit.Range{Min: 800, Max: 3000}})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(fit.Readings{Signal: y, Std: std})
		if err != nil {
			t.Fatal(err)
		}
		v, ok := r.Uncertainty()
		if !ok {
			t.Fatal(r)
		}
		return v
	}
	base := emissivity.WhiteCeramic()
	independent, none, common := u(single), u(base.KnownCurve(known, 0)), u(base.KnownCurve(known, 0.1))
	if math.Abs(independent-none) > 1e-9*none {
		t.Errorf("u(T) = %.6g K from single points, %.6g K from a curve without a common error", independent, none)
	}
	if common < 1.2*none {
		t.Errorf("u(T) = %.4g K with 10 %% in common, %.4g K without", common, none)
	}

	// One band, a flat curve of exact points: ln ε has the scale's u, and T by the sensitivity
	// T²λ/c₂ (Wien; x = 10.7 here, so that Planck's law differs by 2e-5).
	one := lines(t, 0.9, 0.9, 1)
	exact := []emissivity.Known{{Wavelength: 0.85 * µm, Value: 0.4, Std: 1e-6}, {Wavelength: 0.9 * µm, Value: 0.4, Std: 1e-6}, {Wavelength: 0.95 * µm, Value: 0.4, Std: 1e-6}}
	flat := emissivity.NewProcess("flat", emissivity.Component{Weight: 1, Level: 0.4, Smooth: emissivity.Term{Std: 0.3, Length: 2}}).KnownCurve(exact, 0.02)
	e, err := fit.New(one, fit.Assume{Emissivity: flat, Range: fit.Range{Min: 800, Max: 3000}, Noise: fit.Relative(1e-4)})
	if err != nil {
		t.Fatal(err)
	}
	r, err := e.Estimate(fit.Readings{Signal: []float64{0.4 * one[0].Radiance(1500)}})
	if err != nil {
		t.Fatal(err)
	}
	got, _ := r.Uncertainty()
	if want := 0.02 * 1500 * 1500 * 0.9e-6 / pyro.C2; math.Abs(got/want-1) > 0.01 {
		t.Errorf("u(T) = %.4g K, want %.4g K", got, want)
	}
	for name, bad := range map[string]emissivity.Process{
		"none": base.KnownCurve(nil, 0.1), "negative": base.KnownCurve(known, -0.1), "a point above 1": base.KnownCurve([]emissivity.Known{known[0], {Wavelength: 1 * µm, Value: 1.2, Std: 0.1}}, 0.1),
	} {
		if !errors.Is(bad.Err(), emissivity.ErrProcess) {
			t.Errorf("%s: %v", name, bad.Err())
		}
	}
	if s := base.KnownCurve(known, 0.1).String(); !strings.Contains(s, "a curve of 20 points from") {
		t.Error(s)
	}
}
