package fit_test

import (
	"math/rand/v2"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// furnace is a load seen past hot walls through a fouled window: a wall temperature for each
// reading, and a gain, a wavelength axis, a window and its slope that all readings share.
func furnace(bands []*pyro.Band, family emissivity.Family) fit.Assume {
	gain, offset := input("gain", 1, 0.01), input("wavelength axis", 0, 0.2e-9)
	detectors := make([]detector.Channel, len(bands))
	for i, b := range bands {
		detectors[i] = detector.Channel{Gain: gain, Wavelength: detector.Axis(offset, nil, b.Mean())}
	}
	return fit.Assume{
		Emissivity:   family,
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall", Unit: "K", Value: 1000, Std: 10, PerReading: true}),
		Path:         []sightline.Layer{sightline.Fouling(input("window", 0.9, 0.01), input("fouling slope", 0, 0.02), 0.75*µm)},
		Detectors:    detectors,
		Range:        fit.Range{Min: 700, Max: 3500},
	}
}

// BenchmarkFurnace is BenchmarkSpectrum/channels=100/emissivity=linear with five uncertain
// inputs, one of them new with each reading.
func BenchmarkFurnace(b *testing.B) {
	bands := lines(b, 0.5, 1, 100)
	surface := truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}
	e, err := fit.New(bands, furnace(bands, surface.family))
	if err != nil {
		b.Fatal(err)
	}
	rng := rand.New(rand.NewPCG(7, 11))
	readings := make([]fit.Readings, 64)
	for i := range readings {
		walls := 800 + 150*rng.Float64()
		T := pyro.Temperature(1000 + 1500*rng.Float64())
		y := surface.signals(bands, 0.75*µm, T)
		for j, band := range bands {
			ε := surface.family.CentredOn(0.75*µm).Emissivity(nil, surface.θ, band.Mean())
			y[j] = 0.9 * (y[j] + (1-ε)*band.Radiance(pyro.Temperature(walls)))
		}
		std := scaled(y, 0.01)
		for j := range y {
			y[j] += std[j] * rng.NormFloat64()
		}
		readings[i] = fit.Readings{Signal: y, Std: std, Inputs: []float64{walls}}
	}
	w, r := e.NewWork(), e.NewResult()
	unit := expNanoseconds()
	b.ReportAllocs()
	i := 0
	for b.Loop() {
		if err := e.EstimateTo(r, w, readings[i%64]); err != nil {
			b.Fatal(err)
		}
		i++
	}
	inExp(b, unit)
}
