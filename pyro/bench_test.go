package pyro_test

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"candent/pyro"
)

var benchSink float64

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
	benchSink += y[7]
	return best
}

func BenchmarkPairTemperature(b *testing.B) {
	flat := func(lo, hi float64) *pyro.Band {
		band, err := pyro.FlatTop(pyro.Wavelength(lo)*µm, pyro.Wavelength(hi)*µm)
		if err != nil {
			b.Fatal(err)
		}
		return band
	}
	wide, err := pyro.NewPair(flat(0.7, 0.8), flat(0.85, 0.95), 900, 2800)
	if err != nil {
		b.Fatal(err)
	}
	for _, c := range []struct {
		name string
		pair *pyro.Pair
	}{{"bands=lines", linePair(b, 0.75, 0.9, 900, 2800)}, {"bands=wide", wide}} {
		b.Run(c.name, func(b *testing.B) {
			ratios := make([]float64, 64)
			for i := range ratios {
				ratios[i] = 0.985 * c.pair.Ratio(pyro.Temperature(950+1800*rand.Float64()))
			}
			for _, call := range []struct {
				name     string
				estimate func(ratio float64) (pyro.Temperature, float64, error)
			}{
				{"calls=one", func(ratio float64) (pyro.Temperature, float64, error) {
					return c.pair.Estimate(ratio, 0.985, 0.002, 0.01)
				}},
				{"calls=two", func(ratio float64) (pyro.Temperature, float64, error) {
					t, err := c.pair.Temperature(ratio, 0.985)
					return t, c.pair.Uncertainty(t, 0.002, 0.01), err
				}},
			} {
				b.Run(call.name, func(b *testing.B) {
					unit := expNanoseconds()
					b.ReportAllocs()
					i := 0
					for b.Loop() {
						t, u, err := call.estimate(ratios[i%64])
						if err != nil {
							b.Fatal(err)
						}
						benchSink += float64(t) + u
						i++
					}
					b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/unit, "x/exp")
				})
			}
		})
	}
}

// BenchmarkNewPair compiles; a pair is compiled once.
func BenchmarkNewPair(b *testing.B) {
	short, err := pyro.FlatTop(0.7*µm, 0.8*µm)
	if err != nil {
		b.Fatal(err)
	}
	long, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		p, err := pyro.NewPair(short, long, 900, 2800)
		if err != nil {
			b.Fatal(err)
		}
		benchSink += p.LogSlope(1500)
	}
}

func BenchmarkPlanck(b *testing.B) {
	for _, c := range []struct {
		name string
		f    func(pyro.Temperature) float64
	}{
		{"of=radiance", func(t pyro.Temperature) float64 { return pyro.Radiance(0.9*µm, t) }},
		{"of=temperature", func(t pyro.Temperature) float64 { return float64(pyro.RadianceTemperature(0.9*µm, 1e6*float64(t))) }},
	} {
		b.Run(c.name, func(b *testing.B) {
			unit := expNanoseconds()
			b.ReportAllocs()
			t := pyro.Temperature(900)
			for b.Loop() {
				benchSink += c.f(t)
				t += 1e-6
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/unit, "x/exp")
		})
	}
}

func BenchmarkBandRadianceTemperature(b *testing.B) {
	band, err := pyro.FlatTop(0.7*µm, 1.1*µm)
	if err != nil {
		b.Fatal(err)
	}
	s := band.Radiance(1500)
	unit := expNanoseconds()
	b.ReportAllocs()
	for b.Loop() {
		benchSink += float64(band.RadianceTemperature(s))
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/unit, "x/exp")
}
