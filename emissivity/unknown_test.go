package emissivity_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// TestUnknownIsFrozen: every figure of the default.
func TestUnknownIsFrozen(t *testing.T) {
	type key struct{ level, std, length, rough float64 }
	got := map[key]float64{}
	for _, c := range emissivity.Unknown().Components() {
		if c.Roughness != 0.008 || c.Slope != 0 || c.SlopeSpread != 0 || c.Spread != 0 || c.Rough.Std != 0 && c.Rough != (emissivity.Term{Std: 0.15, Length: 0.12}) {
			t.Errorf("%+v", c)
		}
		got[key{c.Level, c.Smooth.Std, c.Smooth.Length, c.Rough.Std}] += c.Weight
	}
	if len(got) != 12 {
		t.Errorf("%d components, want 12", len(got))
	}
	for _, base := range []struct{ share, level, std float64 }{{0.4, 0.80, 0.20}, {0.6, 0.42, 0.45}} {
		for _, length := range []float64{0.5, 1, 2} {
			for _, film := range []struct{ share, std float64 }{{0.9, 0}, {0.1, 0.15}} {
				w := got[key{base.level, base.std, length, film.std}]
				if want := base.share / 3 * film.share; math.Abs(w-want) > 1e-12 {
					t.Errorf("level %g, length %g, rough %g: weight %g, want %g", base.level, length, film.std, w, want)
				}
			}
		}
	}
}

// TestMaternCovariance: the kernel against its spectral density S(ω) ∝ (5/ℓ² + ω²)⁻³ (Rasmussen
// and Williams, eq. 4.15), integrated numerically: k(x) = ∫ S cos(ωx) dω / ∫ S dω.
func TestMaternCovariance(t *testing.T) {
	p := emissivity.NewProcess("one term", emissivity.Component{Weight: 1, Level: 0.5, Smooth: emissivity.Term{Std: 0.3, Length: 0.7}})
	for _, x := range []float64{0, 0.1, 0.5, 1.3} {
		num, den := 0.0, 0.0
		const d = 1e-3
		for ω := d / 2; ω < 400; ω += d {
			s := math.Pow(5/(0.7*0.7)+ω*ω, -3)
			num += s * math.Cos(ω*x)
			den += s
		}
		want := 0.09 * num / den
		got := p.Covariance(0, 1*µm, pyro.Wavelength(math.Exp(x))*µm)
		if math.Abs(got-want) > 1e-7 {
			t.Errorf("x = %g: %.9f, want %.9f", x, got, want)
		}
	}
}

// TestCovarianceOfSpreadAndSlope: level and slope as random variables by hand.
func TestCovarianceOfSpreadAndSlope(t *testing.T) {
	p := emissivity.NewProcess("level and slope", emissivity.Component{Weight: 2, Level: 0.5, Slope: -0.6, Centre: 1 * µm, Spread: 0.2, SlopeSpread: 0.4})
	a, b := math.Log(0.8), math.Log(1.5)
	if got, want := p.Covariance(0, 0.8*µm, 1.5*µm), 0.04+0.16*a*b; math.Abs(got-want) > 1e-15 {
		t.Errorf("covariance %g, want %g", got, want)
	}
	if got, want := p.LogMean(0, 1.5*µm), math.Log(0.5)-0.6*b; math.Abs(got-want) > 1e-15 {
		t.Errorf("mean %g, want %g", got, want)
	}
	if w := p.Components()[0].Weight; w != 1 {
		t.Errorf("weight %g", w)
	}
}

// TestRangeAgainstDraws: the central 95 % at one wavelength against draws with ε > 1 struck out
// within each component, to 4.5 standard errors of the share below.
func TestRangeAgainstDraws(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	all := map[string]emissivity.Process{"unknown": emissivity.Unknown(), "any": emissivity.AnySurface()}
	for _, k := range emissivity.Kinds() {
		all[k.Name] = k.Process
	}
	for name, p := range all {
		const λ = 1.1 * µm
		lo, hi := p.Range(λ)
		comps := p.Components()
		const draws = 40_000
		below, above := 0, 0
		for range draws {
			u, k := rng.Float64(), 0
			for u -= comps[0].Weight; u > 0 && k < len(comps)-1; u -= comps[k].Weight {
				k++
			}
			m, s := p.LogMean(k, λ), math.Sqrt(p.Covariance(k, λ, λ))
			x := 1.0
			for x > 0 {
				x = m + s*rng.NormFloat64()
			}
			if ε := math.Exp(x); ε < lo {
				below++
			} else if ε > hi {
				above++
			}
		}
		allowed := 4.5 * math.Sqrt(0.025*0.975/draws)
		for _, n := range []int{below, above} {
			if p := float64(n) / draws; math.Abs(p-0.025) > allowed {
				t.Errorf("%s: %.4f beyond an end of %.3f to %.3f, want 0.025 ± %.4f", name, p, lo, hi, allowed)
			}
		}
	}
}

// TestKindsRest: the figures that a kind's Basis states, from the published values.
func TestKindsRest(t *testing.T) {
	logMoments := func(v ...float64) (mean, std float64) {
		for _, x := range v {
			mean += x / float64(len(v))
		}
		for _, x := range v {
			std += (x - mean) * (x - mean) / float64(len(v)-1)
		}
		return mean, math.Sqrt(std)
	}
	logs := func(v ...float64) []float64 {
		for i := range v {
			v[i] = math.Log(v[i])
		}
		return v
	}
	near := func(name string, got, want, by float64) {
		if math.Abs(got-want) > by {
			t.Errorf("%s: %.4f, want %g", name, got, want)
		}
	}
	// Burgess & Waltenberg 1915, solid at 0.65 µm: Pd Pt Ir Rh Ni Co Fe Zr V Cr Mo W Nb.
	mean, std := logMoments(logs(.33, .33, .30, .29, .36, .36, .37, .32, .35, .39, .43, .39, .49)...)
	near("metals' level", math.Exp(mean), 0.36, 0.005)
	near("metals' spread", std, 0.14, 0.005)
	// Optical constants, 0.65 and 1.6 µm: Fe Ni Cr Ti V Zr Mo W Pt Pd Ir.
	var slopes []float64
	for _, v := range [][2]float64{{.445, .266}, {.324, .184}, {.382, .330}, {.455, .388}, {.526, .337}, {.541, .436}, {.407, .105}, {.485, .252}, {.280, .208}, {.271, .143}, {.254, .127}} {
		slopes = append(slopes, math.Log(v[1]/v[0])/math.Log(1.6/0.65))
	}
	mean, std = logMoments(slopes...)
	near("metals' slope", mean, -0.57, 0.005)
	near("metals' slope's spread", std, 0.38, 0.005)
	// Al Cu Ag Au at 1.0 µm.
	mean, std = logMoments(logs(.058, .028, .011, .019)...)
	near("bright metals' level", math.Exp(mean), 0.024, 0.0005)
	near("bright metals' spread", std, 0.70, 0.005)
}

func TestProcessesAreCopies(t *testing.T) {
	plain := emissivity.Unknown()
	other := plain.KnownAt(1*µm, 0.5, 0.05)
	if len(plain.KnownPoints()) != 0 || !plain.IsWide() || other.IsWide() || plain.AcceptWide().IsWide() {
		t.Error("the original changed, or its width")
	}
	r := plain.Relative()
	if plain.IsRelative() || !r.IsRelative() || math.IsInf(plain.Components()[0].Spread, 1) || !math.IsInf(r.Components()[0].Spread, 1) {
		t.Error("Relative changed the original")
	}
	plain.Components()[0].Weight = 7
	if plain.Components()[0].Weight == 7 {
		t.Error("Components returns its own slice")
	}
	a, b := other.KnownAt(2*µm, 0.4, 0.05), other.KnownAt(3*µm, 0.3, 0.05)
	if a.KnownPoints()[1].Value != 0.4 || b.KnownPoints()[1].Value != 0.3 {
		t.Error("two processes share their known points")
	}
}

func TestNonsensicalProcessesAreRefused(t *testing.T) {
	ok := emissivity.Component{Weight: 1, Level: 0.5, Smooth: emissivity.Term{Std: 0.2, Length: 1}}
	with := func(f func(*emissivity.Component)) emissivity.Process {
		c := ok
		f(&c)
		return emissivity.NewProcess("bad", c)
	}
	for name, p := range map[string]emissivity.Process{
		"no component":        emissivity.NewProcess("empty"),
		"level in per cent":   with(func(c *emissivity.Component) { c.Level = 80 }),
		"level 0":             with(func(c *emissivity.Component) { c.Level = 0 }),
		"negative spread":     with(func(c *emissivity.Component) { c.Spread = -1 }),
		"NaN":                 with(func(c *emissivity.Component) { c.Smooth.Std = math.NaN() }),
		"no length":           with(func(c *emissivity.Component) { c.Smooth.Length = 0 }),
		"slope at no centre":  with(func(c *emissivity.Component) { c.Slope = -1 }),
		"roughness above 1":   with(func(c *emissivity.Component) { c.Roughness = 2 }),
		"no weight":           with(func(c *emissivity.Component) { c.Weight = 0 }),
		"one level free":      emissivity.NewProcess("half free", ok, emissivity.Component{Weight: 1, Level: 1, Spread: math.Inf(1)}),
		"no curve":            emissivity.About("nothing", nil, 0.1),
		"negative about":      emissivity.About("x", constant(0.5), -0.1),
		"known above 1":       emissivity.Unknown().KnownAt(1*µm, 1.2, 0.1),
		"known, relative":     emissivity.Unknown().Relative().KnownAt(1*µm, 0.5, 0.1),
		"relative, but known": emissivity.Unknown().KnownAt(1*µm, 0.5, 0.1).Relative(),
	} {
		if !errors.Is(p.Err(), emissivity.ErrProcess) {
			t.Errorf("%s: error %v", name, p.Err())
		}
	}
	for _, k := range emissivity.Kinds() {
		if k.Process.Err() != nil || k.Basis == "" || k.Mark.String() == "" {
			t.Errorf("%s: %v", k.Name, k.Process.Err())
		}
	}
	if emissivity.Unknown().Err() != nil || emissivity.AnySurface().Err() != nil {
		t.Error("a default is refused")
	}
}

type constant float64

func (c constant) At(pyro.Wavelength) float64 { return float64(c) }

func ExampleUnknown() {
	lo, hi := emissivity.Unknown().Range(900 * pyro.Nanometre)
	fmt.Printf("%v: ε between %.2f and %.2f\n", emissivity.Unknown(), lo, hi)
	// Output:
	// unknown surface: ε between 0.19 and 0.96
}
