package pyro_test

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"testing"

	"candent/pyro"
)

func linePair(t testing.TB, short, long float64, lo, hi pyro.Temperature) *pyro.Pair {
	t.Helper()
	a, err := pyro.Line(pyro.Wavelength(short) * µm)
	if err != nil {
		t.Fatal(err)
	}
	b, err := pyro.Line(pyro.Wavelength(long) * µm)
	if err != nil {
		t.Fatal(err)
	}
	p, err := pyro.NewPair(a, b, lo, hi)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func TestPairIsExactWithoutNoise(t *testing.T) {
	wide, err := pyro.FlatTop(0.7*µm, 1.0*µm)
	if err != nil {
		t.Fatal(err)
	}
	overlapping, err := pyro.FlatTop(0.85*µm, 1.1*µm)
	if err != nil {
		t.Fatal(err)
	}
	colours, err := pyro.NewPair(wide, overlapping, 900, 2800)
	if err != nil {
		t.Fatal(err)
	}
	for name, p := range map[string]*pyro.Pair{"lines": linePair(t, 0.75, 0.9, 900, 2800), "overlapping": colours} {
		if !p.Monotonic() {
			t.Errorf("%s: not monotonic", name)
		}
		for T := pyro.Temperature(900); T <= 2800; T += 37.5 {
			got, err := p.Temperature(0.985*p.Ratio(T), 0.985)
			if err != nil {
				t.Fatalf("%s at %v: %v", name, T, err)
			}
			near(t, fmt.Sprintf("%s at %v", name, T), float64(got), float64(T), 1e-12)
			again, u, err := p.Estimate(0.985*p.Ratio(T), 0.985, 0.003, 0.004)
			if err != nil || again != got {
				t.Errorf("%s at %v: Estimate gives %v, %v", name, T, again, err)
			}
			near(t, fmt.Sprintf("%s at %v: u", name, T), u, p.Uncertainty(T, 0.005, 0), 1e-9)
		}
	}
}

func TestRatiosAtTheEndsOfTheRange(t *testing.T) {
	p := linePair(t, 0.75, 0.9, 900, 2800)
	for _, T := range []pyro.Temperature{900, 2800} {
		got, err := p.Temperature(p.Ratio(T), 1)
		if err != nil {
			t.Errorf("%v: %v", T, err)
		}
		near(t, "end of the range", float64(got), float64(T), 1e-12)
	}
	if lo, hi := p.Range(); math.Abs(float64(lo-900)) > 1e-9 || math.Abs(float64(hi-2800)) > 1e-9 {
		t.Errorf("range %v to %v", lo, hi)
	}
}

func TestPairAllocatesNothing(t *testing.T) {
	for name, p := range map[string]*pyro.Pair{"lines": linePair(t, 0.75, 0.9, 900, 2800), "turning": turningPair(t)} {
		ratio := p.Ratio(2790)
		if name == "turning" {
			ratio = p.Ratio(505) // above that of its hot end
		}
		if n := testing.AllocsPerRun(100, func() {
			T, _, err := p.Estimate(ratio, 1, 0.01, 0.01)
			again, err2 := p.Temperature(ratio, 1)
			if err != nil || err2 != nil || T != again || !(p.Uncertainty(T, 0.01, 0.01) > 0) {
				t.Fatal(name, T, again, err, err2)
			}
		}); n != 0 {
			t.Errorf("%s: %g allocations", name, n)
		}
	}
}

// turningPair has a ratio that turns round at 1705 K: two blocks of responsivity around a
// line. A wide band's light shifts past it.
func turningPair(t testing.TB) *pyro.Pair {
	t.Helper()
	ring, err := pyro.Tabulated(
		[]pyro.Wavelength{0.5 * µm, 0.501 * µm, 0.551 * µm, 0.552 * µm, 3.0 * µm, 3.001 * µm, 3.05 * µm, 3.051 * µm},
		[]float64{0, 1, 1, 0, 0, 0.05, 0.05, 0}, pyro.PerWatt)
	if err != nil {
		t.Fatal(err)
	}
	line, err := pyro.Line(1.6 * µm)
	if err != nil {
		t.Fatal(err)
	}
	if ring.Mean() >= line.Mean() {
		t.Fatal("the example needs the ring's mean below the line")
	}
	p, err := pyro.NewPair(ring, line, 500, 5500)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func TestBandsTooAlikeAreRefused(t *testing.T) {
	all := lines(t, 0.9, 0.9*(1+1e-12))
	if _, err := pyro.NewPair(all[0], all[1], 900, 2800); !errors.Is(err, pyro.ErrPair) {
		t.Errorf("bands a part in 1e12 apart: %v", err)
	}
	all = lines(t, 0.05, 12)
	if _, err := pyro.NewPair(all[0], all[1], 200, 2800); !errors.Is(err, pyro.ErrPair) || !strings.Contains(err.Error(), "raise the low end") {
		t.Errorf("no radiance at 0.05 µm, 200 K: %v", err)
	}
}

func TestUnreachableRatiosSayWhy(t *testing.T) {
	p := linePair(t, 0.75, 0.9, 900, 2800)
	if _, err := p.Temperature(1e-6, 1); !errors.Is(err, pyro.ErrRatioLow) {
		t.Errorf("tiny ratio: %v", err)
	}
	if _, err := p.Temperature(1.5, 1); !errors.Is(err, pyro.ErrRatioHigh) {
		t.Errorf("ratio of 4000 K or so: %v", err)
	}
	if _, err := p.Temperature(50, 1); !errors.Is(err, pyro.ErrRatioHigh) {
		t.Errorf("ratio beyond Rayleigh–Jeans: %v", err)
	}
	for _, bad := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := p.Temperature(bad, 1); !errors.Is(err, pyro.ErrPair) {
			t.Errorf("ratio %g: %v", bad, err)
		}
	}
	a, _ := pyro.Line(0.9 * µm)
	b, _ := pyro.Line(0.75 * µm)
	if _, err := pyro.NewPair(a, b, 900, 2800); !errors.Is(err, pyro.ErrPair) {
		t.Errorf("swapped bands: %v", err)
	}
}

func TestRatioWithTwoTemperaturesGivesBoth(t *testing.T) {
	p := turningPair(t)
	if p.Monotonic() {
		t.Fatal("the example needs a ratio that turns round")
	}
	branches := p.Branches()
	if len(branches) != 2 || branches[0].Lo != 500 || branches[1].Hi != 5500 || branches[0].Hi != branches[1].Lo {
		t.Fatalf("branches %v", branches)
	}
	for _, b := range branches {
		part, err := pyro.NewPair(p.Short(), p.Long(), b.Lo, b.Hi)
		if err != nil || !part.Monotonic() {
			t.Fatalf("branch %v: %v", b, err)
		}
		for _, T := range []pyro.Temperature{b.Lo, (b.Lo + b.Hi) / 2, b.Hi} {
			got, err := part.Temperature(p.Ratio(T), 1)
			// At a turn the ratio moves by the square of T: 1e-14 of it are 1e-6 of T.
			if err != nil || math.Abs(float64(got/T)-1) > 1e-6 {
				t.Errorf("branch %v at %v: %v, %v", b, T, got, err)
			}
		}
		near(t, "ratio at its low end", b.RatioLo, p.Ratio(b.Lo), 1e-12)
		near(t, "ratio at its high end", b.RatioHi, p.Ratio(b.Hi), 1e-12)
	}
	_, err := p.Temperature(p.Ratio(4500), 1)
	var two *pyro.AmbiguousRatio
	if !errors.As(err, &two) || len(two.Temperatures) != 2 {
		t.Fatalf("error %v", err)
	}
	near(t, "one of the two", float64(two.Temperatures[1]), 4500, 1e-12)
	near(t, "the other has the same ratio", p.Ratio(two.Temperatures[0]), p.Ratio(4500), 1e-12)
}

// TestPairAgainstQuadratureOverItsWholeRange: what the compiled table may miss of the direct
// quadrature is 1e-12 of T wherever the ratio says something; over the whole range of bands,
// where lines 1 % apart or far apart, wide, or wide apart read it.
func TestPairAgainstQuadratureOverItsWholeRange(t *testing.T) {
	const bound = 1e-12
	flat := func(lo, hi float64) *pyro.Band {
		b, err := pyro.FlatTop(pyro.Wavelength(lo)*µm, pyro.Wavelength(hi)*µm)
		if err != nil {
			t.Fatal(err)
		}
		return b
	}
	line := func(um float64) *pyro.Band {
		b, err := pyro.Line(pyro.Wavelength(um) * µm)
		if err != nil {
			t.Fatal(err)
		}
		return b
	}
	for name, r := range map[string]struct {
		short, long *pyro.Band
		lo, hi      pyro.Temperature
	}{
		"lines":               {line(0.75), line(0.9), 200, 6000},
		"close lines":         {line(0.9), line(0.91), 300, 4000},
		"lines far apart":     {line(0.5), line(12), 250, 6000},
		"infrared lines":      {line(8), line(12), 200, 6000},
		"wide":                {flat(0.7, 0.8), flat(0.85, 0.95), 200, 6000},
		"wide infrared":       {flat(3, 5), flat(8, 14), 200, 6000},
		"detectors in layers": {flat(0.7, 1.0), flat(1.0, 1.7), 300, 3500},
	} {
		p, err := pyro.NewPair(r.short, r.long, r.lo, r.hi)
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		worst := 0.0
		for k := range 401 {
			T := r.lo * pyro.Temperature(math.Pow(float64(r.hi/r.lo), float64(k)/400))
			T = min(T, r.hi)
			got, err := p.Temperature(p.Ratio(T), 1)
			if err != nil {
				t.Fatalf("%s at %v: %v", name, T, err)
			}
			worst = max(worst, math.Abs(float64(got/T)-1))
			near(t, fmt.Sprintf("%s: slope at %v", name, T), p.LogSlope(T), r.short.LogSlope(T)-r.long.LogSlope(T), 1e-9)
		}
		if t.Logf("%s: at most %.1e of T apart", name, worst); worst > bound {
			t.Errorf("%s: %.2g of T apart from the quadrature, allowed %.0e", name, worst, bound)
		}
	}
}

func ExamplePair_Temperature() {
	short, err := pyro.FlatTop(700*pyro.Nanometre, 800*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
	}
	long, err := pyro.FlatTop(850*pyro.Nanometre, 950*pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
	}
	pair, err := pyro.NewPair(short, long, 1000*pyro.Kelvin, 2800*pyro.Kelvin)
	if err != nil {
		fmt.Println(err)
	}
	t, err := pair.Temperature(0.1620, 0.985) // reading ratio, emissivity ratio
	if err != nil {
		fmt.Println(err)
	}
	u := pair.Uncertainty(t, 0.002, 0.010) // relative standard uncertainties of the two
	fmt.Printf("%.1f, standard uncertainty %.1f K if the emissivity ratio is 0.985 ± 0.010\n", t, u)
	_, err = pair.Temperature(9, 0.985)
	fmt.Println(err)
	// Output:
	// 1156.5 K, standard uncertainty 4.5 K if the emissivity ratio is 0.985 ± 0.010
	// pyro: ratio above the pair's range: ratio 9 over emissivity ratio 0.985 lies above 0.7918, the most between 1000 K and 2800 K: it is above the Rayleigh–Jeans limit 2.074 of these wavelengths, which no temperature reaches: the long channel is saturated, or the channels are swapped
}
