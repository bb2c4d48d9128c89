package fit_test

import (
	"fmt"
	"math"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

const µm = pyro.Micrometre

// lines returns bands at n wavelengths from lo to hi µm.
func lines(t testing.TB, lo, hi float64, n int) []*pyro.Band {
	t.Helper()
	bands := make([]*pyro.Band, n)
	for i := range bands {
		um := lo
		if n > 1 {
			um += (hi - lo) * float64(i) / float64(n-1)
		}
		b, err := pyro.Line(pyro.Wavelength(um) * µm)
		if err != nil {
			t.Fatal(err)
		}
		bands[i] = b
	}
	return bands
}

// truth is a surface that a family contains, and a way to see it.
type truth struct {
	name   string
	family emissivity.Family
	θ      []float64
}

func truths() []truth {
	return []truth{
		{"grey", emissivity.Grey(), []float64{0.6}},
		{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}},
		{"quadratic", emissivity.Polynomial(2), []float64{0.5, -0.25, 0.2}},
		{"cubic", emissivity.Polynomial(3), []float64{0.5, -0.25, 0.2, -0.1}},
		{"exponential", emissivity.Exponential(1), []float64{-0.7, -0.5}},
		{"exponential of order 2", emissivity.Exponential(2), []float64{-0.7, -0.5, 0.4}},
		{"power law", emissivity.PowerLaw(), []float64{-0.7, -0.4}},
	}
}

// signals returns the noise-free mean radiances of a truth at T, by the quadrature of the
// bands themselves.
func (s truth) signals(bands []*pyro.Band, centre pyro.Wavelength, T pyro.Temperature) []float64 {
	f := s.family.CentredOn(centre)
	out := make([]float64, len(bands))
	for i, b := range bands {
		λ, w := b.Nodes()
		for k := range λ {
			out[i] += w[k] * f.Emissivity(nil, s.θ, λ[k]) * pyro.Radiance(λ[k], T)
		}
	}
	return out
}

func scaled(v []float64, f float64) []float64 {
	out := make([]float64, len(v))
	for i := range v {
		out[i] = f * math.Abs(v[i])
	}
	return out
}

func TestNoiseFreeSpectraGiveTheTruth(t *testing.T) {
	bands := lines(t, 0.7, 1.5, 16)
	for _, s := range truths() {
		e, err := fit.New(bands, fit.Assume{Emissivity: s.family})
		if err != nil {
			t.Fatal(err)
		}
		for _, T := range []pyro.Temperature{900, 1400, 2000, 2800} {
			y := s.signals(bands, 1.1*µm, T)
			r, err := e.Estimate(fit.Readings{Signal: y, Std: scaled(y, 1e-4)})
			if err != nil {
				t.Errorf("%s at %v: %v", s.name, T, err)
				continue
			}
			got, state := r.Temperature()
			if state != fit.Determined || math.Abs(float64(got/T)-1) > 1e-9 {
				t.Errorf("%s at %v: %.12g K, %v; %v", s.name, T, float64(got), state, r.Notes())
				iv, _ := r.Interval()
				fmt.Println(iv, r.Basins())
			}
		}
	}
}
