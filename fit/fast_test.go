package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

// TestFastPathEqualsScan compares the fast path with the scan, which is the reference,
// on noisy spectra of families and noise kinds: same basins inside any interval up to
// p = 0.9995, same χ², and temperatures that agree to 1e-6 of u for the lowest and to
// 0.2 u for the others.
func TestFastPathEqualsScan(t *testing.T) {
	rng := rand.New(rand.NewPCG(17, 4))
	for _, c := range []struct {
		name     string
		family   emissivity.Family
		channels int
		lo, hi   float64
		width    float64
		rel      float64
		noise    Noise
		count    int
	}{
		{"grey", emissivity.Grey(), 6, 0.6, 1.0, 0, 0.01, Noise{}, 300},
		{"linear, 8 channels", emissivity.Polynomial(1), 8, 0.5, 1.0, 0, 0.01, Noise{}, 600},
		{"linear, 40 channels", emissivity.Polynomial(1), 40, 0.5, 1.6, 0, 0.02, Noise{}, 200},
		{"linear, relative noise", emissivity.Polynomial(1), 8, 0.5, 1.0, 0, 0.02, Relative(0.02), 300},
		{"linear, wide bands", emissivity.Polynomial(1), 10, 0.6, 1.2, 0.02, 0.01, Noise{}, 60},
		{"exponential", emissivity.Exponential(1), 8, 0.5, 1.0, 0, 0.01, Noise{}, 200},
		{"exponential, wide bands", emissivity.Exponential(1), 10, 0.6, 1.2, 0.02, 0.01, Noise{}, 60},
		{"power law, unknown scale", emissivity.PowerLaw(), 12, 0.7, 1.6, 0, 0.01, Relative(0.01).UpToFactor(), 200},
	} {
		bands, λ := testBands(t, c.lo, c.hi, c.width, c.channels)
		e, err := New(bands, Assume{Emissivity: c.family, Noise: c.noise})
		if err != nil {
			t.Fatal(err)
		}
		if e.fast == nil {
			t.Fatalf("%s: no fast path", c.name)
		}
		w := e.NewWork()
		fast, several := 0, 0
		for range c.count {
			T := pyro.Temperature(900 + 1600*rng.Float64())
			slope := 1.2 * (rng.Float64() - 0.5)
			r := Readings{Signal: make([]float64, len(bands))}
			if c.noise.kind == perReading {
				r.Std = make([]float64, len(bands))
			}
			for j, b := range bands {
				ε := 0.5 * (1 + slope*(λ[j]-λ[0])/(λ[len(λ)-1]-λ[0]))
				s := ε * b.Radiance(T)
				r.Signal[j] = s * (1 + c.rel*rng.NormFloat64())
				if r.Std != nil {
					r.Std[j] = c.rel * s
				}
			}
			if err := w.load(r); err != nil {
				t.Fatal(err)
			}
			got, ok := w.fastBasins(nil)
			if !ok {
				continue
			}
			fast++
			want := w.findBasins(nil)
			limit := want[0].chi2 + 12
			if c.noise.unknown {
				limit = want[0].chi2 * (1 + 12/float64(len(bands)-e.p-1))
			}
			inside := 0
			for i, b := range want {
				if b.chi2 > limit {
					break
				}
				inside++
				near := 0
				for k := range got {
					if math.Abs(got[k].beta-b.beta) < math.Abs(got[near].beta-b.beta) {
						near = k
					}
				}
				g := got[near]
				u := math.Sqrt(g.cov[0])
				bound := 0.2 * u
				if i == 0 && near == 0 {
					bound = 1e-6*u + 1e-13*b.beta
				}
				if !b.atEnd && math.Abs(g.beta-b.beta) > bound {
					t.Errorf("%s at %v: basin %d at %.9g K, the scan has %.9g K (%.2g u), χ² %.6g and %.6g", c.name, T, i, 1/g.beta, 1/b.beta, math.Abs(g.beta-b.beta)/u, g.chi2, b.chi2)
				}
				if i == 0 && math.Abs(g.chi2-b.chi2) > 1e-6*(1+b.chi2) {
					t.Errorf("%s at %v: χ² %.9g, the scan has %.9g", c.name, T, g.chi2, b.chi2)
				}
			}
			if inside > 1 {
				several++
			}
		}
		t.Logf("%-26s %d of %d by the fast path, %d with several basins", c.name, fast, c.count, several)
		if fast < c.count/2 {
			t.Errorf("%s: the fast path took %d of %d", c.name, fast, c.count)
		}
	}
}

func testBands(t *testing.T, lo, hi, width float64, n int) (bands []*pyro.Band, λ []float64) {
	t.Helper()
	for i := range n {
		l := lo + (hi-lo)*float64(i)/float64(n-1)
		b, err := pyro.Line(pyro.Wavelength(l) * pyro.Micrometre)
		if width > 0 {
			b, err = pyro.FlatTop(pyro.Wavelength(l-width/2)*pyro.Micrometre, pyro.Wavelength(l+width/2)*pyro.Micrometre)
		}
		if err != nil {
			t.Fatal(err)
		}
		bands, λ = append(bands, b), append(λ, l)
	}
	return bands, λ
}
