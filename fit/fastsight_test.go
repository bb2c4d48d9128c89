package fit

import (
	"math"
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// nuisances is a sight with five uncertain inputs and walls that are new with each reading.
func nuisances(bands []*pyro.Band) Assume {
	wall := &pyro.Input{Name: "wall", Value: 1000, Std: 10, PerReading: true}
	gain := &pyro.Input{Name: "gain", Value: 1, Std: 0.01}
	offset := &pyro.Input{Name: "wavelength offset", Std: 0.2e-9}
	detectors := make([]detector.Channel, len(bands))
	for i, b := range bands {
		detectors[i] = detector.Channel{Gain: gain, Wavelength: detector.Axis(offset, nil, b.Mean())}
	}
	return Assume{
		Surroundings: sightline.Enclosure(wall),
		Path: []sightline.Layer{sightline.Fouling(&pyro.Input{Name: "window", Value: 0.9, Std: 0.01},
			&pyro.Input{Name: "fouling slope", Value: 0, Std: 0.02}, bands[0].Mean())},
		Detectors: detectors,
		Range:     Range{700, 3500},
	}
}

// TestFastSightEqualsScan compares the fast path behind a sight with the scan: the same basins,
// the lowest to 1e-5 of u, the others to 0.2 u.
func TestFastSightEqualsScan(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 8))
	for _, c := range []struct {
		name     string
		family   emissivity.Family
		channels int
		count    int
	}{
		{"grey", emissivity.Grey(), 12, 60},
		{"linear", emissivity.Polynomial(1), 12, 60},
		{"exponential", emissivity.Exponential(1), 12, 60},
	} {
		bands, λ := testBands(t, 0.6, 1.2, 0, c.channels)
		a := nuisances(bands)
		a.Emissivity = c.family
		e, err := New(bands, a)
		if err != nil {
			t.Fatal(err)
		}
		w := e.NewWork()
		fast := 0
		for range c.count {
			T := pyro.Temperature(1200 + 1000*rng.Float64())
			walls := pyro.Temperature(800 + 300*rng.Float64())
			slope := 1.2 * (rng.Float64() - 0.5)
			r := Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands)), Inputs: []float64{float64(walls)}}
			for j, b := range bands {
				ε := 0.5 * (1 + slope*(λ[j]-λ[0])/(λ[len(λ)-1]-λ[0]))
				s := 0.9 * (ε*b.Radiance(T) + (1-ε)*b.Radiance(walls))
				r.Std[j] = 0.005 * s
				r.Signal[j] = s + r.Std[j]*rng.NormFloat64()
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
			for i, b := range want {
				if b.chi2 > want[0].chi2+fastLimit {
					break
				}
				near := 0
				for k := range got {
					if math.Abs(got[k].beta-b.beta) < math.Abs(got[near].beta-b.beta) {
						near = k
					}
				}
				u := math.Sqrt(got[near].cov[0])
				bound := 0.2 * u
				if i == 0 && near == 0 {
					bound = 1e-5 * u
				}
				if !b.atEnd && math.Abs(got[near].beta-b.beta) > bound {
					t.Errorf("%s at %v: basin %d at %.9g K, the scan has %.9g K (%.2g u), χ² %.6g and %.6g", c.name, T, i, 1/got[near].beta, 1/b.beta, math.Abs(got[near].beta-b.beta)/u, got[near].chi2, b.chi2)
				}
			}
		}
		t.Logf("%-14s %d of %d by the fast path", c.name, fast, c.count)
		if fast < c.count/2 {
			t.Errorf("%s: the fast path took %d of %d", c.name, fast, c.count)
		}
	}
}
