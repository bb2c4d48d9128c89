package sightline_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
	"candent/pyro/sightline"
)

func input(name string, v float64) *pyro.Input { return &pyro.Input{Name: name, Value: v} }

// constant is a Spectrum of one value.
type constant float64

func (c constant) At(pyro.Wavelength) float64 { return float64(c) }

const µm = pyro.Micrometre

func TestLayers(t *testing.T) {
	for _, c := range []struct {
		name  string
		layer sightline.Layer
		τ, α  float64 // at 2 µm
	}{
		{"window", sightline.Window(input("τ", 0.92)), 0.92, 0},
		{"fouling", sightline.Fouling(input("τ", 0.8), input("slope", 1), 4*µm), 0.4, 0},
		{"cold gas", sightline.Gas(constant(0.5), input("length", 2), nil), math.Exp(-1), 0},
		{"hot gas", sightline.Gas(constant(0.5), input("length", 2), input("gas", 1500)), math.Exp(-1), 1 - math.Exp(-1)},
		// ε = 1 − exp(−KL/λ^α), λ in µm.
		{"soot", sightline.Soot(input("KL", 0.5), 0.95, input("flame", 1800)), math.Exp(-0.5 / math.Pow(2, 0.95)), 1 - math.Exp(-0.5/math.Pow(2, 0.95))},
		{"a pane that emits less than it doesn't transmit", sightline.Layer{Name: "pane", Transmittance: input("τ", 0.9), Emittance: input("α", 0.03), Temperature: input("pane", 600)}, 0.9, 0.03},
	} {
		if err := c.layer.Check(2 * µm); err != nil {
			t.Errorf("%s: %v", c.name, err)
		}
		τ, α := c.layer.At(2*µm, sightline.Nominal)
		if math.Abs(τ-c.τ) > 1e-15 || math.Abs(α-c.α) > 1e-15 {
			t.Errorf("%s: τ = %.17g, α = %.17g, want %.17g and %.17g", c.name, τ, α, c.τ, c.α)
		}
	}
}

func TestViewFactors(t *testing.T) {
	zone := func(name string, f float64) sightline.Zone {
		return sightline.Zone{Name: name, Factor: input("F", f), Temperature: input(name, 1300)}
	}
	last := sightline.Surroundings{Remainder: sightline.LastZone, Zones: []sightline.Zone{zone("roof", 0.3), {Name: "floor", Temperature: input("floor", 1100)}}}
	if f := last.Factor(1, sightline.Nominal); math.Abs(f-0.7) > 1e-15 || last.Check(1, µm) != nil {
		t.Errorf("the last zone has %g, %v", f, last.Check(1, µm))
	}
	itself := sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{zone("roof", 0.6)}}
	if f := itself.Self(sightline.Nominal); math.Abs(f-0.4) > 1e-15 || itself.Check(1, µm) != nil {
		t.Errorf("itself %g, %v", f, itself.Check(1, µm))
	}
	if e := sightline.Enclosure(input("wall", 1300)); e.Factor(0, sightline.Nominal) != 1 || e.Empty() || !(sightline.Surroundings{}).Empty() {
		t.Errorf("enclosure %v", e)
	}
	for name, s := range map[string]sightline.Surroundings{
		"two zones, one without a factor": {Zones: []sightline.Zone{zone("roof", 0.3), {Name: "floor", Temperature: input("floor", 1100)}}},
		"itself alone":                    {Remainder: sightline.Itself},
		"the last zone with a factor":     {Remainder: sightline.LastZone, Zones: []sightline.Zone{zone("roof", 0.3)}},
		"a reading for one of two bands":  {Zones: []sightline.Zone{{Name: "roof", Reading: []*pyro.Input{input("r", 1)}}}},
		"an emissivity of a reading":      {Zones: []sightline.Zone{{Name: "roof", Emissivity: constant(0.8), Reading: []*pyro.Input{input("r", 1), input("s", 1)}}}},
	} {
		if err := s.Check(2, µm); !errors.Is(err, sightline.ErrSightline) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestMeasuredTransmittance(t *testing.T) {
	τ, err := sightline.Measured(86, 0.4, 100, 0.5)
	if err != nil || τ.Value != 0.86 || math.Abs(τ.Std-0.86*math.Hypot(0.4/86, 0.5/100)) > 1e-15 {
		t.Errorf("%+v, %v", τ, err)
	}
	for _, c := range [][2]float64{{101, 100}, {0, 100}, {50, -1}, {math.NaN(), 1}} {
		if _, err := sightline.Measured(c[0], 1, c[1], 1); !errors.Is(err, sightline.ErrSightline) {
			t.Errorf("%v: %v", c, err)
		}
	}
}

// Bands for hot gas are those that its named stretches leave free.
func TestDisturbingGases(t *testing.T) {
	for _, c := range []struct {
		um        float64
		cold, hot bool
	}{{1.0, false, false}, {1.25, false, false}, {1.38, true, true}, {1.6, false, false}, {2.2, false, false}, {2.7, true, true}, {3.9, false, false}, {4.3, true, true}, {5.1, true, true}, {10, false, true}} {
		b, err := pyro.Line(pyro.Wavelength(c.um) * µm)
		if err != nil {
			t.Fatal(err)
		}
		if got := len(sightline.Disturbing(sightline.ColdAir, b)) > 0; got != c.cold {
			t.Errorf("%g µm in cold air: %v", c.um, got)
		}
		if got := len(sightline.Disturbing(sightline.HotGas, b)) > 0; got != c.hot {
			t.Errorf("%g µm in hot gas: %v", c.um, got)
		}
	}
}

// Which furnace gases a band from 3 to 5 µm meets.
func ExampleDisturbing() {
	band, err := pyro.FlatTop(3*pyro.Micrometre, 5*pyro.Micrometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, g := range sightline.Disturbing(sightline.HotGas, band) {
		fmt.Printf("%s %.4g to %.4g\n", g.Gas, g.Lo, g.Hi)
	}
	// Output:
	// H₂O 2.3 µm to 3.57 µm
	// CO₂ 2.63 µm to 3.28 µm
	// CO₂ 4.04 µm to 5.06 µm
	// H₂O 4.17 µm to 11.1 µm
}
