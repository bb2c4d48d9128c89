package pyro_test

import (
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

func TestSensitivityToRadiance(t *testing.T) {
	// |dT| for 1 %, 0.01·(λT²/c₂)(1 − e^(−c₂/λT)), from the formula, four decimals printed.
	for _, r := range []struct{ t, um, want float64 }{
		{300, 0.65, .0407}, {300, 10, .6204}, {1000, 0.9, .6255}, {1000, 3.9, 2.6429},
		{1500, 1.6, 2.4959}, {2000, 2.2, 5.8838}, {3000, 10, 23.8305},
	} {
		λ, T := pyro.Wavelength(r.um)*pyro.Micrometre, pyro.Temperature(r.t)
		if got := 0.01 * pyro.SensitivityToRadiance(λ, T); math.Abs(got-r.want) > 0.5e-4+1e-9 {
			t.Errorf("1 %% of radiance at %g µm, %g K is worth %.5f K, want %.4f", r.um, r.t, got, r.want)
		}
		if got := 0.01 * pyro.SensitivityToEmissivity(λ, T); math.Abs(got+r.want) > 0.5e-4+1e-9 {
			t.Errorf("1 %% of emissivity at %g µm, %g K is worth %.5f K, want −%.4f", r.um, r.t, got, r.want)
		}
	}
}

func TestSensitivityToSurroundings(t *testing.T) {
	// Re-estimation with the walls moved by ± h. The measured radiance stays.
	λ, T, walls, ε := 3.9*pyro.Micrometre, 1173.15*pyro.Kelvin, 1473.15*pyro.Kelvin, 0.8
	measured := ε*pyro.Radiance(λ, T) + (1-ε)*pyro.Radiance(λ, walls)
	infer := func(walls pyro.Temperature) float64 {
		return pyro.RadianceTemperature(λ, (measured-(1-ε)*pyro.Radiance(λ, walls))/ε).Kelvin()
	}
	const h = 0.01 // K; truncation of the central difference is of order h²
	near(t, "∂T/∂T_s", pyro.SensitivityToSurroundings(λ, T, walls, ε), (infer(walls+h)-infer(walls-h))/(2*h), 1e-7)
}

func TestFiniteErrorsOfSettings(t *testing.T) {
	// True T 1273.15 K, ε 0.80, instrument set to 1: what it reads, from the formula, 1e-4 K printed.
	for _, r := range []struct{ um, want float64 }{
		{0.9, 1250.9199}, {1.6, 1234.1883}, {3.9, 1186.3340}, {5.0, 1168.6727}, {10, 1118.4053},
	} {
		λ := pyro.Wavelength(r.um) * pyro.Micrometre
		got := pyro.RadianceTemperature(λ, 0.8*pyro.Radiance(λ, 1273.15)).Kelvin()
		if math.Abs(got-r.want) > 0.5e-4+1e-9 {
			t.Errorf("%g µm: %.5f K, want %.4f K", r.um, got, r.want)
		}
	}
}

func ExampleSensitivityToEmissivity() {
	// What an emissivity set 5 % too high costs at 1500 K.
	for _, λ := range []pyro.Wavelength{650 * pyro.Nanometre, 1.6 * pyro.Micrometre, 3.9 * pyro.Micrometre} {
		fmt.Printf("%v: %+.1f K\n", λ, 0.05*pyro.SensitivityToEmissivity(λ, 1500))
	}
	// Output:
	// 0.65 µm: -5.1 K
	// 1.6 µm: -12.5 K
	// 3.9 µm: -27.9 K
}
