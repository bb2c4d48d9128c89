package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/pyro"
)

// Estimator is a compiled set of bands and assumptions. It is immutable and safe for
// concurrent use; each goroutine brings a Work of its own.
type Estimator struct {
	assume  Assume
	family  emissivity.Family
	process *processPlan // instead of a family; or nil
	model   *modelPlan   // instead of a family; or nil
	link    emissivity.Link
	bands   []*pyro.Band
	used    []int // indices into bands of the channels that no mask leaves out

	n, p, q int // channels used, parameters of the family, shared unknowns
	sight   *sight
	bent    bool // χ² is not quadratic in a linear family's parameters, whatever else
	steady  bool // what is shared acts on the logarithm of a reading alike at all temperatures
	noisy   bool // every detector has a noise model, so that readings need no Std
	lines   bool
	peak    []float64 // c₁Lλ⁻⁵ of each channel's line
	rate    []float64 // c₂/λ, K
	coord   []float64 // the family's coordinate d at each channel (lines)
	table   *bandTable
	fast    *fastPlan  // nil where the assumptions are not plain
	shape   *Estimator // the same with a relative level, to suspect units by; or nil

	limits   []float64 // rows φ of the linear form where its bounds are held, each p long
	lower    float64   // bounds of Σ θₖφₖ; infinite where there is none
	upper    float64
	data     []datum // priors: rows on θ
	fixed    []bool
	value    []float64
	relative []float64 // effects of Assume.Shared, n × their number
	additive []float64
	whiten   *mat.TriDense // L of the covariance LLᵀ
	loss     [2]float64    // E ψ′, E ψ²

	hottest, coldest float64 // range of β = 1/T
	deficient        string  // what nothing fixes, in words; empty where all is fixed
}

// datum is something known of θ: row·θ = value ± 1/weight.
type datum struct {
	name   string
	row    []float64
	value  float64
	weight float64
}

// New compiles bands and assumptions. Its errors wrap ErrAssume and say what to change.
func New(bands []*pyro.Band, a Assume) (*Estimator, error) {
	if len(bands) == 0 {
		return nil, fmt.Errorf("%w: no bands", ErrAssume)
	}
	for i, b := range bands {
		if b == nil {
			return nil, fmt.Errorf("%w: band %d is nil", ErrAssume, i)
		}
	}
	e := &Estimator{assume: a, bands: bands}
	if err := e.defaults(); err != nil {
		return nil, err
	}
	for i, b := range bands {
		if err := b.Check(e.assume.Range.Min); err != nil {
			return nil, fmt.Errorf("%w: band %d: %w", ErrAssume, i, err)
		}
		if !masked(b, a.Masks) && i != a.leave-1 {
			e.used = append(e.used, i)
		}
	}
	if e.n = len(e.used); e.n == 0 {
		return nil, fmt.Errorf("%w: the masks leave no channel", ErrAssume)
	}
	if err := e.compileFamily(); err != nil {
		return nil, err
	}
	if err := e.compileShared(); err != nil {
		return nil, err
	}
	if err := e.compileSight(); err != nil {
		return nil, err
	}
	if err := e.compileNoise(); err != nil {
		return nil, err
	}
	e.compileBands()
	e.compileOptics()
	if e.process != nil {
		if err := e.compileProcess(); err != nil {
			return nil, err
		}
		return e, nil
	}
	e.compileLimits()
	e.deficient = e.findDeficiency()
	e.fast = e.compileFast()
	var err error
	e.shape, err = e.compileShape()
	return e, err
}

func (e *Estimator) defaults() error {
	a := &e.assume
	if a.Range == (Range{}) {
		a.Range = Range{pyro.BandMin, pyro.BandMax}
	}
	if r := a.Range; !(r.Min < r.Max) || !(r.Min >= 20) || !(r.Max <= 20000) {
		return fmt.Errorf("%w: range %v to %v: it must rise and lie inside 20 K to 20000 K", ErrAssume, r.Min, r.Max)
	}
	e.hottest, e.coldest = 1/float64(a.Range.Max), 1/float64(a.Range.Min)
	if a.Probability == 0 {
		a.Probability = 0.95
	}
	if !(a.Probability > 0 && a.Probability < 1) {
		return fmt.Errorf("%w: probability %g is not between 0 and 1", ErrAssume, a.Probability)
	}
	if t := a.Temperature; t != (TemperaturePrior{}) {
		if !(t.Value >= a.Range.Min && t.Value <= a.Range.Max) || !(t.StdK >= 0) || math.IsInf(t.StdK, 0) {
			return fmt.Errorf("%w: temperature known as %v ± %g K: it must lie inside the range %v to %v; is it in °C?", ErrAssume, t.Value, t.StdK, a.Range.Min, a.Range.Max)
		}
	}
	return a.Loss.check()
}

func masked(b *pyro.Band, masks []Mask) bool {
	lo, hi := b.Edges()
	for _, m := range masks {
		if hi >= m.Lo && lo <= m.Hi {
			return true
		}
	}
	return false
}

func (e *Estimator) compileFamily() error {
	if e.assume.Emissivity == nil {
		e.assume.Emissivity = emissivity.Unknown()
	}
	if err := e.assume.Emissivity.Err(); err != nil {
		return fmt.Errorf("%w: %w", ErrAssume, err)
	}
	if m, ok := e.assume.Emissivity.(emissivity.Model); ok {
		return e.compileModel(m)
	}
	if s, ok := e.assume.Emissivity.(emissivity.Process); ok {
		e.process = &processPlan{surface: s}
		return nil
	}
	f, ok := e.assume.Emissivity.(emissivity.Family)
	if !ok {
		return fmt.Errorf("%w: %v is not a family", ErrAssume, e.assume.Emissivity)
	}
	if _, set := f.Centre(); !set {
		lo, hi := e.bands[e.used[0]].Edges()
		for _, i := range e.used {
			l, h := e.bands[i].Edges()
			lo, hi = min(lo, l), max(hi, h)
		}
		f = f.CentredOn((lo + hi) / 2)
	}
	e.family, e.link = f, f.Link()
	e.p = len(f.Parameters())
	e.fixed, e.value = make([]bool, e.p), make([]float64, e.p)
	for k := range e.p {
		p := f.Prior(k)
		if !p.Set {
			continue
		}
		e.value[k] = p.Value
		if e.fixed[k] = p.Std == 0; !e.fixed[k] {
			row := make([]float64, e.p)
			row[k] = 1
			e.data = append(e.data, datum{"prior on " + f.Parameters()[k], row, p.Value, 1 / p.Std})
		}
	}
	for _, known := range f.KnownPoints() {
		d := datum{fmt.Sprintf("emissivity known at %v", known.Wavelength), f.Basis(make([]float64, e.p), known.Wavelength), known.Value, 1 / known.Std}
		if e.link == emissivity.Exp {
			d.value, d.weight = math.Log(known.Value), known.Value/known.Std
		}
		e.data = append(e.data, d)
	}
	return nil
}

func (e *Estimator) compileShared() error {
	q := len(e.assume.Shared)
	e.relative, e.additive = make([]float64, e.n*q), make([]float64, e.n*q)
	for k, s := range e.assume.Shared {
		if s.Relative == nil && s.Additive == nil {
			return fmt.Errorf("%w: shared input %d (%s) acts on nothing", ErrAssume, k, s.Name)
		}
		for what, from := range map[string][]float64{"Relative": s.Relative, "Additive": s.Additive} {
			if from == nil {
				continue
			}
			if len(from) != len(e.bands) {
				return fmt.Errorf("%w: shared input %d (%s): %s has %d elements for %d bands", ErrAssume, k, s.Name, what, len(from), len(e.bands))
			}
			to := e.relative
			if what == "Additive" {
				to = e.additive
			}
			for j, i := range e.used {
				if v := from[i]; math.IsNaN(v) || math.IsInf(v, 0) || what == "Relative" && math.Abs(v) > 1 {
					return fmt.Errorf("%w: shared input %d (%s): %s[%d] = %g: finite, and a fraction where relative", ErrAssume, k, s.Name, what, i, v)
				}
				to[j*q+k] = from[i]
			}
		}
	}
	return nil
}

func (e *Estimator) compileNoise() error {
	noise := e.assume.Noise
	if err := noise.check(len(e.bands)); err != nil {
		return err
	}
	e.loss[0], e.loss[1] = e.assume.Loss.expected()
	if noise.kind != covariance {
		return nil
	}
	sub := mat.NewSymDense(e.n, nil)
	for j, i := range e.used {
		for k := 0; k <= j; k++ {
			a, b := noise.cov[i*len(e.bands)+e.used[k]], noise.cov[e.used[k]*len(e.bands)+i]
			if math.Abs(a-b) > 1e-12*(math.Abs(a)+math.Abs(b)) {
				return fmt.Errorf("%w: the covariance is not symmetric at %d, %d", ErrAssume, i, e.used[k])
			}
			sub.SetSym(j, k, a)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(sub) {
		return fmt.Errorf("%w: the covariance is not positive definite", ErrAssume)
	}
	e.whiten = mat.NewTriDense(e.n, mat.Lower, nil)
	chol.LTo(e.whiten)
	return nil
}

func (e *Estimator) compileBands() {
	e.lines = true
	e.peak, e.rate = make([]float64, e.n), make([]float64, e.n)
	e.coord = make([]float64, e.n)
	for j, i := range e.used {
		b := e.bands[i]
		lo, hi := b.Edges()
		e.lines = e.lines && lo == hi
		e.lines = e.lines && e.sight.channel[j].Curve == nil
		λ := e.sight.channel[j].centre
		e.peak[j] = pyro.C1L / math.Pow(float64(λ), 5)
		e.rate[j] = pyro.C2 / float64(λ)
		e.coord[j] = e.family.Coordinate(λ)
	}
}

// compileLimits lists where 0 < ε ≤ 1 is held: at the edges of every band, or at the
// outermost ones alone where the family is monotonic.
func (e *Estimator) compileLimits() {
	if e.model != nil {
		e.lower, e.upper = 0, 1
		for k := range e.p {
			row := make([]float64, e.p)
			row[k] = 1
			e.limits = append(e.limits, row...)
		}
		return
	}
	e.lower, e.upper = math.Inf(-1), 1.0
	if e.link == emissivity.Identity {
		e.lower = 0
	} else {
		e.upper = 0
	}
	if e.family.IsRelative() {
		e.upper = math.Inf(1)
		if e.link == emissivity.Exp {
			return
		}
	}
	var edges []pyro.Wavelength
	for _, i := range e.used {
		lo, hi := e.bands[i].Edges()
		edges = append(edges, lo, hi)
	}
	if e.p <= 2 {
		lo, hi := edges[0], edges[0]
		for _, λ := range edges {
			lo, hi = min(lo, λ), max(hi, λ)
		}
		edges = []pyro.Wavelength{lo, hi}
	}
	for _, λ := range edges {
		e.limits = append(e.limits, e.family.Basis(make([]float64, e.p), λ)...)
	}
}

// Bands returns how many readings the estimator takes.
func (e *Estimator) Bands() int { return len(e.bands) }

// size is the order of the joint system: β, the parameters, the shared inputs.
func (e *Estimator) size() int { return 1 + e.p + e.q }
