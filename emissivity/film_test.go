package emissivity_test

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// beams is 1 − |r|² of a film by adding one reflected beam after the other, with the
// amplitude coefficients of its two faces by angles of refraction.
func beams(ñ1, ñ2 complex128, d, λ float64, a emissivity.Angle, p emissivity.Polarisation) float64 {
	sin := complex(math.Sin(float64(a)), 0)
	cos := func(ñ complex128) complex128 { return cmplx.Cos(cmplx.Asin(sin / ñ)) }
	// reflection and transmission from medium a into medium b
	face := func(a, b complex128) (r, t complex128) {
		ca, cb := cos(a), cos(b)
		if p == emissivity.P {
			return (b*ca - a*cb) / (b*ca + a*cb), 2 * a * ca / (b*ca + a*cb)
		}
		return (a*ca - b*cb) / (a*ca + b*cb), 2 * a * ca / (a*ca + b*cb)
	}
	r01, t01 := face(1, ñ1)
	r10, t10 := face(ñ1, 1)
	r12, _ := face(ñ1, ñ2)
	there := cmplx.Exp(4i * math.Pi * ñ1 * cos(ñ1) * complex(d/λ, 0)) // and back
	r, beam := r01, t01*r12*t10*there
	for range 2000 {
		r += beam
		beam *= r10 * r12 * there
	}
	return 1 - real(r)*real(r) - imag(r)*imag(r)
}

func TestFilmIsTheSumOfItsBeams(t *testing.T) {
	for _, nk := range [][2]complex128{{2.4 + 0.05i, 3.2 + 4.1i}, {1.8, 0.3 + 7i}, {2.9 + 0.6i, 12 + 50i}, {1.46, 3.5 + 0.01i}} {
		for _, degrees := range []float64{0, 20, 60, 85} {
			for _, d := range []float64{0, 0.02, 0.13, 0.5, 1.7, 30} {
				for _, p := range []emissivity.Polarisation{emissivity.S, emissivity.P} {
					f := emissivity.Film{
						N: emissivity.Constant(real(nk[0])), K: emissivity.Constant(imag(nk[0])),
						SubstrateN: emissivity.Constant(real(nk[1])), SubstrateK: emissivity.Constant(imag(nk[1])),
						Angle: emissivity.Angle(degrees) * emissivity.Degree, Polarisation: p,
					}
					got, _ := f.Emissivity(nil, []float64{d}, 0.9*µm, 1200)
					if want := beams(nk[0], nk[1], d, 0.9, f.Angle, p); math.Abs(got-want) > 1e-12 {
						t.Errorf("indices %v, %g µm at %v, %v: %.14g, beams %.14g", nk, d, f.Angle, p, got, want)
					}
				}
			}
		}
	}
}

func TestFilmsLimits(t *testing.T) {
	c := func(v float64) emissivity.Constant { return emissivity.Constant(v) }
	at := func(m emissivity.Model, θ ...float64) float64 {
		ε, _ := m.Emissivity(nil, θ, 0.8*µm, 1200)
		return ε
	}
	for _, a := range []emissivity.Angle{0, 50 * emissivity.Degree} {
		f := emissivity.Film{N: c(2.3), K: c(0), SubstrateN: c(2.9), SubstrateK: c(3.9), Angle: a}
		bare := at(emissivity.Fresnel{N: c(2.9), K: c(3.9), Angle: a})
		if got := at(f, 0); math.Abs(got-bare) > 1e-14 {
			t.Errorf("at %v, no film: %g, bare metal %g", a, got, bare)
		}
		period := f.Period(0.8 * µm)
		for turns := 1.0; turns < 4; turns++ { // whole fringes of a clear film
			if got := at(f, turns*period); math.Abs(got-bare) > 1e-13 {
				t.Errorf("at %v, %g fringes: %g, bare metal %g", a, turns, got, bare)
			}
		}
		f.K = c(0.5) // dark through 40 µm
		oxide := at(emissivity.Fresnel{N: c(2.3), K: c(0.5), Angle: a})
		if got := at(f, 40); math.Abs(got-oxide) > 1e-14 {
			t.Errorf("at %v, thick film: %g, bulk oxide %g", a, got, oxide)
		}
	}
	// a quarter wave of n = √n₂ on a clear substrate of n₂ reflects nothing
	f := emissivity.Film{N: c(1.5), K: c(0), SubstrateN: c(2.25), SubstrateK: c(0)}
	if got := at(f, f.Period(0.8*µm)/2); math.Abs(got-1) > 1e-15 {
		t.Errorf("quarter wave: %.17g", got)
	}
}

// ε over the thickness has about as many maxima as Period says: each can be a basin.
func TestFilmHasABasinForEachFringe(t *testing.T) {
	f := emissivity.Film{N: ramp{2.4, -0.02}, K: ramp{0.02, 0}, SubstrateN: ramp{3.2, 0.9}, SubstrateK: ramp{4.1, 3.5}}
	p := f.Parameters()[0]
	maxima, before, rising := 0, -1.0, true
	const steps = 4000
	for i := range steps + 1 {
		ε, _ := f.Emissivity(nil, []float64{p.Lo + (p.Hi-p.Lo)*float64(i)/steps}, 0.65*µm, 1200)
		if ε < before && rising {
			maxima++
		}
		rising, before = ε > before, ε
	}
	if want := (p.Hi - p.Lo) / f.Period(0.65*µm); math.Abs(float64(maxima)-want) > 1 {
		t.Errorf("%d maxima from %g to %g µm, want about %.1f", maxima, p.Lo, p.Hi, want)
	}
}

func TestOutsideACurveModelsAreNaN(t *testing.T) {
	curve, err := pyro.NewCurve([]pyro.Wavelength{1 * µm, 2 * µm}, []float64{1.8, 1.7})
	if err != nil {
		t.Fatal(err)
	}
	c := emissivity.Constant(2)
	table, err := emissivity.NewTabulated([]pyro.Wavelength{1 * µm, 2 * µm}, []pyro.Temperature{1, 3000}, [][]float64{{0.1, 0.2}, {0.1, 0.2}}, 0.1)
	if err != nil {
		t.Fatal(err)
	}
	mixture, err := emissivity.NewMixture(emissivity.Given{Spectrum: curve}, emissivity.Soot{})
	if err != nil {
		t.Fatal(err)
	}
	for name, m := range map[string]struct {
		emissivity.Model
		θ []float64
	}{
		"Fresnel": {emissivity.Fresnel{N: curve, K: c}, nil},
		"film":    {emissivity.Film{N: curve, K: c, SubstrateN: c, SubstrateK: c}, []float64{1}},
		"metal":   {emissivity.Film{N: c, K: c, SubstrateN: c, SubstrateK: curve}, []float64{0.01}},
		"given":   {emissivity.Given{Spectrum: curve}, nil},
		"table":   {table, []float64{1}},
		"mixture": {mixture, []float64{0, 0.5, 1}},
	} {
		if ε, dT := m.Emissivity(nil, m.θ, 0.9*µm, 1200); !math.IsNaN(ε) || !math.IsNaN(dT) {
			t.Errorf("%s outside: %g, %g", name, ε, dT)
		}
		if ε, dT := m.Emissivity(nil, m.θ, 1.5*µm, 1200); math.IsNaN(ε) || math.IsNaN(dT) {
			t.Errorf("%s inside: %g, %g", name, ε, dT)
		}
	}
}

func ExampleFilm() {
	// A scale of index 2.4 + 0.02i (invented) on iron at 1 µm, n and k of Ordal et al. (1988).
	f := emissivity.Film{
		N: emissivity.Constant(2.4), K: emissivity.Constant(0.02),
		SubstrateN: emissivity.Constant(3.184), SubstrateK: emissivity.Constant(4.144),
	}
	fmt.Printf("fringes repeat every %.3f µm\n", f.Period(1*µm))
	for _, d := range []float64{0, 0.08, 0.2} {
		ε, _ := f.Emissivity(nil, []float64{d}, 1*µm, 1200*pyro.Kelvin)
		fmt.Printf("%.2f µm: ε = %.3f\n", d, ε)
	}
	// Output:
	// fringes repeat every 0.208 µm
	// 0.00 µm: ε = 0.367
	// 0.08 µm: ε = 0.944
	// 0.20 µm: ε = 0.377
}
