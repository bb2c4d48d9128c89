package fit_test

import (
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// campaign declares a load in a furnace with hot walls, seen through a window by a filter
// instrument of six bands; known scales every standard uncertainty of what readings share.
func campaign(t *testing.T, bands []*pyro.Band, known float64) *fit.Estimator {
	t.Helper()
	gain, axis := input("gain", 1, known*0.01), input("wavelength axis", 0, known*1e-9)
	detectors := make([]detector.Channel, len(bands))
	for i, b := range bands {
		detectors[i] = detector.Channel{Gain: gain, Wavelength: detector.Axis(axis, nil, b.Mean()), CalibratedAt: 1357.77}
	}
	level := emissivity.Grey().WithPrior("level", 0.8, known*0.03)
	if known == 0 {
		level = emissivity.Grey().Fix("level", 0.8)
	}
	e, err := fit.New(bands, fit.Assume{
		Emissivity:   level,
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall", Value: 1300, Std: 10, PerReading: true}),
		Path:         []sightline.Layer{sightline.Window(input("window", 0.9, known*0.02))},
		Field:        sightline.Field{Fraction: input("fill", 0.85, known*0.03), Rest: &pyro.Input{Name: "rest of the field", Value: 1250, Std: 15, PerReading: true}},
		Detectors:    detectors,
		Range:        fit.Range{Min: 800, Max: 2500},
	})
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// TestCampaigns draws what a campaign's readings share once for each campaign and what is new
// with each reading anew, and asks how often 95 % intervals hold the truth: those of single
// readings, and those of the mean over a shift. CANDENT_STUDY=whole draws 2,000 campaigns.
func TestCampaigns(t *testing.T) {
	campaigns := 300
	if testing.Short() {
		campaigns = 40
	}
	if os.Getenv("CANDENT_STUDY") == "whole" {
		campaigns = 2000
	}
	const shift, noise = 12, 0.004
	bands := lines(t, 0.9, 1.6, 6)
	honest, blind := campaign(t, bands, 1), campaign(t, bands, 0)
	rng := rand.New(rand.NewPCG(2, 30))
	// The readings' own wavelengths, and the shift's action through the calibration.
	single, mean, blindMean := 0, 0, 0
	for range campaigns {
		gain, axis := 1+0.01*rng.NormFloat64(), 1e-3*rng.NormFloat64() // µm
		ε, τ, φ := 0.8+0.03*rng.NormFloat64(), 0.9+0.02*rng.NormFloat64(), min(1, 0.85+0.03*rng.NormFloat64())
		if ε > 1 { // 7 standard deviations away
			t.Fatal("an emissivity above 1 was drawn")
		}
		var with, without []*fit.Result
		truth := 0.0
		for i := range shift {
			T := 1450 + 60*rng.Float64()
			truth += T / shift
			wall, rest := 1280+40*rng.Float64(), 1230+40*rng.Float64()
			s := scene{T: T, ε: func(float64) float64 { return ε }, walls: one(wall), fill: φ, rest: rest, τ: func(float64) float64 { return τ }}
			r := fit.Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands)),
				Inputs: []float64{wall + 10*rng.NormFloat64(), rest + 15*rng.NormFloat64()}}
			for j, b := range bands {
				um := float64(b.Mean()) * 1e6
				// The band lies at um + axis; its gain was found at the copper point as if at um.
				y := gain * s.radiance(um+axis) * planck(um, 1357.77) / planck(um+axis, 1357.77)
				r.Std[j] = noise * y
				r.Signal[j] = y * (1 + noise*rng.NormFloat64())
			}
			a, err := honest.Estimate(r)
			if err != nil {
				t.Fatal(err)
			}
			if iv, _ := a.Interval(); i == 0 && !iv.LowOpen && float64(iv.Low) <= T && T <= float64(iv.High) {
				single++
			}
			b, err := blind.Estimate(r)
			if err != nil {
				t.Fatal(err)
			}
			with, without = append(with, a), append(without, b)
		}
		holds := func(list []*fit.Result) bool {
			m, err := fit.Average(list)
			if err != nil {
				t.Fatal(err)
			}
			lo, hi := m.Interval(0.95)
			return float64(lo) <= truth && truth <= float64(hi)
		}
		if holds(with) {
			mean++
		}
		if holds(without) {
			blindMean++
		}
	}
	n := float64(campaigns)
	allowed := 3 * math.Sqrt(0.95*0.05/n)
	t.Logf("%d campaigns of %d readings: 95 %% intervals hold the truth: single %.1f %%, mean %.1f %%; the mean without what is shared %.1f %%",
		campaigns, shift, 100*float64(single)/n, 100*float64(mean)/n, 100*float64(blindMean)/n)
	close(t, "share of single readings", float64(single)/n, 0.95, allowed)
	close(t, "share of means", float64(mean)/n, 0.95, allowed)
	if float64(blindMean)/n > 0.5 {
		t.Errorf("without the shared part %.1f %% of the means are held: it should matter", 100*float64(blindMean)/n)
	}
}
