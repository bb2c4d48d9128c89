package pyro_test

import (
	"math"
	"testing"

	"candent/pyro"
)

// maxULP is the bound that Radiance and RadianceSlope state.
const maxULP = 8

// TestRadianceULP compares with 50-digit values over λT from 1e-5 to 10 m K
// (testdata/planck/radiance.csv, made by the script beside it).
func TestRadianceULP(t *testing.T) {
	rows := readCheckValues(t, "../testdata/planck/radiance.csv", 300)
	var worst [2]float64
	for _, v := range rows {
		λ, T := pyro.Wavelength(v[0]), pyro.Temperature(v[1])
		for i, got := range []float64{pyro.Radiance(λ, T), pyro.RadianceSlope(λ, T)} {
			want := v[2+i]
			off := math.Abs(got-want) / (math.Nextafter(want, math.Inf(1)) - want)
			worst[i] = math.Max(worst[i], off)
			if !(off <= maxULP) {
				t.Errorf("λ = %g m, T = %g K: got %.17g, want %.17g, %.1f ULP apart", v[0], v[1], got, want, off)
			}
		}
	}
	t.Logf("worst: radiance %.1f ULP, slope %.1f ULP over %d points", worst[0], worst[1], len(rows))
}

// TestRadianceTemperatureULP compares with 50-digit values over the same range
// (testdata/planck/inverse.csv, made by the script beside it).
func TestRadianceTemperatureULP(t *testing.T) {
	const maxULP = 4
	worst := 0.0
	for _, v := range readCheckValues(t, "../testdata/planck/inverse.csv", 300) {
		got := pyro.RadianceTemperature(pyro.Wavelength(v[0]), v[1]).Kelvin()
		off := math.Abs(got-v[2]) / (math.Nextafter(v[2], math.Inf(1)) - v[2])
		worst = math.Max(worst, off)
		if !(off <= maxULP) {
			t.Errorf("λ = %g m, L = %g: got %.17g K, want %.17g K, %.1f ULP apart", v[0], v[1], got, v[2], off)
		}
	}
	t.Logf("worst: %.1f ULP", worst)
}
