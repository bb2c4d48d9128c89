package fit_test

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

// misfits draws relative misfits: std times a Matérn process of the length in ln λ.
func misfits(t testing.TB, bands []*pyro.Band, std, length float64) func(rng *rand.Rand) []float64 {
	t.Helper()
	n := len(bands)
	p := emissivity.NewProcess("misfit", emissivity.Component{Weight: 1, Level: 1, Smooth: emissivity.Term{Std: std, Length: length}})
	cov := mat.NewSymDense(n, nil)
	for i := range n {
		for j := range i + 1 {
			cov.SetSym(i, j, p.Covariance(0, bands[i].Mean(), bands[j].Mean()))
		}
		cov.SetSym(i, i, cov.At(i, i)*(1+1e-12))
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("not positive definite")
	}
	var lower mat.TriDense
	chol.LTo(&lower)
	return func(rng *rand.Rand) []float64 {
		z, f := mat.NewVecDense(n, nil), mat.NewVecDense(n, nil)
		for i := range n {
			z.SetVec(i, rng.NormFloat64())
		}
		f.MulVec(&lower, z)
		return f.RawVector().Data
	}
}

// TestDiscrepancyHolds: readings of a grey and a linear surface of ε = 0.4 with a smooth misfit.
// Where it is large beside the noise (5 % and 0.1 %) all draws contradict the family, and the
// interval with the discrepancy holds the truth in 95 % within three binomial standard errors,
// the plain one hardly ever; a draw whose misfit looks white by chance, so that none is carried,
// counts with its plain interval. Where it is small (2 % and 0.3 %) those draws alone are contradicted
// that differ most from the family, so that of these more are held: no fewer than that. What the
// draws that aren't contradicted do is logged: nothing in the readings tells of their misfit.
func TestDiscrepancyHolds(t *testing.T) {
	count := 600
	if testing.Short() {
		count = 200
	}
	rng := rand.New(rand.NewPCG(21, 3))
	for _, k := range []struct {
		misfit, noise float64
		atLeast       bool
	}{{0.05, 0.001, false}, {0.02, 0.003, true}} {
		for _, n := range []int{16, 40} {
			bands := lines(t, 0.55, 1.6, n)
			draw := misfits(t, bands, k.misfit, 0.5)
			for _, family := range []emissivity.Family{emissivity.Grey(), emissivity.Polynomial(1)} {
				e, err := fit.New(bands, fit.Assume{Emissivity: family, Range: fit.Range{Min: 500, Max: 4000}})
				if err != nil {
					t.Fatal(err)
				}
				plain, carried, found, contradicted, quiet := 0, 0, 0, 0, 0
				sizes := 0.0
				for range count {
					T := pyro.Temperature(1000 + 1000*rng.Float64())
					res, err := e.Estimate(misfitReadings(rng, bands, draw(rng), T, k.noise))
					if err != nil {
						t.Fatal(err)
					}
					iv, _ := res.Interval()
					inside := iv.Low <= T && T <= iv.High
					d, ok := res.Discrepancy()
					if !strings.Contains(res.Assumption(), "contradicted") {
						if ok {
							t.Fatalf("a discrepancy of %v", res)
						}
						if inside {
							quiet++
						}
						continue
					}
					contradicted++
					if inside {
						plain++
					}
					if !ok { // looked white by chance: the plain interval is what there is
						if inside {
							carried++
						}
						continue
					}
					found++
					sizes += math.Log(d.Std)
					if d.Interval.Low <= T && T <= d.Interval.High {
						carried++
					}
				}
				share, size := float64(carried)/float64(contradicted), math.Exp(sizes/float64(found))
				t.Logf("%v, %d channels, misfit %g: %d of %d contradicted, %d carried; plain %.1f %%, with the discrepancy %.1f %%, of mean size %.2g; of the others %.1f %% held",
					family, n, k.misfit, contradicted, count, found, 100*float64(plain)/float64(contradicted), 100*share, size, 100*float64(quiet)/float64(max(count-contradicted, 1)))
				off := (share - 0.95) / binomial(0.95, contradicted)
				if off < -3 || off > 3 && !k.atLeast {
					t.Errorf("%v, %d channels, misfit %g: %.1f %% with the discrepancy", family, n, k.misfit, 100*share)
				}
				if float64(plain)/float64(contradicted) > 0.5 || float64(found) < 0.9*float64(contradicted) {
					t.Errorf("%v, %d channels, misfit %g: the plain interval holds %d, a discrepancy is found for %d of %d", family, n, k.misfit, plain, found, contradicted)
				}
				if !(size > k.misfit/1.5 && size < 1.5*k.misfit) {
					t.Errorf("%v, %d channels: mean size %.3g of a misfit of %g", family, n, size, k.misfit)
				}
			}
		}
	}
}

func misfitReadings(rng *rand.Rand, bands []*pyro.Band, f []float64, T pyro.Temperature, noise float64) fit.Readings {
	r := fit.Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands))}
	for i, b := range bands {
		m := 0.4 * b.Radiance(T) * (1 + f[i])
		r.Std[i] = noise * m
		r.Signal[i] = m + r.Std[i]*rng.NormFloat64()
	}
	return r
}

// TestDiscrepancySaysWhatItIs: the words of a result with one; none where the misfit is white
// (noise stated a fifth of what it is), for processes, and at a bound the interval keeps to it.
func TestDiscrepancySaysWhatItIs(t *testing.T) {
	rng := rand.New(rand.NewPCG(22, 3))
	bands := lines(t, 0.55, 1.6, 16)
	estimate := func(s emissivity.Surface, r fit.Readings) *fit.Result {
		e, err := fit.New(bands, fit.Assume{Emissivity: s, Range: fit.Range{Min: 500, Max: 4000}})
		if err != nil {
			t.Fatal(err)
		}
		res, err := e.Estimate(r)
		if err != nil {
			t.Fatal(err)
		}
		return res
	}
	r := misfitReadings(rng, bands, misfits(t, bands, 0.05, 0.5)(rng), 1400, 0.002)
	res := estimate(emissivity.Grey(), r)
	d, ok := res.Discrepancy()
	if !ok || !strings.Contains(res.String(), "contradicted by the readings (with a smooth misfit of ") || !strings.Contains(strings.Join(res.Notes(), "\n"), "carried as uncertainty: ") {
		t.Fatalf("%v: %v", res, res.Notes())
	}
	if b, err := res.MarshalJSON(); err != nil || !strings.Contains(string(b), `"smooth_misfit":`) || !strings.Contains(string(b), `"smooth_misfit_interval_K":[`) {
		t.Errorf("%s, %v", b, err)
	}
	// The plain result stays as it is.
	iv, _ := res.Interval()
	if !(d.Interval.High-d.Interval.Low > 3*(iv.High-iv.Low)) || d.Interval.Probability != 0.95 || !(d.StdK > 0) {
		t.Errorf("%+v beside %+v", d, iv)
	}
	if _, ok := estimate(emissivity.Unknown(), r).Discrepancy(); ok {
		t.Error("a process has a discrepancy")
	}

	white := misfitReadings(rng, bands, make([]float64, 16), 1400, 0.01)
	for i := range white.Std {
		white.Std[i] /= 5
	}
	res = estimate(emissivity.Grey(), white)
	if _, ok := res.Discrepancy(); ok || !strings.Contains(strings.Join(res.Notes(), "\n"), "no smooth misfit is carried: n") {
		t.Errorf("white: %v", res.Notes())
	}

	// ε = 0.98 rising above 1 by its misfit: the grey fit hits the bound; with the discrepancy T
	// still can't be below the radiance temperature of the mean.
	f := make([]float64, 16)
	for i := range f {
		f[i] = 1.4 + 0.04*math.Sin(float64(i)/3) // of 0.4: ε up to 0.98
	}
	res = estimate(emissivity.Grey(), misfitReadings(rng, bands, f, 1400, 0.002))
	if d, ok := res.Discrepancy(); ok && !(d.Interval.Low > 1380 && d.Interval.High >= 1400) {
		t.Errorf("at the bound: %+v", d)
	} else if !ok {
		t.Errorf("at the bound: %v", res.Notes())
	}

	// The same noise as a covariance gives the same discrepancy.
	cov := make([]float64, 16*16)
	for i, u := range r.Std {
		cov[i*17] = u * u
	}
	e, err := fit.New(bands, fit.Assume{Emissivity: emissivity.Grey(), Range: fit.Range{Min: 500, Max: 4000}, Noise: fit.Covariance(cov)})
	if err != nil {
		t.Fatal(err)
	}
	other, err := e.Estimate(fit.Readings{Signal: r.Signal})
	if err != nil {
		t.Fatal(err)
	}
	o, ok := other.Discrepancy()
	if !ok || math.Abs(o.Std-d.Std) > 1e-6*d.Std || math.Abs(float64(o.Interval.Low-d.Interval.Low)) > 1e-4 || math.Abs(float64(o.Interval.High-d.Interval.High)) > 1e-4 {
		t.Errorf("as a covariance: %+v, want %+v", o, d)
	}
}
