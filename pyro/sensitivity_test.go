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

func TestSensitivityToWavelength(t *testing.T) {
	// Re-estimation with the wavelength moved by ± h at constant radiance.
	for _, λ := range []pyro.Wavelength{0.65 * µm, 0.9 * µm, 3.9 * µm, 10 * µm} {
		const T, h = 1300.0, 1e-5
		l := pyro.Radiance(λ, T)
		d := float64(pyro.RadianceTemperature(λ*(1+h), l)-pyro.RadianceTemperature(λ*(1-h), l)) / (2 * h * float64(λ))
		near(t, fmt.Sprintf("∂T/∂λ at %v", λ), pyro.SensitivityToWavelength(λ, T), d, 1e-6)
	}
}

func TestSensitivityToEmissivityRatio(t *testing.T) {
	// 0.01·ΛT²/c₂ (Wien), three decimals printed; Wien's law is right to 1e-5 for the first two.
	for _, r := range []struct{ short, long, t, want, allowed float64 }{
		{0.7, 0.9, 1000, 2.189, 0.6e-3}, {0.7, 0.9, 1500, 4.926, 0.6e-3}, {0.95, 1.05, 1000, 6.933, 0.6e-3}, {1.55, 1.65, 1000, 17.776, 0.02},
	} {
		p := linePair(t, r.short, r.long, 500, 3000)
		if got := -0.01 * p.SensitivityToEmissivityRatio(pyro.Temperature(r.t)); math.Abs(got-r.want) > r.allowed {
			t.Errorf("1 %% of emissivity ratio at %g/%g µm, %g K is worth %.4f K, want %.3f", r.short, r.long, r.t, got, r.want)
		}
	}
	// Re-estimation.
	p := linePair(t, 0.75, 0.9, 900, 2800)
	ratio := 0.98 * p.Ratio(1500)
	a, err := p.Temperature(ratio, 0.98*(1+1e-4))
	if err != nil {
		t.Fatal(err)
	}
	b, err := p.Temperature(ratio, 0.98*(1-1e-4))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "∂T/∂lnε_r", p.SensitivityToEmissivityRatio(1500), float64(a-b)/2e-4, 1e-6)
}

func TestLowerBoundAndWhatBreaksIt(t *testing.T) {
	var bands []*pyro.Band
	var alone, walls, std []float64
	const T, ε = 1300, 0.5
	for _, um := range []float64{0.65, 0.9, 1.6, 3.9} {
		b, err := pyro.Line(pyro.Wavelength(um) * µm)
		if err != nil {
			t.Fatal(err)
		}
		bands = append(bands, b)
		alone = append(alone, ε*b.Radiance(T))
		walls = append(walls, ε*b.Radiance(T)+(1-ε)*b.Radiance(1500))
		std = append(std, 0.005*ε*b.Radiance(T))
	}
	low, ok := pyro.LowerBound(bands, alone, std, 2, true)
	// The shortest band is nearest to T: its radiance temperature less 1 % of radiance.
	want := float64(bands[0].RadianceTemperature(alone[0])) - 0.01*pyro.SensitivityToRadiance(0.65*µm, bands[0].RadianceTemperature(alone[0]))
	if !ok || low >= T || math.Abs(float64(low)-want) > 1e-6 {
		t.Errorf("lower bound %v, %v; want %.4f K", low, ok, want)
	}
	if _, ok := pyro.LowerBound(bands, alone, std, 2, false); ok {
		t.Error("a bound although something may shine in")
	}
	// Hot walls break it: the bound lies above the true temperature.
	if low, _ := pyro.LowerBound(bands, walls, std, 2, true); low <= T {
		t.Errorf("walls at 1500 K leave the bound at %v, below the true %d K", low, T)
	}
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
