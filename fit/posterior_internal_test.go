package fit

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/pyro"
)

func testLines(t testing.TB, lo, hi float64, n int) []*pyro.Band {
	t.Helper()
	bands := make([]*pyro.Band, n)
	for i := range bands {
		um := lo
		if n > 1 {
			um += (hi - lo) * float64(i) / float64(n-1)
		}
		b, err := pyro.Line(pyro.Wavelength(um) * pyro.Micrometre)
		if err != nil {
			t.Fatal(err)
		}
		bands[i] = b
	}
	return bands
}

// dense is the posterior by brute force: full covariances, Cholesky at every temperature of a
// fine even grid in T, no bases, panels or brackets. Of the library it shares orthant, which
// TestOrthant and TestPosteriorAgainstMonteCarlo check. It returns T at the shares asked for, the
// mean and the standard deviation.
func dense(t testing.TB, s emissivity.Process, bands []*pyro.Band, y, rel []float64, shared [][]float64, lo, hi float64, steps int, shares []float64) (q []float64, mean, std float64) {
	t.Helper()
	n := len(bands)
	type comp struct {
		chol     mat.Cholesky
		mean     *mat.VecDense
		gain     *mat.Dense // of the curve at all channels on y − µ
		post     []float64
		constant float64
	}
	var comps []*comp
	points := spreadOver(n, boundPoints)
	m := len(points)
	for c, k := range s.Components() {
		o := &comp{mean: mat.NewVecDense(n, nil)}
		curve, all := mat.NewSymDense(n, nil), mat.NewSymDense(n, nil)
		for i := range n {
			o.mean.SetVec(i, s.LogMean(c, bands[i].Mean()))
			for j := range i + 1 {
				v := s.Covariance(c, bands[i].Mean(), bands[j].Mean())
				curve.SetSym(i, j, v)
				if i == j {
					v += k.Roughness*k.Roughness + rel[i]*rel[i]
				}
				for _, r := range shared {
					v += r[i] * r[j]
				}
				all.SetSym(i, j, v)
			}
		}
		if !o.chol.Factorize(all) {
			t.Fatal("not positive definite")
		}
		var solved mat.Dense
		if err := o.chol.SolveTo(&solved, curve); err != nil {
			t.Fatal(err)
		}
		o.gain = mat.DenseCopyOf(solved.T())
		var less mat.Dense
		less.Mul(curve, &solved)
		pm, pc := make([]float64, m), make([]float64, m*m)
		o.post = make([]float64, m*m)
		for a, i := range points {
			pm[a] = o.mean.AtVec(i)
			for b, j := range points {
				pc[a*m+b] = curve.At(i, j)
				o.post[a*m+b] = curve.At(i, j) - less.At(i, j)
			}
		}
		o.constant = math.Log(k.Weight) - o.chol.LogDet()/2 - math.Log(orthant(pm, pc, m))
		comps = append(comps, o)
	}
	logs := make([]float64, steps+1)
	z, x := mat.NewVecDense(n, nil), mat.NewVecDense(n, nil)
	var f mat.VecDense
	for i := range logs {
		T := lo + (hi-lo)*float64(i)/float64(steps)
		logs[i] = math.Inf(-1)
		for _, o := range comps {
			for j, b := range bands {
				z.SetVec(j, math.Log(y[j]/b.Radiance(pyro.Temperature(T)))-o.mean.AtVec(j))
			}
			if err := o.chol.SolveVecTo(x, z); err != nil {
				t.Fatal(err)
			}
			f.MulVec(o.gain, z)
			pm, pc := make([]float64, m), slices.Clone(o.post)
			for a, j := range points {
				pm[a] = o.mean.AtVec(j) + f.AtVec(j)
			}
			l := o.constant - mat.Dot(z, x)/2 + math.Log(orthant(pm, pc, m))
			most := max(logs[i], l)
			if !math.IsInf(most, -1) {
				logs[i] = most + math.Log(math.Exp(logs[i]-most)+math.Exp(l-most))
			}
		}
	}
	top := slices.Max(logs)
	total, sum, squares := 0.0, 0.0, 0.0
	cumulative := make([]float64, len(logs))
	for i := range logs {
		p := math.Exp(logs[i] - top)
		if i > 0 {
			cumulative[i] = cumulative[i-1] + (p+math.Exp(logs[i-1]-top))/2
		}
		T := lo + (hi-lo)*float64(i)/float64(steps)
		total, sum, squares = total+p, sum+p*T, squares+p*T*T
	}
	for _, share := range shares {
		want := share * cumulative[steps]
		i, _ := slices.BinarySearch(cumulative, want)
		u := (want - cumulative[i-1]) / (cumulative[i] - cumulative[i-1])
		q = append(q, lo+(hi-lo)*(float64(i-1)+u)/float64(steps))
	}
	mean = sum / total
	return q, mean, math.Sqrt(squares/total - mean*mean)
}

// TestPosteriorAgainstDense: quantiles, mean and standard deviation against brute force, for
// metals, dark surfaces, surfaces near ε = 1, a shared calibration error, several processes.
// Allowed is rankTolerance of the posterior's standard deviation: what truncating the rank may
// do. Where every basis is complete, denseTolerance.
func TestPosteriorAgainstDense(t *testing.T) {
	const rankTolerance, denseTolerance = 0.05, 0.002
	rng := rand.New(rand.NewPCG(1, 2))
	worst := 0.0
	for _, c := range []struct {
		name    string
		surface emissivity.Process
		lo, hi  float64
		n       int
		ε, by   float64 // level in the middle, d ln ε/d ln λ
		T, rel  float64
		shared  bool
	}{
		{"1 channel", emissivity.Unknown().AcceptWide(), 0.9, 0.9, 1, 0.4, 0, 1500, 0.005, false},
		{"2 channels", emissivity.Unknown().AcceptWide(), 0.75, 0.9, 2, 0.6, 0, 1500, 0.005, false},
		{"metal", emissivity.Unknown(), 0.7, 1.0, 8, 0.38, -0.5, 1700, 0.01, false},
		{"dark", emissivity.Unknown(), 0.7, 1.0, 8, 0.85, 0.1, 1300, 0.01, false},
		{"nearly black", emissivity.Unknown(), 0.7, 1.0, 8, 0.99, 0, 1300, 0.01, false},
		{"far infrared", emissivity.Unknown(), 8, 14, 7, 0.9, 0.3, 320, 0.01, false},
		{"metal, 64 channels", emissivity.Unknown(), 0.55, 0.95, 64, 0.38, -0.5, 2200, 0.005, false},
		{"dark, 64 channels", emissivity.Unknown(), 0.55, 0.95, 64, 0.9, 0.1, 1500, 0.005, false},
		{"metal, 16 channels, precise", emissivity.Unknown(), 0.55, 1.6, 16, 0.3, -0.7, 1900, 0.001, false},
		{"shared error", emissivity.Unknown(), 0.55, 1.6, 16, 0.45, -0.3, 1600, 0.005, true},
		{"kind", emissivity.BareTransitionMetal(), 0.9, 1.6, 32, 0.3, -0.6, 1600, 0.005, false},
		{"bright kind", emissivity.BrightMetal(), 0.9, 1.6, 12, 0.03, -1, 1200, 0.005, false},
	} {
		bands := testLines(t, c.lo, c.hi, c.n)
		y, rel := make([]float64, c.n), make([]float64, c.n)
		var rows [][]float64
		var inputs []Shared
		if c.shared {
			inputs = []Shared{SharedScale("scale", 0.02, c.n), {Name: "tilt", Relative: make([]float64, c.n)}}
			for j := range c.n {
				inputs[1].Relative[j] = 0.01 * (2*float64(j)/float64(c.n-1) - 1)
			}
			rows = [][]float64{inputs[0].Relative, inputs[1].Relative}
		}
		for j, b := range bands {
			x := math.Log(b.Mean().Micrometres() / ((c.lo + c.hi) / 2))
			rel[j] = c.rel
			y[j] = c.ε * math.Exp(c.by*x) * b.Radiance(pyro.Temperature(c.T)) * (1 + c.rel*rng.NormFloat64())
		}
		lo, hi := c.T*0.6, c.T*1.6
		e, err := New(bands, Assume{Emissivity: c.surface, Noise: Relative(c.rel), Range: Range{pyro.Temperature(lo), pyro.Temperature(hi)}, Shared: inputs})
		if err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		r, err := e.Estimate(Readings{Signal: y})
		if err != nil {
			t.Fatalf("%s: %v", c.name, err)
		}
		q, mean, std := dense(t, c.surface, bands, y, rel, rows, lo, hi, 8000, []float64{0.025, 0.5, 0.975})
		allowed := denseTolerance
		for _, g := range e.process.groups {
			if g.r < c.n {
				allowed = rankTolerance
			}
		}
		iv, _ := r.Interval()
		got := []float64{float64(iv.Low), r.posterior.median, float64(iv.High), r.posterior.mean, r.posterior.std}
		want := []float64{q[0], q[1], q[2], mean, std}
		for i := range got {
			off := math.Abs(got[i]-want[i]) / std
			worst = max(worst, off)
			if off > allowed {
				t.Errorf("%s: %s %.4f K, by brute force %.4f K: off by %.4f standard deviations of %.2f K", c.name, [...]string{"low end", "median", "high end", "mean", "std"}[i], got[i], want[i], off, std)
			}
		}
		ranks := ""
		for _, g := range e.process.groups {
			ranks += fmt.Sprintf(" %d", g.r)
		}
		t.Logf("%-28s ranks%s of %d; %.2f ± %.2f K; left out %.2g", c.name, ranks, c.n, mean, std, math.Sqrt(e.process.truncated))
	}
	t.Logf("largest deviation %.4f standard deviations", worst)
}

// TestPosteriorAgainstMonteCarlo: the whole chain for one to three channels against draws from
// the prior as its documentation words it: a component, a curve with ε ≤ 1, roughness, noise of
// ln s; then the T that the first reading asks for, weighed by dT/d ln S (T flat beforehand) and
// by what the other readings say. Allowed are 4.5 standard errors of the share below each end.
func TestPosteriorAgainstMonteCarlo(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	for _, c := range []struct {
		um  []float64
		ε   []float64
		rel float64
	}{
		{[]float64{0.9}, []float64{0.5}, 0.05},
		{[]float64{0.75, 0.9}, []float64{0.93, 0.97}, 0.04},
		{[]float64{0.7, 0.8, 1.0}, []float64{0.97, 0.99, 0.98}, 0.03},
		{[]float64{0.7, 0.8, 1.0}, []float64{0.5, 0.45, 0.35}, 0.03},
	} {
		const T0, lo, hi = 1500.0, 1000.0, 2200.0
		n := len(c.um)
		bands, y := make([]*pyro.Band, n), make([]float64, n)
		for i, um := range c.um {
			b, err := pyro.Line(pyro.Wavelength(um) * pyro.Micrometre)
			if err != nil {
				t.Fatal(err)
			}
			bands[i], y[i] = b, c.ε[i]*b.Radiance(T0)
		}
		s := emissivity.Unknown().AcceptWide()
		e, err := New(bands, Assume{Emissivity: s, Noise: Relative(c.rel), Range: Range{lo, hi}})
		if err != nil {
			t.Fatal(err)
		}
		r, err := e.Estimate(Readings{Signal: y})
		if err != nil {
			t.Fatal(err)
		}
		shares := []float64{0.025, 0.16, 0.5, 0.84, 0.975}
		below := make([]float64, len(shares))
		total, total2 := 0.0, 0.0
		comps := s.Components()
		chol := make([]mat.Cholesky, len(comps))
		lower := make([]mat.TriDense, len(comps))
		for k := range comps {
			cov := mat.NewSymDense(n, nil)
			for i := range n {
				for j := range i + 1 {
					v := s.Covariance(k, bands[i].Mean(), bands[j].Mean())
					if i == j {
						v += 1e-12
					}
					cov.SetSym(i, j, v)
				}
			}
			if !chol[k].Factorize(cov) {
				t.Fatal("not positive definite")
			}
			chol[k].LTo(&lower[k])
		}
		z, f := make([]float64, n), make([]float64, n)
		const draws = 400_000
		for range draws {
			u, k := rng.Float64(), 0
			for u -= comps[0].Weight; u > 0 && k < len(comps)-1; u -= comps[k].Weight {
				k++
			}
			for fits := false; !fits; {
				fits = true
				for i := range n {
					z[i] = rng.NormFloat64()
					f[i] = s.LogMean(k, bands[i].Mean())
					for j := range i + 1 {
						f[i] += lower[k].At(i, j) * z[j]
					}
					fits = fits && f[i] <= 0
				}
			}
			// ln S of the first channel
			logS := math.Log(y[0]) - f[0] - math.Hypot(c.rel, comps[k].Roughness)*rng.NormFloat64()
			T := float64(bands[0].RadianceTemperature(math.Exp(logS)))
			if !(T > lo && T < hi) {
				continue
			}
			x := pyro.C2 / (c.um[0] * 1e-6 * T)
			weight := T / (x / -math.Expm1(-x)) // dT/d ln S
			v := c.rel*c.rel + comps[k].Roughness*comps[k].Roughness
			for i := 1; i < n; i++ {
				d := math.Log(y[i]/bands[i].Radiance(pyro.Temperature(T))) - f[i]
				weight *= math.Exp(-d * d / (2 * v))
			}
			total += weight
			total2 += weight * weight
			for i, share := range shares {
				if T < 1/r.posterior.quantile(1-share) {
					below[i] += weight
				}
			}
		}
		effective := total * total / total2
		for i, share := range shares {
			got := below[i] / total
			if se := math.Sqrt(share * (1 - share) / effective); math.Abs(got-share) > 4.5*se {
				t.Errorf("%v: below the %g quantile lie %.4f of the draws, allowed ± %.4f", c.um, share, got, 4.5*se)
			}
		}
		t.Logf("%v µm, ε %v: %.0f effective draws, below the quantiles %.4f", c.um, c.ε, effective, func() []float64 {
			for i := range below {
				below[i] /= total
			}
			return below
		}())
	}
}

// TestOrthant: against 200,000 draws each, to 5 standard errors and 10 % of P for the method's
// own error, over means from far inside to outside and correlations up to 0.99.
func TestOrthant(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	worst := 0.0
	for _, n := range []int{1, 2, 4, 8} {
		for _, length := range []float64{0.2, 1, 3} {
			for _, mean := range []float64{-2, -0.5, 0, 0.7} {
				cov := mat.NewSymDense(n, nil)
				m := make([]float64, n)
				for i := range n {
					m[i] = mean + 0.5*math.Sin(float64(3*i))
					for j := range i + 1 {
						d := float64(i-j) / 4 / length
						cov.SetSym(i, j, math.Exp(-d*d/2))
					}
					cov.SetSym(i, i, 1+1e-6)
				}
				var chol mat.Cholesky
				if !chol.Factorize(cov) {
					t.Fatal("not positive definite")
				}
				var l mat.TriDense
				chol.LTo(&l)
				const draws = 200_000
				inside := 0
				z := make([]float64, n)
			draw:
				for range draws {
					for i := range z {
						z[i] = rng.NormFloat64()
					}
					for i := range n {
						x := m[i]
						for j := range i + 1 {
							x += l.At(i, j) * z[j]
						}
						if x > 0 {
							continue draw
						}
					}
					inside++
				}
				p := float64(inside) / draws
				flat := make([]float64, n*n)
				for i := range n {
					for j := range n {
						flat[i*n+j] = cov.At(i, j)
					}
				}
				got := orthant(slices.Clone(m), flat, n)
				se := math.Sqrt(p * (1 - p) / draws)
				worst = max(worst, (math.Abs(got-p)-3*se)/p)
				if math.Abs(got-p) > 5*se+0.1*p {
					t.Errorf("n %d, length %g, mean %g: P = %.5f, by draws %.5f ± %.5f", n, length, mean, got, p, se)
				}
			}
		}
	}
	t.Logf("off by %.3f of P at most beyond the draws' own scatter", worst)
}

func TestUpperTail(t *testing.T) {
	for z := -5.0; z < 12; z += 0.0137 {
		p, h := upperTail(z)
		want := math.Erfc(z/math.Sqrt2) / 2
		hazard := math.Exp(-z*z/2) / (math.Sqrt(2*math.Pi) * want)
		if z < 8 && math.Abs(p/want-1) > 2e-5 || math.Abs(p/want-1) > 1e-4 || math.Abs(h/hazard-1) > 1e-4 {
			t.Errorf("z %g: P = %g, want %g; h = %g, want %g", z, p, want, h, hazard)
		}
	}
}

// TestLogarithmicForm: one reading of leastSignal standard uncertainties, the worst that is
// taken: the posterior of T with ln s for Gaussian against that with s for Gaussian, both by
// brute force over ln ε. Where the readings' noise is all there is (ε exact), ends and median
// differ by less than 0.2 of the posterior's standard deviation, on an Unknown surface by less
// than 0.015. Both fall with the signal: in ln ε the difference is 1.5 relative variances (the
// mean of ln m given s, ln m flat beforehand) and a skewness.
func TestLogarithmicForm(t *testing.T) {
	b := testLines(t, 0.9, 0.9, 1)[0]
	const T0, lo, hi, steps = 1500.0, 1100.0, 2100.0, 20000
	s := 0.5 * b.Radiance(T0)
	for _, c := range []struct {
		level, std, signal, allowed float64
	}{
		{0.5, 0, leastSignal, 0.2}, {0.42, 0.45, leastSignal, 0.015},
		{0.5, 0, 4 * leastSignal, 0.05}, {0.42, 0.45, 4 * leastSignal, 0.0015},
	} {
		rel := 1 / c.signal
		var q [2][3]float64
		var spread float64
		for form := range q {
			f := make([]float64, steps+1)
			total, sum, squares := 0.0, 0.0, 0.0
			for i := range f {
				T := lo + (hi-lo)*float64(i)/steps
				y := math.Log(s / b.Radiance(pyro.Temperature(T)))
				// ln ε where the reading leaves any: within 9 of its standard deviations of y
				from, n := y-9*rel, 60
				if c.std == 0 {
					from, n = math.Log(c.level), 1
				}
				for k := range n {
					x := from + 18*rel*float64(k)/60
					if x > 0 {
						continue
					}
					p := 1.0
					if c.std > 0 {
						z := (x - math.Log(c.level)) / c.std
						p = math.Exp(-z * z / 2)
					}
					z := (y - x) / rel
					if form == 1 {
						z = (1 - math.Exp(x-y)) / rel // (s − m)/σ, σ = rel·s
					}
					f[i] += p * math.Exp(-z*z/2)
				}
				total, sum, squares = total+f[i], sum+f[i]*T, squares+f[i]*T*T
			}
			mean := sum / total
			spread = math.Sqrt(squares/total - mean*mean)
			below := 0.0
			for i, p := range f {
				for k, share := range []float64{0.025, 0.5, 0.975} {
					if below < share*total && below+p >= share*total {
						q[form][k] = lo + (hi-lo)*(float64(i)+(share*total-below)/p)/steps
					}
				}
				below += p
			}
		}
		for k := range q[0] {
			if off := math.Abs(q[0][k]-q[1][k]) / spread; off > c.allowed {
				t.Errorf("level %g ± %g, signal %g: %.3f K against %.3f K, %.4f of ± %.3f K, allowed %g", c.level, c.std, c.signal, q[0][k], q[1][k], off, spread, c.allowed)
			}
		}
		t.Logf("level %g ± %g, signal %g σ: %.2f and %.2f K, ± %.2f K", c.level, c.std, c.signal, q[0], q[1], spread)
	}
}
