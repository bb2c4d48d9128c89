package fit_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

var sink float64

// expNanoseconds times math.Exp as an independent-throughput loop in the same run: the
// unit in which the benchmarks state their cost.
func expNanoseconds() float64 {
	x, y := make([]float64, 100), make([]float64, 100)
	for i := range x {
		x[i] = -20 * rand.Float64()
	}
	best := math.Inf(1)
	for range 20 {
		const rounds = 500
		start := time.Now()
		for range rounds {
			for i := range x {
				y[i] = math.Exp(x[i])
			}
		}
		best = math.Min(best, float64(time.Since(start).Nanoseconds())/(rounds*100))
	}
	sink += y[7]
	return best
}

// inExp reports the benchmark's cost in math.Exp calls.
func inExp(b *testing.B, unit float64) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/unit, "x/exp")
}

// spectra returns noisy readings of a truth, T from 1000 K to 2500 K, 1 % of noise.
func spectra(bands []*pyro.Band, s truth, count int) []fit.Readings {
	rng := rand.New(rand.NewPCG(7, 11))
	all := make([]fit.Readings, count)
	for i := range all {
		y := s.signals(bands, 0.75*µm, pyro.Temperature(1000+1500*rng.Float64()))
		std := scaled(y, 0.01)
		for j := range y {
			y[j] += std[j] * rng.NormFloat64()
		}
		all[i] = fit.Readings{Signal: y, Std: std}
	}
	return all
}

func wide(t testing.TB, lo, hi float64, n int) []*pyro.Band {
	bands := make([]*pyro.Band, n)
	for i := range bands {
		um := lo + (hi-lo)*float64(i)/float64(n-1)
		b, err := pyro.FlatTop(pyro.Wavelength(um-0.005)*µm, pyro.Wavelength(um+0.005)*µm)
		if err != nil {
			t.Fatal(err)
		}
		bands[i] = b
	}
	return bands
}

func BenchmarkSpectrum(b *testing.B) {
	b.Run("channels=64/emissivity=unknown", benchmarkUnknown)
	for _, c := range []struct {
		channels int
		truth    truth
		wide     bool
	}{
		{8, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, false},
		{100, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, false},
		{500, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, false},
		{100, truth{"exponential", emissivity.Exponential(1), []float64{-0.7, -0.5}}, false},
		{100, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, true},
		{100, truth{"exponential", emissivity.Exponential(1), []float64{-0.7, -0.5}}, true},
	} {
		name := fmt.Sprintf("channels=%d/emissivity=%s", c.channels, c.truth.name)
		bands := lines(b, 0.5, 1, c.channels)
		if c.wide {
			name += "/bands=wide"
			bands = wide(b, 0.5, 1, c.channels)
		}
		for _, interval := range []bool{false, true} {
			name := name
			if interval {
				name += "/interval"
			}
			b.Run(name, func(b *testing.B) {
				e, err := fit.New(bands, fit.Assume{Emissivity: c.truth.family})
				if err != nil {
					b.Fatal(err)
				}
				readings := spectra(bands, c.truth, 64)
				w, r := e.NewWork(), e.NewResult()
				unit := expNanoseconds()
				b.ReportAllocs()
				i := 0
				for b.Loop() {
					if err := e.EstimateTo(r, w, readings[i%64]); err != nil {
						b.Fatal(err)
					}
					if interval {
						if err := e.IntervalTo(r, w, readings[i%64], 0.95); err != nil {
							b.Fatal(err)
						}
					}
					i++
				}
				inExp(b, unit)
			})
		}
	}
}

// benchmarkUnknown is a surface of unknown emissivity, median and 95 % interval.
func benchmarkUnknown(b *testing.B) {
	bands := lines(b, 0.55, 0.95, 64)
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Unknown()})
	if err != nil {
		b.Fatal(err)
	}
	readings := spectra(bands, truth{"linear", emissivity.Polynomial(1), []float64{0.5, -0.25}}, 64)
	w, r := e.NewWork(), e.NewResult()
	unit := expNanoseconds()
	b.ReportAllocs()
	i := 0
	for b.Loop() {
		if err := e.EstimateTo(r, w, readings[i%64]); err != nil {
			b.Fatal(err)
		}
		if err := e.IntervalTo(r, w, readings[i%64], 0.95); err != nil {
			b.Fatal(err)
		}
		i++
	}
	inExp(b, unit)
}
