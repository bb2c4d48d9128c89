package fit_test

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
)

func logEvidence(t *testing.T, bands []*pyro.Band, a fit.Assume, r fit.Readings) float64 {
	t.Helper()
	e, err := fit.New(bands, a)
	if err != nil {
		t.Fatal(err)
	}
	v, err := e.LogEvidence(r)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// drawReadings returns readings of a truth at T with relative noise, and their standard uncertainties.
func drawReadings(rng *rand.Rand, bands []*pyro.Band, ε func(pyro.Wavelength) float64, T pyro.Temperature, rel float64) fit.Readings {
	r := fit.Readings{Signal: make([]float64, len(bands)), Std: make([]float64, len(bands))}
	for i, b := range bands {
		m := ε(b.Mean()) * b.Radiance(T)
		r.Std[i] = rel * m
		r.Signal[i] = m + r.Std[i]*rng.NormFloat64()
	}
	return r
}

func normalLog(r []float64, cov *mat.SymDense) float64 {
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		return math.NaN()
	}
	x, y := mat.NewVecDense(len(r), nil), mat.NewVecDense(len(r), append([]float64(nil), r...))
	if chol.SolveVecTo(x, y) != nil {
		return math.NaN()
	}
	return -(mat.Dot(x, y) + chol.LogDet() + float64(len(r))*math.Log(2*math.Pi)) / 2
}

// greyLog is ln N(s; ε₀S, diag σ² + u²SSᵀ), what a grey prior ε₀ ± u predicts at T.
func greyLog(bands []*pyro.Band, r fit.Readings, ε, u float64, T pyro.Temperature) float64 {
	n := len(bands)
	d, cov := make([]float64, n), mat.NewSymDense(n, nil)
	scale := r.Signal[0] // so that the determinant is one of ordinary numbers
	for i, b := range bands {
		d[i] = (r.Signal[i] - ε*b.Radiance(T)) / scale
		for j := range i + 1 {
			v := u * u * b.Radiance(T) * bands[j].Radiance(T) / (scale * scale)
			if i == j {
				v += r.Std[i] * r.Std[i] / (scale * scale)
			}
			cov.SetSym(i, j, v)
		}
	}
	return normalLog(d, cov) - float64(n)*math.Log(scale)
}

// TestGreyEvidenceIsExact: two grey priors at a known temperature are linear and Gaussian, and
// the evidence and the Bayes factor have a closed form, to 1e-6; so has a family of two
// parameters, known through emissivities at two wavelengths. Priors stand clear of 0 and 1 by
// eight standard deviations.
func TestGreyEvidenceIsExact(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 3))
	bands := lines(t, 0.7, 1.5, 9)
	const T = 1400
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, T, 0.01)
	known := fit.TemperaturePrior{Value: T}
	var got, want [2]float64
	for i, p := range [2][2]float64{{0.5, 0.05}, {0.4, 0.04}} {
		got[i] = logEvidence(t, bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", p[0], p[1]), Temperature: known}, r)
		want[i] = greyLog(bands, r, p[0], p[1], T)
		if math.Abs(got[i]-want[i]) > 1e-6 {
			t.Errorf("ln evidence %.9g, want %.9g", got[i], want[i])
		}
	}
	if d := got[0] - got[1] - (want[0] - want[1]); math.Abs(d) > 1e-6 {
		t.Errorf("the Bayes factor is off by %.2g", d)
	}

	// A level 0.9 ± 0.1: a sixth of its mass is beyond 1; as a prior it is normalised by
	// P(ε ≤ 1), and the posterior, 0.47 ± 0.002, is all inside.
	high := logEvidence(t, bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.9, 0.1), Temperature: known}, r)
	below := math.Log(math.Erfc(-1/math.Sqrt2) / 2)
	if w := greyLog(bands, r, 0.9, 0.1, T) - below; math.Abs(high-w) > 1e-6 {
		t.Errorf("truncated: ln evidence %.9g, want %.9g", high, w)
	}

	// Linear ε through (0.8 µm, 0.5 ± 0.04) and (1.4 µm, 0.42 ± 0.03).
	family := emissivity.Polynomial(1).KnownAt(0.8*µm, 0.5, 0.04).KnownAt(1.4*µm, 0.42, 0.03)
	n := len(bands)
	d, cov := make([]float64, n), mat.NewSymDense(n, nil)
	scale := r.Signal[0]
	for i, b := range bands {
		xi := (b.Mean().Micrometres() - 0.8) / 0.6
		d[i] = (r.Signal[i] - (0.5*(1-xi)+0.42*xi)*b.Radiance(T)) / scale
		for j := range i + 1 {
			xj := (bands[j].Mean().Micrometres() - 0.8) / 0.6
			v := (0.04*0.04*(1-xi)*(1-xj) + 0.03*0.03*xi*xj) * b.Radiance(T) * bands[j].Radiance(T) / (scale * scale)
			if i == j {
				v += r.Std[i] * r.Std[i] / (scale * scale)
			}
			cov.SetSym(i, j, v)
		}
	}
	w := normalLog(d, cov) - float64(n)*math.Log(scale)
	if v := logEvidence(t, bands, fit.Assume{Emissivity: family, Temperature: known}, r); math.Abs(v-w) > 1e-6 {
		t.Errorf("linear: ln evidence %.9g, want %.9g", v, w)
	}
}

// TestEvidenceOverTemperature: with T free, the closed form in ε is integrated over T by a fine
// even rule, flat in T and with a known temperature; 1e-6.
func TestEvidenceOverTemperature(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 3))
	bands := lines(t, 0.7, 1.5, 9)
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.01)
	bounds := fit.Range{Min: 800, Max: 3000}
	for _, known := range []fit.TemperaturePrior{{}, {Value: 1405, StdK: 2}} {
		got := logEvidence(t, bands, fit.Assume{Emissivity: emissivity.Grey().WithPrior("level", 0.5, 0.05), Temperature: known, Range: bounds}, r)
		const lo, hi, steps = 1350.0, 1450.0, 4000
		sum, top := 0.0, greyLog(bands, r, 0.5, 0.05, 1400)
		for i := range steps {
			T := lo + (hi-lo)*(float64(i)+0.5)/steps
			p := 1 / float64(bounds.Max-bounds.Min)
			if known.StdK > 0 {
				z := (T - float64(known.Value)) / known.StdK
				p = math.Exp(-z*z/2) / (known.StdK * math.Sqrt(2*math.Pi))
			}
			sum += p * math.Exp(greyLog(bands, r, 0.5, 0.05, pyro.Temperature(T))-top) * (hi - lo) / steps
		}
		if want := top + math.Log(sum); math.Abs(got-want) > 1e-6 {
			t.Errorf("%v: ln evidence %.9g, want %.9g", known, got, want)
		}
	}
}

// TestProcessEvidence: that of a process against full covariances at each temperature of a fine
// even rule. Allowed is 0.02: the posterior's grid and the truncated ranks. And with no spread
// a process is a fixed emissivity: the family that fixes it has the same evidence, but for the
// logarithmic form at 0.1 % of noise, 1e-3 for each of nine channels.
func TestProcessEvidence(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 3))
	bands := lines(t, 0.7, 1.5, 9)
	n := len(bands)
	bounds := fit.Range{Min: 800, Max: 3000}
	r := drawReadings(rng, bands, func(λ pyro.Wavelength) float64 { return 0.47 - 0.1*(λ.Micrometres()-1.1) }, 1400, 0.01)
	process := emissivity.NewProcess("two", emissivity.Component{Weight: 3, Level: 0.4, Smooth: emissivity.Term{Std: 0.1, Length: 1}, Roughness: 0.01},
		emissivity.Component{Weight: 1, Level: 0.5, Spread: 0.05, Smooth: emissivity.Term{Std: 0.05, Length: 0.5}, Roughness: 0.02})
	shared := fit.SharedScale("calibration", 0.01, n)
	got := logEvidence(t, bands, fit.Assume{Emissivity: process, Range: bounds, Shared: []fit.Shared{shared}}, r)
	const lo, hi, steps = 1250.0, 1550.0, 3000
	sum, top := 0.0, 0.0
	for i := range steps {
		T := lo + (hi-lo)*(float64(i)+0.5)/steps
		for c, k := range process.Components() {
			d, cov := make([]float64, n), mat.NewSymDense(n, nil)
			v := math.Log(k.Weight)
			for a, b := range bands {
				d[a] = math.Log(r.Signal[a]/b.Radiance(pyro.Temperature(T))) - process.LogMean(c, b.Mean())
				v -= math.Log(r.Signal[a])
				for j := range a + 1 {
					f := process.Covariance(c, b.Mean(), bands[j].Mean()) + 0.01*0.01
					if a == j {
						u := r.Std[a] / r.Signal[a]
						f += k.Roughness*k.Roughness + u*u
					}
					cov.SetSym(a, j, f)
				}
			}
			if v += normalLog(d, cov); top == 0 {
				top = v
			}
			sum += math.Exp(v-top) * (hi - lo) / steps / float64(bounds.Max-bounds.Min)
		}
	}
	if want := top + math.Log(sum); math.Abs(got-want) > 0.02 {
		t.Errorf("ln evidence %.6g, want %.6g", got, want)
	}

	r = drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.001)
	a := logEvidence(t, bands, fit.Assume{Emissivity: emissivity.NewProcess("fixed", emissivity.Component{Weight: 1, Level: 0.47}), Range: bounds}, r)
	b := logEvidence(t, bands, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 0.47), Range: bounds}, r)
	if math.Abs(a-b) > 9e-3 {
		t.Errorf("ln evidence %.6g as a process, %.6g as a family", a, b)
	}
}

func TestNoEvidence(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 3))
	bands := lines(t, 0.7, 1.5, 9)
	r := drawReadings(rng, bands, func(pyro.Wavelength) float64 { return 0.47 }, 1400, 0.01)
	for name, s := range map[string]emissivity.Surface{
		"no prior":     emissivity.Grey(),
		"one of two":   emissivity.Polynomial(1).KnownAt(1*µm, 0.5, 0.1),
		"twice at one": emissivity.Polynomial(1).KnownAt(1*µm, 0.5, 0.1).KnownAt(1*µm, 0.5, 0.1),
		"relative":     emissivity.Unknown().Relative(),
	} {
		e, err := fit.New(bands, fit.Assume{Emissivity: s})
		if err != nil {
			t.Fatal(err)
		}
		if v, err := e.LogEvidence(r); !errors.Is(err, fit.ErrEvidence) {
			t.Errorf("%s: %v, %v", name, v, err)
		}
	}
}
