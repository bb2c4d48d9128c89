package pyro_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

const µm = pyro.Micrometre

func TestFlatTopAgainstFortyDigits(t *testing.T) {
	// ∫L dλ over rectangular bands, W m⁻² sr⁻¹, 40-digit arithmetic, twelve digits printed.
	for _, r := range []struct {
		lo, hi pyro.Wavelength
		t, s   float64
	}{
		{0.85 * µm, 0.95 * µm, 800, 0.0464531086487}, {0.85 * µm, 0.95 * µm, 1000, 2.41199482048},
		{0.85 * µm, 0.95 * µm, 1357.77, 157.533436749},
		{3.4 * µm, 4.4 * µm, 273.15, 0.204404743354}, {3.4 * µm, 4.4 * µm, 933.473, 2572.75059942},
		{8 * µm, 14 * µm, 253.15, 23.8246849891}, {8 * µm, 14 * µm, 773.15, 1136.11548504},
	} {
		b, err := pyro.FlatTop(r.lo, r.hi)
		if err != nil {
			t.Fatal(err)
		}
		T := pyro.Temperature(r.t)
		near(t, fmt.Sprintf("S(%v to %v, %v)", r.lo, r.hi, T), b.Radiance(T)*float64(r.hi-r.lo), r.s, 6e-12)
		near(t, "its inverse", b.RadianceTemperature(r.s/float64(r.hi-r.lo)).Kelvin(), r.t, 6e-12)
	}
}

// bands returns one band of each kind.
func bands(t *testing.T) map[string]*pyro.Band {
	t.Helper()
	all := map[string]*pyro.Band{}
	add := func(name string, b *pyro.Band, err error) {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		all[name] = b
	}
	b, err := pyro.Line(0.65 * µm)
	add("line", b, err)
	b, err = pyro.FlatTop(0.7*µm, 1.1*µm)
	add("flat top", b, err)
	b, err = pyro.Gaussian(0.9*µm, 0.02*µm, 0.03*µm)
	add("Gaussian", b, err)
	table := []pyro.Wavelength{0.8 * µm, 0.9 * µm, 1.0 * µm, 1.1 * µm}
	b, err = pyro.Tabulated(table, []float64{0, 0.6, 1, 0}, pyro.PerWatt)
	add("table per watt", b, err)
	b, err = pyro.Tabulated(table, []float64{0, 0.6, 1, 0}, pyro.PerPhoton)
	add("table per photon", b, err)
	return all
}

func TestBandsAgainstFineSimpson(t *testing.T) {
	// An independent quadrature: Simpson's rule over pieces on which R is smooth, so
	// fine that its own remainder is below 1e-12.
	triangle := func(l float64) float64 {
		switch {
		case l < 0.9:
			return 0.6 * (l - 0.8) / 0.1
		case l < 1.0:
			return 0.6 + 0.4*(l-0.9)/0.1
		}
		return (1.1 - l) / 0.1
	}
	s := 0.02 / (2 * math.Sqrt(2*math.Ln2))
	for name, r := range map[string]struct {
		at     func(um float64) float64
		pieces []float64
	}{
		"flat top":         {func(float64) float64 { return 1 }, []float64{0.7, 1.1}},
		"Gaussian":         {func(l float64) float64 { z := (l - 0.9) / s; return math.Exp(-z * z / 2) }, []float64{0.87, 0.93}},
		"table per watt":   {triangle, []float64{0.8, 0.9, 1.0, 1.1}},
		"table per photon": {func(l float64) float64 { return l * triangle(l) }, []float64{0.8, 0.9, 1.0, 1.1}},
	} {
		b := bands(t)[name]
		for _, T := range []pyro.Temperature{200, 300, 1000, 3000, 6000} {
			signal, norm := 0.0, 0.0
			for i := 1; i < len(r.pieces); i++ {
				const n = 20000
				h := (r.pieces[i] - r.pieces[i-1]) / n
				for k := 0; k <= n; k++ {
					w := 2 * float64(1+k%2)
					if k == 0 || k == n {
						w = 1
					}
					l := r.pieces[i-1] + h*float64(k)
					signal += w * h * r.at(l) * pyro.Radiance(pyro.Wavelength(l)*µm, T)
					norm += w * h * r.at(l)
				}
			}
			near(t, fmt.Sprintf("%s at %v", name, T), b.Radiance(T), signal/norm, 1e-10)
		}
	}
}

func TestBandInverseSlopeAndEffectiveWavelength(t *testing.T) {
	for name, b := range bands(t) {
		lo, hi := b.Edges()
		for _, T := range []pyro.Temperature{200, 300, 1000, 3000, 6000} {
			near(t, fmt.Sprintf("%s: inverse at %v", name, T), float64(b.RadianceTemperature(b.Radiance(T))), float64(T), 1e-14)
			h := 1e-4 * T // truncation n²·1e-8/6, below 2e-5 for n ≤ 110
			diff := (b.Radiance(T+h) - b.Radiance(T-h)) / (2 * float64(h))
			near(t, fmt.Sprintf("%s: slope at %v", name, T), b.RadianceSlope(T), diff, 5e-5)
			λ := b.EffectiveWavelength(T)
			near(t, fmt.Sprintf("%s: slope at the effective wavelength, %v", name, T), pyro.LogSlope(λ, T), b.LogSlope(T), 1e-12)
			if λ < lo || λ > hi {
				t.Errorf("%s at %v: effective wavelength %v outside the band %v to %v", name, T, λ, lo, hi)
			}
		}
	}
}

func TestBandTooColdForAnyRadiance(t *testing.T) {
	for name, b := range bands(t) {
		for _, T := range []pyro.Temperature{0, 1e-3} {
			_, hi := b.Edges()
			if s, slope := b.Radiance(T), b.RadianceSlope(T); s != 0 || slope != 0 {
				t.Errorf("%s at %v: radiance %g, slope %g", name, T, s, slope)
			}
			if n := b.LogSlope(T); n != pyro.LogSlope(hi, T) {
				t.Errorf("%s at %v: n = %g", name, T, n)
			}
		}
	}
}

func TestEffectiveWavelengthBetweenTwoTemperatures(t *testing.T) {
	for name, b := range bands(t) {
		for _, T := range []pyro.Temperature{700, 1400, 3000} {
			λ := b.EffectiveWavelengthBetween(T, 1.5*T)
			near(t, name+": ratio of radiances", pyro.Radiance(λ, 1.5*T)/pyro.Radiance(λ, T), b.Radiance(1.5*T)/b.Radiance(T), 1e-12)
			// It lies between the limiting ones, and tends to them.
			a, z := b.EffectiveWavelength(T), b.EffectiveWavelength(1.5*T)
			if λ < min(a, z)*(1-1e-12) || λ > max(a, z)*(1+1e-12) {
				t.Errorf("%s: %v is not between %v and %v", name, λ, a, z)
			}
			near(t, name+": swapped", float64(b.EffectiveWavelengthBetween(1.5*T, T)), float64(λ), 1e-12)
			// The switch to the limit at 1e-6 makes no step beyond the stated error.
			middle := float64(b.EffectiveWavelength(T * (1 + 1e-6)))
			near(t, name+": above the switch", float64(b.EffectiveWavelengthBetween(T, T*(1+2e-6))), middle, 1e-9)
			near(t, name+": below the switch", float64(b.EffectiveWavelengthBetween(T, T*(1+0.9e-6))), float64(b.EffectiveWavelength(T*(1+0.45e-6))), 1e-9)
			near(t, name+": its limit", float64(b.EffectiveWavelengthBetween(T, T)), float64(a), 1e-15)
		}
	}
}

func TestOpenTableIsRefusedWhereItsEndMatters(t *testing.T) {
	b, err := pyro.Tabulated([]pyro.Wavelength{0.7 * µm, 0.9 * µm, 1.0 * µm}, []float64{0.2, 1, 0.01}, pyro.PerWatt)
	if err != nil {
		t.Fatal(err)
	}
	if err := b.Check(1000); !errors.Is(err, pyro.ErrBand) {
		t.Errorf("1000 K, most of whose light lies beyond 1 µm: error %v", err)
	}
	for name, b := range bands(t) {
		if err := b.Check(300); err != nil {
			t.Errorf("%s ends by definition, yet: %v", name, err)
		}
	}
}

func TestBandsRefuseNonsense(t *testing.T) {
	bad := func(name string, _ *pyro.Band, err error) {
		t.Helper()
		if !errors.Is(err, pyro.ErrBand) {
			t.Errorf("%s: error %v", name, err)
		}
	}
	nan := pyro.Wavelength(math.NaN())
	b, err := pyro.Line(0)
	bad("zero wavelength", b, err)
	b, err = pyro.Line(850)
	bad("nanometres taken for metres", b, err)
	b, err = pyro.Line(nan)
	bad("NaN", b, err)
	b, err = pyro.FlatTop(1*µm, 0.9*µm)
	bad("swapped edges", b, err)
	b, err = pyro.Gaussian(0.9*µm, 0, 0.1*µm)
	bad("no width", b, err)
	b, err = pyro.Gaussian(0.9*µm, 0.01*µm, 1*µm)
	bad("cut-off below zero wavelength", b, err)
	b, err = pyro.Tabulated([]pyro.Wavelength{1 * µm, 0.9 * µm}, []float64{1, 1}, pyro.PerWatt)
	bad("falling table", b, err)
	b, err = pyro.Tabulated([]pyro.Wavelength{0.9 * µm, 1 * µm}, []float64{1, -1}, pyro.PerWatt)
	bad("negative responsivity", b, err)
	b, err = pyro.Tabulated([]pyro.Wavelength{0.9 * µm, 1 * µm}, []float64{0, 0}, pyro.PerWatt)
	bad("no responsivity", b, err)
}
