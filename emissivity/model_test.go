package emissivity_test

import (
	"errors"
	"math"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// ramp is a spectrum that runs straight through the value at 1 µm.
type ramp struct{ at1, perMicrometre float64 }

func (r ramp) At(λ pyro.Wavelength) float64 { return r.at1 + r.perMicrometre*(λ.Micrometres()-1) }

// models are one of each kind, with a θ within the bounds.
func models(t testing.TB) []struct {
	name string
	emissivity.Model
	θ []float64
} {
	oxideN, oxideK, metalN, metalK := ramp{2.4, -0.02}, ramp{0.05, 0.01}, ramp{3.2, 0.9}, ramp{4.1, 3.5}
	film := func(a emissivity.Angle, p emissivity.Polarisation) emissivity.Film {
		return emissivity.Film{N: oxideN, K: oxideK, SubstrateN: metalN, SubstrateK: metalK, Angle: a, Polarisation: p}
	}
	table, err := emissivity.NewTabulated(
		[]pyro.Wavelength{0.5 * µm, 1 * µm, 4 * µm}, []pyro.Temperature{800, 1400, 2400},
		[][]float64{{0.46, 0.45, 0.43}, {0.38, 0.37, 0.36}, {0.1, 0.16, 0.2}}, 0.05)
	if err != nil {
		t.Fatal(err)
	}
	mixture, err := emissivity.NewMixture(film(0, 0), emissivity.HagenRubens{})
	if err != nil {
		t.Fatal(err)
	}
	nested, err := emissivity.NewMixture(mixture, emissivity.Given{Spectrum: emissivity.Constant(0.8)})
	if err != nil {
		t.Fatal(err)
	}
	const deg = emissivity.Degree
	return []struct {
		name string
		emissivity.Model
		θ []float64
	}{
		{"Hagen–Rubens", emissivity.HagenRubens{}, []float64{11, 0.0045}},
		{"Hagen–Rubens from 500 K", emissivity.HagenRubens{Reference: 500}, []float64{60, 0.001}},
		{"Hagen–Rubens, liquid", emissivity.HagenRubens{}, []float64{900, 0.0001}},
		{"Hagen–Rubens, fixed", emissivity.HagenRubens{Resistivity: 25}, nil},
		{"Drude", emissivity.Drude{}, []float64{51700, 487}},
		{"Drude near the plasma edge", emissivity.Drude{}, []float64{9000, 3000}},
		{"Fresnel, normal", emissivity.Fresnel{}, []float64{2.1, 3.7}},
		{"Fresnel, p", emissivity.Fresnel{Angle: 60 * deg, Polarisation: emissivity.P}, []float64{2.1, 3.7}},
		{"Fresnel, s", emissivity.Fresnel{Angle: 60 * deg, Polarisation: emissivity.S}, []float64{0.4, 6}},
		{"Fresnel, 85°", emissivity.Fresnel{Angle: 85 * deg}, []float64{1.5, 0.01}},
		{"Fresnel, given", emissivity.Fresnel{N: metalN, K: metalK, Angle: 30 * deg}, nil},
		{"soot", emissivity.Soot{}, []float64{0.7, 1.2}},
		{"soot, thick", emissivity.Soot{Infrared: true}, []float64{5, 0.9}},
		{"film", film(0, 0), []float64{0.31}},
		{"film, thick", film(0, 0), []float64{1.9}},
		{"film, p", film(55*deg, emissivity.P), []float64{0.47}},
		{"film, s", film(55*deg, emissivity.S), []float64{0.47}},
		{"film, both", film(70*deg, emissivity.Unpolarised), []float64{0.11}},
		{"mixture", mixture, []float64{0.3, 0.25, 40, 0.002}},
		{"mixture of a mixture", nested, []float64{0.6, 0.3, 0.25, 40, 0.002}},
		{"table", table, []float64{1.04}},
		{"given", emissivity.Given{Spectrum: ramp{0.4, -0.1}}, nil},
		{"soot with a prior", emissivity.WithPrior(emissivity.Soot{}, "KL", 0.6, 0.3), []float64{0.7, 1.2}},
	}
}

// fivePoint is the derivative of f at x by the central five-point rule, step h, with the
// error h⁴f⁽⁵⁾/30 and a rounding of about 1e-16·f/h.
func fivePoint(f func(x float64) float64, x, h float64) float64 {
	return (f(x-2*h) - 8*f(x-h) + 8*f(x+h) - f(x+2*h)) / (12 * h)
}

func TestDerivativesOfModels(t *testing.T) {
	const tolerance = 1e-8 // relative, and of ε per unit of the parameter's own value
	for _, m := range models(t) {
		if err := m.Err(); err != nil {
			t.Errorf("%s: %v", m.name, err)
			continue
		}
		parameters := m.Parameters()
		if len(parameters) != len(m.θ) {
			t.Fatalf("%s: %d parameters", m.name, len(parameters))
		}
		for _, λ := range []pyro.Wavelength{0.65 * µm, 0.9 * µm, 1.55 * µm, 3.7 * µm} {
			const kelvin = 1120 * pyro.Kelvin
			grad := make([]float64, len(m.θ))
			ε, dT := m.Emissivity(grad, m.θ, λ, kelvin)
			if !(ε > 0 && ε < 1) {
				t.Errorf("%s at %v: ε = %g", m.name, λ, ε)
			}
			if again, dAgain := m.Emissivity(nil, m.θ, λ, kelvin); again != ε || dAgain != dT {
				t.Errorf("%s at %v: %g, %g without a gradient, %g, %g with it", m.name, λ, again, dAgain, ε, dT)
			}
			byT := func(k float64) float64 {
				v, _ := m.Emissivity(nil, m.θ, λ, pyro.Temperature(k))
				return v
			}
			if want := fivePoint(byT, float64(kelvin), 1); math.Abs(dT-want) > tolerance*max(math.Abs(want), ε/float64(kelvin)) {
				t.Errorf("%s at %v: ∂ε/∂T = %.12g, by differences %.12g", m.name, λ, dT, want)
			}
			for k, p := range parameters {
				θ := append([]float64(nil), m.θ...)
				by := func(x float64) float64 {
					θ[k] = x
					v, _ := m.Emissivity(nil, θ, λ, kelvin)
					return v
				}
				want := fivePoint(by, m.θ[k], 1e-4*math.Abs(m.θ[k]))
				if math.Abs(grad[k]-want) > tolerance*max(math.Abs(want), ε/math.Abs(m.θ[k])) {
					t.Errorf("%s at %v: ∂ε/∂%s = %.12g, by differences %.12g", m.name, λ, p.Name, grad[k], want)
				}
			}
		}
	}
}

func TestParametersLieWithinTheirBounds(t *testing.T) {
	for _, m := range models(t) {
		for _, p := range m.Parameters() {
			if p.Name == "" || !(p.Lo < p.Hi) || math.IsInf(p.Lo, 0) || math.IsInf(p.Hi, 0) || !(p.Start >= p.Lo && p.Start <= p.Hi) {
				t.Errorf("%s: %+v", m.name, p)
			}
			if p.Prior.Set && !(p.Prior.Value >= p.Lo && p.Prior.Value <= p.Hi) {
				t.Errorf("%s: prior of %+v out of bounds", m.name, p)
			}
		}
		if len(m.θ) > 0 { // the caller may do with the slice as it likes
			m.Parameters()[0].Name = "changed"
			if m.Parameters()[0].Name == "changed" {
				t.Errorf("%s hands out its own slice", m.name)
			}
		}
	}
}

// Every model stays between 0 and 1 in the corners of its bounds too, where it says anything.
func TestModelsAreEmissivitiesWithinTheirBounds(t *testing.T) {
	for _, m := range models(t) {
		parameters := m.Parameters()
		θ := make([]float64, len(parameters))
		for corner := range 1 << len(parameters) {
			for k, p := range parameters {
				θ[k] = p.Lo
				if corner>>k&1 == 1 {
					θ[k] = p.Hi
				}
			}
			for _, λ := range []pyro.Wavelength{0.5 * µm, 0.9 * µm, 3.99 * µm} {
				ε, dT := m.Emissivity(nil, θ, λ, 900)
				scaled := m.name == "table" && θ[0] > 1 // a scale may carry parts of the table beyond 1
				if !(ε >= 0 && ε <= 1+1e-12) && !scaled || math.IsNaN(dT) || math.IsInf(dT, 0) {
					t.Errorf("%s, θ = %v at %v: ε = %g, dT = %g", m.name, θ, λ, ε, dT)
				}
			}
		}
	}
}

func TestModelsAllocateNothing(t *testing.T) {
	for _, m := range models(t) {
		grad, sink := make([]float64, len(m.θ)), 0.0
		model, θ := m.Model, m.θ
		if n := testing.AllocsPerRun(50, func() {
			ε, _ := model.Emissivity(grad, θ, 0.8*µm, 1200)
			sink += ε
		}); n != 0 {
			t.Errorf("%s: %g allocations", m.name, n)
		}
	}
}

func TestWrongLengthsPanic(t *testing.T) {
	for _, m := range models(t) {
		for name, call := range map[string]func(){
			"θ":    func() { m.Emissivity(nil, make([]float64, len(m.θ)+1), 1*µm, 1000) },
			"grad": func() { m.Emissivity(make([]float64, len(m.θ)+1), m.θ, 1*µm, 1000) },
		} {
			func() {
				defer func() {
					if recover() == nil {
						t.Errorf("%s: a wrong length of %s passed", m.name, name)
					}
				}()
				call()
			}()
		}
	}
}

func TestWhatIsKnownOfAParameter(t *testing.T) {
	plain := emissivity.Soot{}
	known := emissivity.Fix(emissivity.WithPrior(plain, "KL", 0.6, 0.3), "alpha", 1.39)
	if err := known.Err(); err != nil {
		t.Fatal(err)
	}
	p := known.Parameters()
	if p[0].Prior != (emissivity.Prior{Value: 0.6, Std: 0.3, Set: true}) || p[0].Start != 0.6 {
		t.Errorf("KL: %+v", p[0])
	}
	if p[1].Prior != (emissivity.Prior{Value: 1.39, Set: true}) {
		t.Errorf("alpha: %+v", p[1])
	}
	if plain.Parameters()[0].Prior.Set {
		t.Error("the original changed")
	}
	narrow := emissivity.Between(known, "KL", 0.5, 0.8).Parameters()[0]
	if narrow.Lo != 0.5 || narrow.Hi != 0.8 || narrow.Start != 0.6 {
		t.Errorf("between: %+v", narrow)
	}
	if p := emissivity.Between(plain, "KL", 2, 4).Parameters()[0]; p.Start != 3 {
		t.Errorf("start %g", p.Start)
	}
	if known.String() != plain.String() {
		t.Errorf("named %q", known)
	}
	θ := []float64{0.6, 1.39}
	a, _ := known.Emissivity(nil, θ, 0.7*µm, 2000)
	if b, _ := plain.Emissivity(nil, θ, 0.7*µm, 2000); a != b {
		t.Errorf("%g with a prior, %g without", a, b)
	}
}

func TestNonsensicalModelsAreRefused(t *testing.T) {
	c, deg := emissivity.Constant(1.5), emissivity.Degree
	film := emissivity.Film{N: c, K: c, SubstrateN: c, SubstrateK: c}
	with := func(change func(*emissivity.Film)) emissivity.Film {
		f := film
		change(&f)
		return f
	}
	if film.Err() != nil {
		t.Fatal(film.Err())
	}
	for name, m := range map[string]emissivity.Model{
		"negative resistivity":    emissivity.HagenRubens{Resistivity: -1},
		"reference":               emissivity.HagenRubens{Reference: -1},
		"n without k":             emissivity.Fresnel{N: c},
		"k without n":             emissivity.Fresnel{K: c},
		"angle in degrees":        emissivity.Fresnel{Angle: 45},
		"grazing":                 emissivity.Fresnel{Angle: 90 * deg},
		"NaN angle":               emissivity.Fresnel{Angle: emissivity.Angle(math.NaN())},
		"polarisation":            emissivity.Fresnel{Polarisation: 3},
		"film without index":      emissivity.Film{N: c, K: c},
		"film upside down":        with(func(f *emissivity.Film) { f.Thinnest, f.Thickest = 1, 0.5 }),
		"film thinner than 0":     with(func(f *emissivity.Film) { f.Thinnest = -1 }),
		"film at an angle":        with(func(f *emissivity.Film) { f.Angle = 2 }),
		"no spectrum":             emissivity.Given{},
		"mixture of nothing":      emissivity.Mixture{},
		"empty table":             emissivity.Tabulated{},
		"unknown parameter":       emissivity.Fix(emissivity.Soot{}, "kl", 1),
		"out of bounds":           emissivity.Fix(emissivity.Soot{}, "KL", -1),
		"NaN":                     emissivity.Fix(emissivity.Soot{}, "KL", math.NaN()),
		"prior without std":       emissivity.WithPrior(emissivity.Soot{}, "KL", 1, 0),
		"prior out of new bounds": emissivity.Between(emissivity.Fix(emissivity.Soot{}, "KL", 1), "KL", 2, 3),
		"falling bounds":          emissivity.Between(emissivity.Soot{}, "KL", 3, 2),
		"refused already":         emissivity.Fix(emissivity.Fix(emissivity.Soot{}, "kl", 1), "KL", 1),
		"prior on nothing":        emissivity.WithPrior(nil, "KL", 1, 1),
		"nothing at all":          emissivity.WithPrior(nil, "KL", 1, 0),
	} {
		if !errors.Is(m.Err(), emissivity.ErrModel) {
			t.Errorf("%s: error %v", name, m.Err())
		}
		_, _ = m.String(), m.Parameters() // a refused description prints without panic
	}
	if _, err := emissivity.NewMixture(emissivity.Soot{}, nil); !errors.Is(err, emissivity.ErrModel) {
		t.Errorf("half a mixture: %v", err)
	}
	if _, err := emissivity.NewMixture(emissivity.Given{}, emissivity.Soot{}); !errors.Is(err, emissivity.ErrModel) {
		t.Errorf("a mixture with a bad part: %v", err)
	}
}
