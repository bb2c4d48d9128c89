package fit_test

import (
	"math"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// FuzzFurnace reads loads, walls, windows and signals of any size: whatever comes out is an
// error, or finite numbers in order.
func FuzzFurnace(f *testing.F) {
	bands := lines(f, 0.9, 1.6, 3)
	wall := &pyro.Input{Name: "wall", Value: 1300, Std: 10, PerReading: true}
	rest := &pyro.Input{Name: "rest", Value: 900, Std: 10, PerReading: true}
	fill := &pyro.Input{Name: "fill", Value: 0.9, Std: 0.02, PerReading: true}
	gain := input("gain", 1, 0.01)
	a := fit.Assume{
		Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{{Name: "wall", Factor: input("F", 0.8, 0.02), Temperature: wall}}},
		Path:         []sightline.Layer{sightline.Window(input("window", 0.9, 0.02)), sightline.Soot(input("KL", 0.02, 0.01), 0.95, input("flame", 1500, 50))},
		Field:        sightline.Field{Fraction: fill, Rest: rest, Spread: input("spread", 2, 1)},
		Detectors: []detector.Channel{{Gain: gain, Saturation: 1e11, Floor: 1e3, Noise: detector.NoiseModel{Constant: 1e10, PerSignal: 1}}, {Gain: gain, Resolution: 1e5, Noise: detector.NoiseModel{Constant: 1e10}},
			{Gain: gain, Noise: detector.NoiseModel{Constant: 1e10}, Wavelength: detector.Axis(input("axis", 0, 1e-9), nil, 1.6*µm)}},
		Stray: input("stray", 0.001, 0.0005),
		Range: fit.Range{Min: 500, Max: 4000},
	}
	var estimators []*fit.Estimator
	for _, s := range []emissivity.Surface{emissivity.Grey().WithPrior("level", 0.8, 0.05), emissivity.Grey(), emissivity.About("flat", law(func(float64) float64 { return 0.6 }), 0.1)} {
		a.Emissivity = s
		if _, process := s.(emissivity.Process); process { // which a spread of T refuses
			a.Field.Spread = nil
		}
		e, err := fit.New(bands, a)
		if err != nil {
			f.Fatal(err)
		}
		estimators = append(estimators, e)
	}
	f.Add(5e9, 8e9, 1.2e10, 1300.0, 900.0, 0.9)
	f.Add(0.0, -1.0, 1e300, 200.0, 6000.0, 1.0)
	f.Add(1e11, 1e3, 1e5, 1300.0, 300.0, 1e-9)
	f.Fuzz(func(t *testing.T, a, b, c, wall, rest, fill float64) {
		for _, e := range estimators {
			r, err := e.Estimate(fit.Readings{Signal: []float64{a, b, c}, Inputs: []float64{wall, fill, rest}})
			if err != nil {
				continue
			}
			T, state := r.Temperature()
			iv, ok := r.Interval()
			if state == fit.Determined && (!ok || !(iv.Low <= T+1e-6*T && T <= iv.High+1e-6*iv.High)) {
				t.Errorf("%v outside %v to %v", T, iv.Low, iv.High)
			}
			for _, v := range []float64{float64(T), float64(iv.Low), float64(iv.High)} {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Errorf("%v", r)
				}
			}
			for _, s := range r.Budget() {
				if math.IsNaN(s.StdK) || math.IsInf(s.StdK, 0) {
					t.Errorf("budget %v", s)
				}
			}
			if r.Report() == "" {
				t.Error("no report")
			}
		}
	})
}
