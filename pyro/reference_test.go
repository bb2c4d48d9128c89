package pyro_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"candent/pyro"
)

func TestEmissivityAtReproducesObservers(t *testing.T) {
	// Burgess & Waltenberg, The emissivity of metals and oxides, Bull. Bur. Stand. 11
	// (1915) 591, Tables 3–6: radiance temperature and true temperature, °C, at 0.650 µm, and
	// the emissivity from the two recomputed with their Wien constant 14450 µm K. With
	// today's c₂ the same pair of temperatures gives ε^(c₂/14450): Wien's law is right
	// to 1e-5 here, and the printed ε carries three to four digits.
	line, err := pyro.Line(0.65 * µm)
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range []struct {
		name          string
		radiance, tru float64
		ε             float64
	}{
		{"Fe 103 liquid", 1400, 1538, .3633}, {"Fe 682 solid", 982, 1055, .3777},
		{"Ni 94 liquid", 1340, 1461, .3822}, {"Ni 442 solid", 1017, 1098, .3613}, {"Au 440 solid", 940, 1080, .1501},
	} {
		const zero = 273 // their zero of Celsius, K
		got, _, err := line.EmissivityAt(pyro.Temperature(r.tru+zero), 0, line.Radiance(pyro.Temperature(r.radiance+zero)), 0)
		if err != nil {
			t.Fatal(err)
		}
		want := math.Pow(r.ε, pyro.C2/0.014450)
		near(t, r.name, got, want, 0.5e-4/r.ε+3e-5)
	}
}

func TestEmissivityAtUncertaintyAgainstMonteCarlo(t *testing.T) {
	band, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	T, s := pyro.Temperature(1400), 0.8*band.Radiance(1400)
	ε, u, err := band.EmissivityAt(T, 2, s, 0.005*s)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "ε", ε, 0.8, 1e-14)
	const n = 40000
	rng := rand.New(rand.NewPCG(1, 2))
	sum, sum2 := 0.0, 0.0
	for range n {
		e, _, err := band.EmissivityAt(T+pyro.Temperature(2*rng.NormFloat64()), 0, s*(1+0.005*rng.NormFloat64()), 0)
		if err != nil {
			t.Fatal(err)
		}
		sum += e - ε
		sum2 += (e - ε) * (e - ε)
	}
	got := math.Sqrt(sum2/n - sum*sum/n/n)
	// Three standard errors of a standard deviation, 1/√(2n), and the second order of n·u(T)/T = 2 %.
	near(t, "u(ε)", u, got, 3/math.Sqrt(2*n)+1e-3)
}

func TestEmissivityRatioAtUndoesTemperature(t *testing.T) {
	p := linePair(t, 0.75, 0.9, 900, 2800)
	ratio := 0.985 * p.Ratio(1500)
	e, u, err := p.EmissivityRatioAt(1500, 3, ratio, 0.002)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "emissivity ratio", e, 0.985, 1e-14)
	// The same uncertainties read backwards: u(e)/e is what makes u(T) from e alone equal to both together.
	near(t, "u", p.Uncertainty(1500, 0, u/e), math.Hypot(3, p.Uncertainty(1500, 0.002, 0)), 1e-12)
}

func TestReferencesInCelsiusAreQuestioned(t *testing.T) {
	line, err := pyro.Line(0.65 * µm)
	if err != nil {
		t.Fatal(err)
	}
	for _, bad := range []pyro.Temperature{25, -10, 9000, pyro.Temperature(math.NaN())} {
		if _, _, err := line.EmissivityAt(bad, 1, 1, 0); err == nil {
			t.Errorf("reference %v accepted", bad)
		}
	}
	if _, _, err := line.EmissivityAt(1500, -1, 1, 0); err == nil {
		t.Error("negative uncertainty accepted")
	}
	if _, _, err := line.EmissivityAt(1500, 1, math.NaN(), 0); err == nil {
		t.Error("NaN reading accepted")
	}
}

func ExampleBand_EmissivityAt() {
	// A thermocouple in the load says 1250 ± 3 °C; the band reads what a blackbody at 1228.4 °C gives.
	band, err := pyro.FlatTop(950*pyro.Nanometre, 1050*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	reading := band.Radiance(pyro.Celsius(1228.4))
	ε, u, err := band.EmissivityAt(pyro.Celsius(1250), 3, reading, 0.005*reading)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("emissivity %.3f, standard uncertainty %.3f\n", ε, u)
	// Output:
	// emissivity 0.873, standard uncertainty 0.017
}
