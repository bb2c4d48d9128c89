package elementary

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestExpTo(t *testing.T) {
	const bound = 2.5 // ULP: 2 of ExpTo's own and half of math.Exp's
	rng := rand.New(rand.NewPCG(3, 5))
	x := []float64{0, 1, -1, 699.9, -699.9, 750, -800, math.Inf(-1), math.Inf(1), math.Ln2 / 128, -1e-300}
	for range 20000 {
		x = append(x, 1400*rng.Float64()-700, 2*rng.NormFloat64())
	}
	y := make([]float64, len(x))
	ExpTo(y, x)
	for i, v := range x {
		want := math.Exp(v)
		if y[i] == want {
			continue
		}
		ulp := math.Nextafter(want, math.Inf(1)) - want
		if !(math.Abs(y[i]-want) <= bound*ulp) {
			t.Fatalf("exp(%g) = %.17g, want %.17g", v, y[i], want)
		}
	}
	ExpTo(y[:1], []float64{math.NaN()})
	if !math.IsNaN(y[0]) {
		t.Errorf("exp(NaN) = %g", y[0])
	}
}

func TestLogTo(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 5))
	for range 20000 {
		x := []float64{math.Exp(1400*rng.Float64() - 700)}
		y := make([]float64, 1)
		LogTo(y, x)
		if !(math.Abs(y[0]-math.Log(x[0])) <= 1e-10) {
			t.Fatalf("ln(%g) = %.17g, want %.17g", x[0], y[0], math.Log(x[0]))
		}
	}
}

var expSink [100]float64

func BenchmarkExp(b *testing.B) {
	var x [100]float64
	for i := range x {
		x[i] = -20 * rand.Float64()
	}
	b.Run("math.Exp", func(b *testing.B) {
		for b.Loop() {
			for i, v := range x {
				expSink[i] = math.Exp(v)
			}
		}
	})
	b.Run("ExpTo", func(b *testing.B) {
		for b.Loop() {
			ExpTo(expSink[:], x[:])
		}
	})
}
