package pyro_test

import (
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

// Spectral radiance of a blackbody in W m⁻² sr⁻¹ µm⁻¹, from the defining formula
// in 50-digit arithmetic, printed to 12 digits.
var radianceTable = []struct {
	t, um, want float64
}{
	{300, 0.65, 9.28163123835e-24}, {300, 0.9, 1.45216651222e-15}, {300, 3.9, 0.602536908853},
	{300, 10, 9.92403333007}, {300, 12, 8.96137230553},
	{500, 0.65, 6.09703720237e-11}, {500, 1.55, 0.115252781037}, {500, 5, 121.071905904},
	{1000, 0.65, 0.250172602496}, {1000, 2.2, 3343.50220128}, {1000, 10, 370.402561372},
	{1234.93, 0.65, 16.8661466853}, {1234.93, 1.55, 7246.07140366},
	{1337.33, 0.65, 66.5375660684}, {1337.33, 0.9, 1297.69365313},
	{1357.77, 0.65, 85.3650665412}, {1357.77, 12, 337.491635463},
	{2000, 0.65, 16025.3298361}, {2000, 2.2, 91310.9003068},
	{3000, 0.65, 641591.164087}, {3000, 0.9, 983006.599066}, {3000, 12, 974.223474531},
}

const printed12 = 5e-12 // half a unit in the twelfth digit, at worst

func TestRadianceAgainstFiftyDigits(t *testing.T) {
	for _, r := range radianceTable {
		got := pyro.Radiance(pyro.Wavelength(r.um)*pyro.Micrometre, pyro.Temperature(r.t)) * 1e-6
		near(t, fmt.Sprintf("L(%g µm, %g K)", r.um, r.t), got, r.want, printed12)
	}
}

func TestRadianceTemperatureInverts(t *testing.T) {
	for _, r := range radianceTable {
		λ := pyro.Wavelength(r.um) * pyro.Micrometre
		got := pyro.RadianceTemperature(λ, r.want*1e6)
		near(t, fmt.Sprintf("T(%g µm, %g K)", r.um, r.t), got.Kelvin(), r.t, printed12)
	}
	if got := pyro.RadianceTemperature(pyro.Micrometre, 0); got != 0 {
		t.Errorf("radiance temperature of no radiance = %v, want 0 K", got)
	}
	if got := pyro.RadianceTemperature(pyro.Micrometre, -1); !math.IsNaN(float64(got)) {
		t.Errorf("radiance temperature of a negative radiance = %v, want NaN", got)
	}
}

func TestLogSlope(t *testing.T) {
	// n = x/(1 − e⁻ˣ), from the formula, printed to four decimals.
	for _, r := range []struct{ t, um, want float64 }{
		{300, 0.65, 73.7834}, {300, 1, 47.9592}, {300, 10, 4.8359}, {1000, 1, 14.3878}, {1000, 10, 1.8862}, {3000, 1, 4.8359},
	} {
		got := pyro.LogSlope(pyro.Wavelength(r.um)*pyro.Micrometre, pyro.Temperature(r.t))
		if math.Abs(got-r.want) > 0.5e-4 {
			t.Errorf("n(%g µm, %g K) = %.6f, want %.4f", r.um, r.t, got, r.want)
		}
	}
}

func TestRadianceSlopeIsTheDerivative(t *testing.T) {
	// Central difference over ± h = 1e-4 T: its own error is (n³/6)·1e-8 relative,
	// below 1e-4 for the largest n here (74).
	for _, r := range radianceTable {
		λ, T := pyro.Wavelength(r.um)*pyro.Micrometre, pyro.Temperature(r.t)
		h := 1e-4 * T
		diff := (pyro.Radiance(λ, T+h) - pyro.Radiance(λ, T-h)) / (2 * float64(h))
		near(t, fmt.Sprintf("∂L/∂T(%g µm, %g K)", r.um, r.t), pyro.RadianceSlope(λ, T), diff, 1e-4)
	}
}
