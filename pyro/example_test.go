package pyro_test

import (
	"fmt"
	"log"

	"candent/pyro"
)

func ExampleRadiance() {
	// The copper point at 0.65 µm, in W m⁻² sr⁻¹ µm⁻¹.
	fmt.Printf("%.4f\n", 1e-6*pyro.Radiance(650*pyro.Nanometre, pyro.Celsius(1084.62)))
	// Output: 85.3651
}

func ExampleRadiancePerWavenumber() {
	// An infrared spectrometer counts in cm⁻¹: 2000 cm⁻¹ at 1000 K, in mW m⁻² sr⁻¹ (cm⁻¹)⁻¹.
	λ := pyro.Wavenumber(2000)
	l := pyro.RadiancePerWavenumber(λ, 1000)
	fmt.Printf("%v: %.2f, from which %.2f\n", λ, 1e5*l, pyro.RadiancePerWavenumberTemperature(λ, l))
	// Output: 5 µm: 5681.53, from which 1000.00 K
}

func ExamplePhotonRadiance() {
	// What a camera counts at 0.9 µm grows by about 1.3 % per kelvin at 1100 K.
	λ, T := 0.9*pyro.Micrometre, 1100*pyro.Kelvin
	fmt.Printf("%.2f %%\n", 100*pyro.PhotonRadianceSlope(λ, T)/pyro.PhotonRadiance(λ, T))
	// Output: 1.32 %
}

func ExampleFractionBetween() {
	// How much of what a load at 900 °C emits lies within 0.2 to 3.5 µm, taken as what silica passes.
	f := pyro.FractionBetween(0.2*pyro.Micrometre, 3.5*pyro.Micrometre, pyro.Celsius(900))
	fmt.Printf("%.0f %%\n", 100*f)
	// Output: 50 %
}

func ExamplePeakWavelength() {
	for _, t := range []pyro.Temperature{300, 922, 5800} {
		fmt.Printf("%v: %.2f\n", t, pyro.PeakWavelength(t))
	}
	// Output:
	// 300 K: 9.66 µm
	// 922 K: 3.14 µm
	// 5800 K: 0.50 µm
}

func ExampleTabulated() {
	// A silicon detector behind a glass that opens at 0.7 µm, from an invented data sheet.
	λ := []pyro.Wavelength{700e-9, 800e-9, 900e-9, 1000e-9, 1100e-9}
	band, err := pyro.Tabulated(λ, []float64{0, 0.55, 0.62, 0.65, 0}, pyro.PerWatt)
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("mean %.3f, at 1300 K it acts like %.3f\n", band.Mean(), band.EffectiveWavelength(1300))
	// Output: mean 0.905 µm, at 1300 K it acts like 0.955 µm
}

func ExampleBand_EffectiveWavelengthBetween() {
	band, err := pyro.FlatTop(700*pyro.Nanometre, 1100*pyro.Nanometre)
	if err != nil {
		log.Fatal(err)
	}
	gold := pyro.Celsius(1064.18)
	fmt.Printf("%.4f\n", band.EffectiveWavelengthBetween(gold, 2000))
	// Output: 0.9533 µm
}

func ExampleBand_SensitivityToWavelength() {
	// What a band that lies 1 nm lower than its data sheet says does to an absolute reading.
	for _, λ := range []pyro.Wavelength{650 * pyro.Nanometre, 3.9 * pyro.Micrometre} {
		band, err := pyro.Line(λ)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("%v: %+.2f K\n", λ, 1e-9*band.SensitivityToWavelength(1500))
	}
	// Output:
	// 0.65 µm: -1.53 K
	// 3.9 µm: +0.33 K
}

func ExamplePair_Estimate() {
	short, err := pyro.Line(750 * pyro.Nanometre)
	if err != nil {
		log.Fatal(err)
	}
	long, err := pyro.Line(900 * pyro.Nanometre)
	if err != nil {
		log.Fatal(err)
	}
	pair, err := pyro.NewPair(short, long, 1000, 2800)
	if err != nil {
		log.Fatal(err)
	}
	// Reading ratio ± 0.2 %, emissivity ratio 0.985 ± 1 %.
	t, u, err := pair.Estimate(0.1620, 0.985, 0.002, 0.010)
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("%.1f, standard uncertainty %.1f K if the emissivity ratio is 0.985 ± 1 %%\n", t, u)
	// Output: 1176.9 K, standard uncertainty 4.4 K if the emissivity ratio is 0.985 ± 1 %
}

func ExamplePair_EmissivityRatioAt() {
	short, err := pyro.Line(750 * pyro.Nanometre)
	if err != nil {
		log.Fatal(err)
	}
	long, err := pyro.Line(900 * pyro.Nanometre)
	if err != nil {
		log.Fatal(err)
	}
	pair, err := pyro.NewPair(short, long, 1000, 2800)
	if err != nil {
		log.Fatal(err)
	}
	// A thermocouple in the melt says 1550 ± 4 °C; the ratio reads 0.4340 ± 0.3 %.
	e, u, err := pair.EmissivityRatioAt(pyro.Celsius(1550), 4, 0.4340, 0.003)
	if err != nil {
		log.Fatal(err)
	}
	fmt.Printf("emissivity ratio %.3f, standard uncertainty %.3f\n", e, u)
	// Output: emissivity ratio 1.008, standard uncertainty 0.005
}

func ExamplePair_SensitivityToEmissivityRatio() {
	// An emissivity ratio set 1 % too high, in two pairs of lines at 1500 K.
	for _, nm := range [][2]pyro.Wavelength{{700, 900}, {1550, 1650}} {
		short, err := pyro.Line(nm[0] * pyro.Nanometre)
		if err != nil {
			log.Fatal(err)
		}
		long, err := pyro.Line(nm[1] * pyro.Nanometre)
		if err != nil {
			log.Fatal(err)
		}
		pair, err := pyro.NewPair(short, long, 700, 2500)
		if err != nil {
			log.Fatal(err)
		}
		fmt.Printf("%v and %v: %+.1f K\n", nm[0]*pyro.Nanometre, nm[1]*pyro.Nanometre, 0.01*pair.SensitivityToEmissivityRatio(1500))
	}
	// Output:
	// 0.7 µm and 0.9 µm: -4.9 K
	// 1.55 µm and 1.65 µm: -40.5 K
}
