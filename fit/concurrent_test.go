package fit_test

import (
	"sync"
	"testing"

	"candent/emissivity"
	"candent/fit"
)

// TestSightsAreSafeForConcurrentUse: one Estimator, a Work for each goroutine, the same answers.
func TestSightsAreSafeForConcurrentUse(t *testing.T) {
	bands := lines(t, 0.9, 1.6, 6)
	for name, surface := range map[string]emissivity.Surface{
		"family": emissivity.Grey(), "process": emissivity.Unknown(), "model": emissivity.Given{Spectrum: law(func(float64) float64 { return 0.6 })},
	} {
		a := furnace(bands, emissivity.Grey())
		a.Emissivity = surface
		e, err := fit.New(bands, a)
		if err != nil {
			t.Fatal(err)
		}
		read := func(i int) fit.Readings {
			s := scene{T: 1300 + 20*float64(i), ε: func(float64) float64 { return 0.6 }, walls: one(900 + 10*float64(i)), τ: func(float64) float64 { return 0.9 }}
			y := make([]float64, len(bands))
			for k, b := range bands {
				y[k] = s.read(b, 0)
			}
			return fit.Readings{Signal: y, Std: scaled(y, 0.005), Inputs: []float64{900 + 10*float64(i)}}
		}
		const readings = 8
		want := make([]float64, readings)
		for i := range want {
			r, err := e.Estimate(read(i))
			if err != nil {
				t.Fatalf("%s: %v", name, err)
			}
			T, _ := r.Temperature()
			want[i] = float64(T)
		}
		var group sync.WaitGroup
		got := make([][readings]float64, 4)
		for g := range got {
			group.Add(1)
			go func() {
				defer group.Done()
				w, r := e.NewWork(), e.NewResult()
				for i := range readings {
					in := read((i + g) % readings)
					if e.EstimateTo(r, w, in) == nil && e.IntervalTo(r, w, in, 0.95) == nil {
						T, _ := r.Temperature()
						got[g][(i+g)%readings] = float64(T)
					}
				}
			}()
		}
		group.Wait()
		for g := range got {
			for i, T := range got[g] {
				if T != want[i] {
					t.Errorf("%s: goroutine %d, reading %d: %v K, alone %v K", name, g, i, T, want[i])
				}
			}
		}
	}
}
