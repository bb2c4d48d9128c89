package pyro_test

import (
	"fmt"
	"testing"

	"candent/pyro"
)

func TestScales(t *testing.T) {
	if got := pyro.Celsius(1084.62); got != 1357.77 {
		t.Errorf("Celsius(1084.62) = %v, want 1357.77 K (the copper point of ITS-90)", got)
	}
	near(t, "1084.62 °C in °F", pyro.Celsius(1084.62).Fahrenheit(), 1984.316, 1e-15)
	near(t, "212 °F in °C", pyro.Fahrenheit(212).Celsius(), 100, 1e-15)
	near(t, "2000 cm⁻¹ in µm", pyro.Wavenumber(2000).Micrometres(), 5, 1e-15)
	near(t, "5 µm in cm⁻¹", (5 * pyro.Micrometre).Wavenumber(), 2000, 1e-15)
}

func TestEveryVerbPrintsTheUnit(t *testing.T) {
	for _, r := range []struct{ format, want string }{
		{"%v", "1357.77 K"}, {"%s", "1357.77 K"}, {"%.1f", "1357.8 K"}, {"%9.1f", "   1357.8 K"}, {"%d", "1357.77 K"},
		{"%-12v|", "1357.77 K   |"}, {"%12v", "   1357.77 K"},
	} {
		if got := fmt.Sprintf(r.format, 1357.77*pyro.Kelvin); got != r.want {
			t.Errorf("Sprintf(%q) = %q, want %q", r.format, got, r.want)
		}
	}
	if got := fmt.Sprint(850 * pyro.Nanometre); got != "0.85 µm" {
		t.Errorf("850 nm prints as %q", got)
	}
}

func ExampleRadianceTemperature() {
	// A surface of emissivity 0.80 at 1273.15 K seen at 0.9 µm by an instrument set to 1.
	l := 0.80 * pyro.Radiance(900*pyro.Nanometre, 1273.15*pyro.Kelvin)
	fmt.Printf("%.4f\n", pyro.RadianceTemperature(900*pyro.Nanometre, l))
	// Output: 1250.9199 K
}
