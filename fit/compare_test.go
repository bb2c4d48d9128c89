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

func compare(t *testing.T, bands []*pyro.Band, a fit.Assume, r fit.Readings, s ...emissivity.Surface) *fit.Comparison {
	t.Helper()
	c, err := fit.Compare(bands, a, s, r)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

// TestCriteriaByHand: AICc and BIC from χ² by hand, for known σ (grey: T and the level, k = 2;
// linear k = 3; n = 9) and for σ of unknown size, which counts as one more.
func TestCriteriaByHand(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 3))
	bands := lines(t, 0.7, 1.5, 9)
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.01)
	c := compare(t, bands, fit.Assume{}, r, emissivity.Grey(), emissivity.Polynomial(1))
	for i, want := range []struct {
		k             int
		second, third float64 // 2k + 2k(k+1)/(n−k−1), k ln n
	}{{2, 4 + 12.0/6, 2 * math.Log(9)}, {3, 6 + 24.0/5, 3 * math.Log(9)}} {
		row := c.Surfaces[i]
		if row.Parameters != want.k || row.Freedom != 9-want.k {
			t.Errorf("%s: %d parameters, %d degrees of freedom", row.Name, row.Parameters, row.Freedom)
		}
		if !row.AICc.OK || math.Abs(row.AICc.Value-row.ChiSquared-want.second) > 1e-12*row.AICc.Value {
			t.Errorf("%s: AICc %+v for χ² %.6g", row.Name, row.AICc, row.ChiSquared)
		}
		if !row.BIC.OK || math.Abs(row.BIC.Value-row.ChiSquared-want.third) > 1e-12*row.BIC.Value {
			t.Errorf("%s: BIC %+v for χ² %.6g", row.Name, row.BIC, row.ChiSquared)
		}
	}
	// Akaike's weights of two.
	ratio := math.Exp((c.Surfaces[1].AICc.Value - c.Surfaces[0].AICc.Value) / 2)
	if w := c.Surfaces[0].Weight; c.Measure != fit.ByAICc || math.Abs(w-ratio/(1+ratio)) > 1e-12 {
		t.Errorf("%v, weight %.6g, ratio %.6g", c.Measure, w, ratio)
	}

	r.Std = nil
	c = compare(t, bands, fit.Assume{Noise: fit.Relative(0.02).UpToFactor()}, r, emissivity.Grey(), emissivity.Unknown())
	row := c.Surfaces[0]
	if want := 9*math.Log(row.ChiSquared/9) + 6 + 24.0/5; row.Parameters != 3 || math.Abs(row.AICc.Value-want) > 1e-10 {
		t.Errorf("unknown σ: AICc %+v, want %.6g", row.AICc, want)
	}
	if want := 9*math.Log(row.ChiSquared/9) + 3*math.Log(9); math.Abs(row.BIC.Value-want) > 1e-10 {
		t.Errorf("unknown σ: BIC %+v, want %.6g", row.BIC, want)
	}
	if row.LogEvidence.OK || !strings.Contains(row.LogEvidence.Why, "noise") {
		t.Errorf("unknown σ: evidence %+v", row.LogEvidence)
	}
	if c.Surfaces[1].Err == nil || !strings.Contains(c.String(), "not estimated: fit: assumption") {
		t.Errorf("a process with noise of unknown size: %v", c)
	}

	few := compare(t, bands[:3], fit.Assume{}, fit.Readings{Signal: r.Signal[:3], Std: scaled(r.Signal[:3], 0.01)}, emissivity.Grey())
	if few.Surfaces[0].AICc.OK || !strings.Contains(few.Surfaces[0].AICc.Why, "too few") {
		t.Errorf("AICc of 2 parameters on 3 channels: %+v", few.Surfaces[0].AICc)
	}
}

// TestLeaveOneOutByRefit: each channel's score against a refit with its wavelength masked, whose
// prediction and two-by-two covariance of (T, ε) are written out here; of a process the ratio of
// evidences; with shared inputs, bounds on what a score can be.
func TestLeaveOneOutByRefit(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 3))
	bands := lines(t, 0.7, 1.5, 9)
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.01)
	full, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey()})
	if err != nil {
		t.Fatal(err)
	}
	score, err := full.LeaveOneOut(r)
	if err != nil {
		t.Fatal(err)
	}
	for j, b := range bands {
		e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Masks: []fit.Mask{{Name: "one", Lo: b.Mean() - 1e-9, Hi: b.Mean() + 1e-9}}})
		if err != nil {
			t.Fatal(err)
		}
		res, err := e.Estimate(r)
		if err != nil {
			t.Fatal(err)
		}
		T, _ := res.Temperature()
		ε, _, state := res.Parameter("level")
		if state != fit.ParameterDetermined {
			t.Fatal(res)
		}
		// JᵀWJ of (T, ε) over the rest, inverted by hand.
		var tt, te, ee float64
		for i, o := range bands {
			if i == j {
				continue
			}
			s := o.Radiance(T)
			dT := ε * (o.Radiance(T+0.05) - o.Radiance(T-0.05)) / 0.1
			w := 1 / (r.Std[i] * r.Std[i])
			tt, te, ee = tt+w*dT*dT, te+w*dT*s, ee+w*s*s
		}
		det := tt*ee - te*te
		s := b.Radiance(T)
		dT := ε * (b.Radiance(T+0.05) - b.Radiance(T-0.05)) / 0.1
		v := r.Std[j]*r.Std[j] + (dT*dT*ee-2*dT*s*te+s*s*tt)/det
		z := r.Signal[j] - ε*s
		want := -z*z/(2*v) - math.Log(2*math.Pi*v)/2
		if math.Abs(score[j]-want) > 1e-5 {
			t.Errorf("channel %d: %.9g, want %.9g", j, score[j], want)
		}
	}

	// A linear family, whose centre must not move with the channels, with a shared input.
	shared := []fit.Shared{fit.SharedScale("calibration", 0.01, len(bands))}
	lin, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Polynomial(1), Shared: shared})
	if err != nil {
		t.Fatal(err)
	}
	if score, err = lin.LeaveOneOut(r); err != nil {
		t.Fatal(err)
	}
	// The density of a reading is at most that of its own noise about it.
	for j, v := range score {
		if most := -math.Log(2*math.Pi*r.Std[j]*r.Std[j]) / 2; !(v < most) || v < most-10 {
			t.Errorf("channel %d: %.6g beside %.6g", j, v, most)
		}
	}

	// A process: the chain rule. Without channel i the rest's evidence is what is subtracted.
	p, err := fit.New(bands, fit.Assume{Emissivity: emissivity.WhiteCeramic()})
	if err != nil {
		t.Fatal(err)
	}
	if score, err = p.LeaveOneOut(r); err != nil {
		t.Fatal(err)
	}
	whole := logEvidence(t, bands, fit.Assume{Emissivity: emissivity.WhiteCeramic()}, r)
	rest := logEvidence(t, bands[1:], fit.Assume{Emissivity: emissivity.WhiteCeramic()}, fit.Readings{Signal: r.Signal[1:], Std: r.Std[1:]})
	if math.Abs(score[0]-(whole-rest)) > 1e-9*math.Abs(whole) {
		t.Errorf("process: %.9g, want %.9g", score[0], whole-rest)
	}

	two := lines(t, 0.7, 1.5, 2)
	g, err := fit.New(two, fit.Assume{Emissivity: emissivity.Grey()})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := g.LeaveOneOut(drawReadings(rng, two, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.01)); !errors.Is(err, fit.ErrLeaveOut) {
		t.Errorf("grey on one channel: %v", err)
	}
}

// TestReadingsThatTell: a steep linear emissivity at 0.2 % of noise is no grey one, and the
// verdict says so; the smaller χ² is never called the smaller error.
func TestReadingsThatTell(t *testing.T) {
	rng := rand.New(rand.NewPCG(10, 3))
	bands := lines(t, 0.7, 1.5, 12)
	curve := func(λ pyro.Wavelength) float64 { return 0.5 - 0.2*(λ.Micrometres()-1.1) }
	r := drawReadings(rng, bands, curve, 1400, 0.002)
	c := compare(t, bands, fit.Assume{}, r, emissivity.Grey(), emissivity.Polynomial(1))
	if c.Surfaces[1].Weight < 0.99 || c.Measure != fit.ByAICc {
		t.Errorf("weights %.3g and %.3g by the %v", c.Surfaces[0].Weight, c.Surfaces[1].Weight, c.Measure)
	}
	if v := c.Verdict(); !strings.HasPrefix(v, "The readings tell the surfaces apart: linear emissivity describes them better than grey emissivity") {
		t.Error(v)
	}
	a, ok := c.Average()
	u, _ := c.Surfaces[1].Result.Uncertainty()
	T, _ := c.Surfaces[1].Result.Temperature()
	if !ok || math.Abs(float64(a.Temperature-T)) > 0.1*u || math.Abs(a.StdK-u) > 0.1*u {
		t.Errorf("average %+v, the linear one %v ± %.3g", a, T, u)
	}
	s := c.String()
	for _, words := range []string{"A smaller χ² is not a smaller error of the temperature", "* contradicted by the readings", "evidence: not every parameter"} {
		if !strings.Contains(s, words) {
			t.Errorf("%q is not in\n%s", words, s)
		}
	}
	for _, words := range []string{"more accurate", "best temperature"} {
		if strings.Contains(s, words) {
			t.Errorf("%q is in\n%s", words, s)
		}
	}
}

// TestReadingsThatCannotTell: grey and ε ∝ λ^−0.5 of known exponent differ as 1/T does to first
// order, so that 1 % of noise can't tell them; their temperatures differ by 1/T − 1/T' =
// 0.5·λ/c₂ (Wien, at the mean λ), which the averaged uncertainty must contain. A tenth is allowed
// for the second order and the noise.
func TestReadingsThatCannotTell(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 3))
	bands := lines(t, 0.8, 1.0, 8)
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.3 }, 1400, 0.01)
	c := compare(t, bands, fit.Assume{}, r, emissivity.Grey(), emissivity.PowerLaw().Fix("exponent", -0.5))
	if !strings.HasPrefix(c.Verdict(), "The readings can't tell apart grey emissivity and power-law emissivity, exponent -0.5, whose temperatures differ by up to ") {
		t.Error(c.Verdict())
	}
	t0, _ := c.Surfaces[0].Result.Temperature()
	t1, _ := c.Surfaces[1].Result.Temperature()
	want := 0.5 * 0.9e-6 / pyro.C2
	if d := 1/float64(t1) - 1/float64(t0); math.Abs(d/want-1) > 0.1 {
		t.Errorf("1/T differs by %.3g, want %.3g", d, want)
	}
	a, ok := c.Average()
	w := [2]float64{c.Surfaces[0].Weight, c.Surfaces[1].Weight}
	mean := w[0]*float64(t0) + w[1]*float64(t1)
	between := math.Sqrt(w[0]*w[1]) * math.Abs(float64(t1-t0))
	u0, _ := c.Surfaces[0].Result.Uncertainty()
	u1, _ := c.Surfaces[1].Result.Uncertainty()
	std := math.Sqrt(w[0]*u0*u0 + w[1]*u1*u1 + between*between)
	if !ok || math.Abs(float64(a.Temperature)-mean) > 1e-6 || math.Abs(a.BetweenK-between) > 1e-6 || math.Abs(a.StdK-std) > 1e-6 {
		t.Errorf("%+v, want %.4f ± %.4f, %.4f between", a, mean, std, between)
	}
	if !(a.Interval.Low < min(t0, t1) && a.Interval.High > max(t0, t1)) {
		t.Errorf("interval %v of %v and %v", a.Interval, t0, t1)
	}
}

// TestCompareMixed: families without priors beside a process have the leave-one-out score alone
// in common; processes, and families with priors, the evidence; a surface that can't be
// estimated stays a row.
func TestCompareMixed(t *testing.T) {
	rng := rand.New(rand.NewPCG(12, 3))
	bands := lines(t, 0.7, 1.5, 10)
	r := drawReadings(rng, bands, func(λ pyro.Wavelength) float64 {
		return 0.5 - 0.3*(λ.Micrometres()-1.1) + 0.3*math.Pow(λ.Micrometres()-1.1, 2)
	}, 1400, 0.003)
	c := compare(t, bands, fit.Assume{}, r, emissivity.Grey(), emissivity.Polynomial(1), emissivity.Unknown())
	if c.Measure != fit.ByLeaveOneOut || c.Surfaces[0].Weight > 0.01 || !strings.Contains(c.Verdict(), "better than grey emissivity") && !strings.Contains(c.Verdict(), "speak against grey emissivity") {
		t.Errorf("%v\n%v", c.Measure, c)
	}
	c = compare(t, bands, fit.Assume{}, r, emissivity.Grey().WithPrior("level", 0.5, 0.1), emissivity.Unknown(), emissivity.DarkScale())
	if c.Measure != fit.ByEvidence || c.Surfaces[1].Weight < c.Surfaces[0].Weight {
		t.Errorf("%v\n%v", c.Measure, c)
	}
	bad := emissivity.Polynomial(7)
	c = compare(t, bands, fit.Assume{}, r, bad, emissivity.Unknown())
	if c.Surfaces[0].Err == nil || !strings.HasPrefix(c.Verdict(), "One surface alone could be estimated") {
		t.Errorf("%v", c)
	}
	if _, err := fit.Compare(bands, fit.Assume{}, []emissivity.Surface{bad}, r); !errors.Is(err, fit.ErrCompare) {
		t.Error(err)
	}
	if _, err := fit.Compare(bands, fit.Assume{}, nil, r); !errors.Is(err, fit.ErrCompare) {
		t.Error(err)
	}
	if _, err := fit.Compare(bands, fit.Assume{}, []emissivity.Surface{nil}, r); !errors.Is(err, fit.ErrCompare) {
		t.Error(err)
	}
}

func ExampleCompare() {
	var bands []*pyro.Band
	var r fit.Readings
	for i := range 8 {
		b, err := pyro.Line(pyro.Wavelength(0.7+0.1*float64(i)) * pyro.Micrometre)
		if err != nil {
			fmt.Println(err)
			return
		}
		bands = append(bands, b)
		s := (0.5 - 0.15*0.1*float64(i)) * b.Radiance(1500)
		r.Signal, r.Std = append(r.Signal, s), append(r.Std, 0.002*s)
	}
	c, err := fit.Compare(bands, fit.Assume{}, []emissivity.Surface{emissivity.Grey(), emissivity.Polynomial(1)}, r)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(c.Verdict())
	// Output: The readings tell the surfaces apart: linear emissivity describes them better than grey emissivity (by AICc, with 313 in the ln of a likelihood, where 3 are odds of twenty to one).
}
