package fit_test

import (
	"fmt"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/sightline"
)

// A kiln engineer's single band, with an emissivity from the handbook and a calibration
// scale good to 1 %.
func ExampleEstimator_Estimate_singleBand() {
	band, err := pyro.FlatTop(950*pyro.Nanometre, 1050*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	kiln, err := fit.New([]*pyro.Band{band}, fit.Assume{
		Emissivity: emissivity.Grey().WithPrior("level", 0.85, 0.05),
		Noise:      fit.Relative(0.002),
		Shared:     []fit.Shared{fit.SharedScale("calibration scale", 0.01, 1)},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := kiln.Estimate(fit.Readings{Signal: []float64{6.2e9}}) // W m⁻² sr⁻¹ m⁻¹
	fmt.Println(r, err)
	// By hand: ∂T/∂ln ε = T/n = 153 K at n = 9.7, so 0.05/0.85 of ε is worth 9.0 K.
	for _, share := range r.Budget() {
		fmt.Printf("%s %.1f K\n", share.Name, share.StdK)
	}
	// Output:
	// 1482.7 K ± 9.1 K (95 %: 1465.8 to 1501.9 K); grey emissivity assumed with what is known of it, not tested; 97 % of u² is the emissivity assumption; emissivity at 1 µm 0.850 ± 0.050 <nil>
	// readings 0.3 K
	// prior on level 9.0 K
	// calibration scale 1.5 K
}

// A researcher's spectrum in arbitrary units.
func ExampleEstimator_Estimate_arbitraryUnits() {
	nm := []float64{650, 700, 750, 800, 850, 900, 950, 1000}
	counts := []float64{506.3, 1052, 1971, 3390, 5340, 7870, 10990, 14700}
	bands := make([]*pyro.Band, len(nm))
	for i, v := range nm {
		var err error
		if bands[i], err = pyro.Line(pyro.Wavelength(v) * pyro.Nanometre); err != nil {
			fmt.Println(err)
			return
		}
	}
	lamp, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Exponential(1).Relative(), Noise: fit.Relative(0.01)})
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := lamp.Estimate(fit.Readings{Signal: counts})
	fmt.Println(r, err)
	// Output:
	// 1453 K ± 24 K (95 %: 1407.6 to 1502.0 K); exponential emissivity of order 1 assumed; the readings do not contradict it, which is no proof; amplitude at 0.85 µm 2.26e-06 ± 4.5e-07 <nil>
}

// A spectrum in arbitrary units of a surface that nobody has characterised.
func ExampleEstimator_Estimate_unknownSurface() {
	nm := []float64{650, 700, 750, 800, 850, 900, 950, 1000}
	counts := []float64{506.3, 1052, 1971, 3390, 5340, 7870, 10990, 14700}
	bands := make([]*pyro.Band, len(nm))
	for i, v := range nm {
		var err error
		if bands[i], err = pyro.Line(pyro.Wavelength(v) * pyro.Nanometre); err != nil {
			fmt.Println(err)
			return
		}
	}
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown().Relative(), Noise: fit.Relative(0.01)})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(e.Estimate(fit.Readings{Signal: counts}))
	// Output:
	// 1414 K ± 40 K (95 %: 1347 to 1511 K); unknown surface of relative level assumed; the readings do not contradict it, which is no proof; more than 99 % of u² is the emissivity assumption; amplitude at 0.85 µm 3.13e-06 ± 1e-06 <nil>
}

// A kiln engineer's single band with hot walls and an old window.
func ExampleEstimator_Estimate_hotWalls() {
	band, err := pyro.FlatTop(1550*pyro.Nanometre, 1650*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	kiln, err := fit.New([]*pyro.Band{band}, fit.Assume{
		Emissivity:   emissivity.Grey().WithPrior("level", 0.85, 0.05),
		Noise:        fit.Relative(0.002),
		Surroundings: sightline.Enclosure(&pyro.Input{Name: "wall", Unit: "K", Value: 1400, Std: 15, PerReading: true}),
		Path:         []sightline.Layer{sightline.Window(&pyro.Input{Name: "window", Value: 0.90, Std: 0.02})},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := kiln.Estimate(fit.Readings{Signal: []float64{1.1e10}, Inputs: []float64{1412}}) // W m⁻² sr⁻¹ m⁻¹; wall, K
	fmt.Println(r, err)
	for _, share := range r.Budget() {
		fmt.Printf("%s %.1f K, one u more adds %+.1f K\n", share.Name, share.StdK, share.EffectK)
	}
	// Output:
	// 1295 K ± 11 K (95 %: 1268.1 to 1312.8 K); grey emissivity assumed with what is known of it, not tested; 62 % of u² is the emissivity assumption; emissivity at 1.6 µm 0.850 ± 0.050 <nil>
	// readings 0.5 K, one u more adds +0.0 K
	// prior on level 8.6 K, one u more adds +8.6 K
	// wall 4.0 K, one u more adds -4.0 K
	// window 5.4 K, one u more adds -5.4 K
}
