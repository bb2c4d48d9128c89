package fit

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/mat"

	"candent/emissivity"
	"candent/pyro"
)

// processPlan is a process compiled for the channels: each component's covariance of ln ε
// as ΦAΦᵀ + diagonal. Components of one roughness and one kind share Φ and the diagonal.
type processPlan struct {
	surface   emissivity.Process
	comps     []compiledComponent
	groups    []*basisGroup
	means     [][]float64 // the distinct means of ln ε at the channels
	bounded   bool        // ε ≤ 1 is asked
	most      int         // the most channels at which a group asks it
	lowest    []float64   // the least ln ε that counts at each channel; nil for a relative level
	logPeak   []float64   // ln c₁Lλ⁻⁵ of each channel
	columns   int         // the largest of a basis and the shared inputs together
	truncated float64     // the largest variance outside a basis
}

type compiledComponent struct {
	index     int     // in the process's Components
	share     float64 // of the mixture, what is known of ε included
	group     int
	mean      int       // index into means
	precision []float64 // A⁻¹, row by row
	constant  float64   // ln share − ½ ln det A − ln P(ε ≤ 1)
}

// basisGroup is a basis Φ, n×r row by row, with what is on the diagonal.
type basisGroup struct {
	r        int
	phi      []float64
	diagonal []float64
	points   []int // channels at which ε ≤ 1 is asked
}

// boundPoints is the most channels at which ε ≤ 1 is asked, and boundGap the standard
// deviation of ln ε at a channel between them, given the curve at them, that is small enough,
// where the roughness isn't larger.
const (
	boundPoints = 8
	boundGap    = 0.005
)

// widest says how many standard deviations from a component's mean count.
const widest = 7

// compileProcess compiles the process. Its errors wrap ErrAssume.
func (e *Estimator) compileProcess() error {
	p := e.process
	s := p.surface
	e.steady = e.sight.clear
	switch {
	case e.assume.Noise.kind == covariance:
		return fmt.Errorf("%w: %v with a covariance of the readings: declare what channels share as inputs", ErrAssume, s)
	case e.assume.Noise.unknown:
		return fmt.Errorf("%w: %v with noise of unknown size: state the size, since the surface explains any residual", ErrAssume, s)
	case e.assume.Field.Spread != nil:
		return fmt.Errorf("%w: %v with a spread of the temperature over the field: take a family or a model, or leave the spread out and say so", ErrAssume, s)
	case e.assume.Loss.kind != square:
		return fmt.Errorf("%w: %v with a loss: mask outlying channels", ErrAssume, s)
	case e.assume.Temperature.Value > 0 && e.assume.Temperature.StdK == 0:
		return fmt.Errorf("%w: %v at a temperature that is exactly known: state its standard uncertainty", ErrAssume, s)
	case s.IsWide() && e.n <= 2:
		return newWideError(e)
	case s.IsRelative() && e.n < 3:
		return fmt.Errorf("%w: %v with %d channels: a relative level needs three or more", ErrAssume, s, e.n)
	}
	λ := make([]pyro.Wavelength, e.n)
	p.logPeak = make([]float64, e.n)
	for j := range e.used {
		λ[j] = e.sight.channel[j].centre
		p.logPeak[j] = math.Log(e.peak[j])
	}
	priors := make([]channelPrior, len(s.Components()))
	total := 0.0
	for c := range priors {
		var err error
		if priors[c], err = conditioned(s, c, λ); err != nil {
			return err
		}
		total += priors[c].weight
	}
	if !(total > 0) {
		return fmt.Errorf("%w: %v: no component agrees with what is known of ε", ErrAssume, s)
	}
	kept := priors[:0]
	for _, q := range priors {
		if q.weight /= total; q.weight > 1e-12 {
			kept = append(kept, q)
		}
	}
	p.bounded = !s.IsRelative()
	if err := p.compileGroups(kept); err != nil {
		return fmt.Errorf("%w: %v: %w", ErrAssume, s, err)
	}
	p.columns = e.q
	for _, g := range p.groups {
		p.columns = max(p.columns, g.r+e.q)
	}
	return nil
}

// channelPrior is one component at the channels.
type channelPrior struct {
	index     int
	weight    float64
	mean      []float64
	cov       *mat.SymDense // of the curve
	roughness float64
	rough     bool
	free      bool // with a level of infinite spread
}

// conditioned returns component c at the channels, given what is known of ε.
func conditioned(s emissivity.Process, c int, λ []pyro.Wavelength) (channelPrior, error) {
	k := s.Components()[c]
	n := len(λ)
	q := channelPrior{index: c, weight: k.Weight, mean: make([]float64, n), cov: mat.NewSymDense(n, nil), roughness: k.Roughness, rough: k.Rough.Std > 0, free: math.IsInf(k.Spread, 1)}
	for i := range λ {
		if q.mean[i] = s.LogMean(c, λ[i]); math.IsNaN(q.mean[i]) || math.IsInf(q.mean[i], 0) {
			return q, fmt.Errorf("%w: %v gives no emissivity at %v: does its curve end before?", ErrAssume, s, λ[i])
		}
		for j := range i + 1 {
			q.cov.SetSym(i, j, s.Covariance(c, λ[i], λ[j]))
		}
	}
	known := s.KnownPoints()
	m := len(known)
	if m == 0 {
		return q, nil
	}
	inner, cross, rest := mat.NewSymDense(m, nil), mat.NewDense(m, n, nil), mat.NewVecDense(m, nil)
	for a, d := range known {
		mean := s.LogMean(c, d.Wavelength)
		if math.IsNaN(mean) {
			return q, fmt.Errorf("%w: %v gives no emissivity at %v, where one is known", ErrAssume, s, d.Wavelength)
		}
		rest.SetVec(a, math.Log(d.Value)-mean)
		for b := range a + 1 {
			v := s.Covariance(c, d.Wavelength, known[b].Wavelength) + s.KnownCovariance(a, b)
			if a == b {
				v += k.Roughness * k.Roughness
			}
			inner.SetSym(a, b, v)
		}
		for j := range λ {
			cross.Set(a, j, s.Covariance(c, d.Wavelength, λ[j]))
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(inner) {
		return q, fmt.Errorf("%w: %v: the emissivities known contradict each other", ErrAssume, s)
	}
	var solved mat.Dense
	var alpha mat.VecDense
	if err := chol.SolveTo(&solved, cross); err != nil {
		return q, fmt.Errorf("%w: %v: %w", ErrAssume, s, err)
	}
	if err := chol.SolveVecTo(&alpha, rest); err != nil {
		return q, fmt.Errorf("%w: %v: %w", ErrAssume, s, err)
	}
	q.weight *= math.Exp(-(mat.Dot(rest, &alpha) + chol.LogDet() + float64(m)*math.Log(2*math.Pi)) / 2)
	for i := range λ {
		q.mean[i] += mat.Dot(cross.ColView(i), &alpha)
		for j := range i + 1 {
			q.cov.SetSym(i, j, q.cov.At(i, j)-mat.Dot(cross.ColView(i), solved.ColView(j)))
		}
	}
	return q, nil
}

// spreadOver returns up to count of n channels, evenly, both ends included.
func spreadOver(n, count int) []int {
	count = min(count, n)
	list := make([]int, count)
	for i := range list {
		if count > 1 {
			list[i] = i * (n - 1) / (count - 1)
		}
	}
	return list
}

// boundAt returns the least number of channels, boundPoints at most, that leave no component's
// curve more open between them than the roughness or boundGap.
func boundAt(group []channelPrior, n int) []int {
	allowed := max(group[0].roughness, boundGap)
	for count := 1; ; count++ {
		points := spreadOver(n, count)
		if count >= min(n, boundPoints) || !slices.ContainsFunc(group, func(q channelPrior) bool { return openBetween(q.cov, points) > allowed*allowed }) {
			return points
		}
	}
}

// openBetween returns the largest variance of a channel given those at the points.
func openBetween(cov *mat.SymDense, points []int) float64 {
	n, _ := cov.Dims()
	m := len(points)
	inner, cross := mat.NewSymDense(m, nil), mat.NewDense(m, n, nil)
	for a, i := range points {
		for b, j := range points[:a+1] {
			inner.SetSym(a, b, cov.At(i, j))
		}
		inner.SetSym(a, a, inner.At(a, a)*(1+1e-10))
		for j := range n {
			cross.Set(a, j, cov.At(i, j))
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(inner) {
		return 0 // the points fix each other, and a constant curve everything
	}
	var solved mat.Dense
	if chol.SolveTo(&solved, cross) != nil {
		return 0
	}
	worst := 0.0
	for j := range n {
		worst = max(worst, cov.At(j, j)-mat.Dot(cross.ColView(j), solved.ColView(j)))
	}
	return worst
}

// compileGroups builds the bases and the components on them.
func (p *processPlan) compileGroups(priors []channelPrior) error {
	n := len(p.logPeak)
	type key struct {
		roughness   float64
		rough, free bool
		nothing     bool
	}
	keyOf := func(q channelPrior) key {
		return key{q.roughness, q.rough, q.free, mat.Max(q.cov) == 0 && mat.Min(q.cov) == 0}
	}
	seen := map[key]bool{}
	for _, q := range priors {
		if seen[keyOf(q)] {
			continue
		}
		seen[keyOf(q)] = true
		var group []channelPrior
		for _, o := range priors {
			if keyOf(o) == keyOf(q) {
				group = append(group, o)
			}
		}
		if err := p.addGroup(group); err != nil {
			return err
		}
	}
	if !p.bounded {
		return nil
	}
	p.lowest = make([]float64, n)
	for j := range p.lowest {
		p.lowest[j] = math.Inf(1)
		for _, q := range priors {
			p.lowest[j] = min(p.lowest[j], q.mean[j]-widest*math.Sqrt(q.cov.At(j, j)+q.roughness*q.roughness))
		}
	}
	return nil
}

// The standard deviation of ln ε that a basis may leave out: as a share of the roughness per
// channel, the same with a rough term, and where there is no roughness.
const (
	allowedShare = 0.2
	allowedRough = 0.4
	allowedLeast = 1e-4
)

// addGroup builds one basis, the leading eigenvectors of the mean covariance, of the least
// rank at which no component's curve has more than the allowance outside it at any channel.
// That variance goes to the diagonal (the largest of the group's); its correlation with what
// is inside is dropped. TestRankIsEnough bounds what that does to a posterior.
func (p *processPlan) addGroup(group []channelPrior) error {
	n := len(p.logPeak)
	g := &basisGroup{diagonal: make([]float64, n)}
	if p.bounded {
		g.points = boundAt(group, n)
		p.most = max(p.most, len(g.points))
	}
	share := allowedShare
	if group[0].rough {
		share = allowedRough
	}
	allowed := max(share*group[0].roughness, allowedLeast)
	allowed *= allowed
	mean := mat.NewSymDense(n, nil)
	for _, q := range group {
		var scaled mat.SymDense
		scaled.ScaleSym(q.weight, q.cov)
		mean.AddSym(mean, &scaled)
	}
	var vectors mat.Dense
	rank := 0
	if mat.Max(mean) > 0 {
		var eigen mat.EigenSym
		if !eigen.Factorize(mean, true) {
			return fmt.Errorf("no eigenvectors of the covariance")
		}
		eigen.VectorsTo(&vectors)
		rank = leastRank(n, func(r int) bool {
			for _, q := range group {
				if slices.Max(leftOut(q.cov, lastColumns(&vectors, r))) > allowed {
					return false
				}
			}
			return true
		})
	}
	var v *mat.Dense
	if rank > 0 {
		v = lastColumns(&vectors, rank)
	}
	for _, q := range group {
		left := leftOut(q.cov, v)
		p.truncated = max(p.truncated, slices.Max(left))
		for j := range g.diagonal {
			g.diagonal[j] = max(g.diagonal[j], left[j])
		}
	}
	for j := range g.diagonal {
		g.diagonal[j] += group[0].roughness * group[0].roughness
	}
	free := 0
	if group[0].free {
		free = 1 // a column of ones without a prior
	}
	g.r = rank + free
	g.phi = make([]float64, n*g.r)
	for j := range n {
		for a := range rank {
			g.phi[j*g.r+a] = v.At(j, a)
		}
		if free == 1 {
			g.phi[j*g.r+rank] = 1
		}
	}
	p.groups = append(p.groups, g)
	for _, q := range group {
		if err := p.addComponent(q, g, v, rank, allowed); err != nil {
			return err
		}
	}
	return nil
}

// leastRank returns the least r of 0 … n that is enough, by bisection.
func leastRank(n int, enough func(r int) bool) int {
	lo, hi := 0, n
	for lo < hi {
		if m := (lo + hi) / 2; m > 0 && enough(m) {
			hi = m
		} else {
			lo = m + 1
		}
	}
	return hi
}

func lastColumns(m *mat.Dense, r int) *mat.Dense {
	n, c := m.Dims()
	return mat.DenseCopyOf(m.Slice(0, n, c-r, c))
}

// leftOut returns the diagonal of QKQ, the variance of what of the curve is outside the
// span of V, Q = 1 − VVᵀ; that of K where V is nil.
func leftOut(k *mat.SymDense, v *mat.Dense) []float64 {
	n, _ := k.Dims()
	left := mat.DenseCopyOf(k)
	if v != nil {
		var vk, out mat.Dense
		vk.Mul(v.T(), left)
		out.Mul(v, &vk)
		left.Sub(left, &out) // QK
		var kv mat.Dense
		kv.Mul(left, v)
		out.Mul(&kv, v.T())
		left.Sub(left, &out)
	}
	diagonal := make([]float64, n)
	for j := range diagonal {
		diagonal[j] = max(left.At(j, j), 0)
	}
	return diagonal
}

func (p *processPlan) addComponent(q channelPrior, g *basisGroup, v *mat.Dense, rank int, allowed float64) error {
	c := compiledComponent{index: q.index, share: q.weight, group: len(p.groups) - 1, mean: -1, precision: make([]float64, g.r*g.r), constant: math.Log(q.weight)}
	for i, m := range p.means {
		same := true
		for j := range m {
			same = same && m[j] == q.mean[j]
		}
		if same {
			c.mean = i
		}
	}
	if c.mean < 0 {
		c.mean = len(p.means)
		p.means = append(p.means, q.mean)
	}
	if rank > 0 {
		var kv, a mat.Dense
		kv.Mul(q.cov, v)
		a.Mul(v.T(), &kv)
		sym := mat.NewSymDense(rank, nil)
		for i := range rank {
			for j := range i + 1 {
				sym.SetSym(i, j, (a.At(i, j)+a.At(j, i))/2)
			}
			sym.SetSym(i, i, sym.At(i, i)+1e-3*allowed) // so that it can be inverted
		}
		var chol mat.Cholesky
		if !chol.Factorize(sym) {
			return fmt.Errorf("the covariance of a component is not positive definite")
		}
		c.constant -= chol.LogDet() / 2
		var inverse mat.SymDense
		if err := chol.InverseTo(&inverse); err != nil {
			return fmt.Errorf("the covariance of a component can't be inverted: %w", err)
		}
		for i := range rank {
			for j := range rank {
				c.precision[i*g.r+j] = inverse.At(i, j)
			}
		}
	}
	if m := len(g.points); m > 0 {
		mean, cov := make([]float64, m), make([]float64, m*m)
		for a, i := range g.points {
			mean[a] = q.mean[i]
			for b, j := range g.points {
				cov[a*m+b] = q.cov.At(i, j)
			}
		}
		p := orthant(mean, cov, m)
		if p == 0 {
			return fmt.Errorf("a component has no curve with ε ≤ 1")
		}
		c.constant -= math.Log(p)
	}
	p.comps = append(p.comps, c)
	return nil
}

// WideError says that a process for all surfaces was put to one or two bands, whose
// temperature would then be little more than what the process assumes. It lists what could
// be named instead. It wraps ErrAssume.
type WideError struct {
	Surface    string
	Channels   int
	Wavelength pyro.Wavelength
	Low, High  float64 // central 95 % of ε that it assumes at Wavelength
	Kinds      []KindRange
}

// KindRange is the central 95 % of ε that a kind assumes.
type KindRange struct {
	Name      string
	Low, High float64
}

func newWideError(e *Estimator) error {
	λ := e.bands[e.used[0]].Mean()
	w := &WideError{Surface: e.process.surface.String(), Channels: e.n, Wavelength: λ}
	w.Low, w.High = e.process.surface.Range(λ)
	for _, k := range emissivity.Kinds() {
		lo, hi := k.Process.Range(λ)
		w.Kinds = append(w.Kinds, KindRange{k.Name, lo, hi})
	}
	return w
}

func (w *WideError) Error() string {
	var b strings.Builder
	bands := "one band"
	if w.Channels > 1 {
		bands = fmt.Sprintf("%d bands", w.Channels)
	}
	fmt.Fprintf(&b, "fit: assumption: %s can't tell enough of the surface (%s: ε between %.2g and %.2g at %v): name a kind of surface, a handbook curve (emissivity.About) or an emissivity known at a wavelength (KnownAt), or declare AcceptWide. Kinds:", bands, w.Surface, w.Low, w.High, w.Wavelength)
	for i, k := range w.Kinds {
		if i > 0 {
			b.WriteString(",")
		}
		fmt.Fprintf(&b, " %s %.2g to %.2g", k.Name, k.Low, k.High)
	}
	return b.String()
}

// Unwrap returns ErrAssume.
func (w *WideError) Unwrap() error { return ErrAssume }
