package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/diff/fd"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
	"gonum.org/v1/gonum/stat/distuv"

	"candent/emissivity"
	"candent/pyro"
)

// MeasuredCurve is the emissivity of one surface at rising wavelengths, with the standard
// uncertainties of the single points, or nil for none beside the roughness that is learned.
type MeasuredCurve struct {
	Name       string
	Wavelength []pyro.Wavelength
	Emissivity []float64
	Std        []float64
}

// LearnSettings are the choices of Learn. Zero values: a name that counts the curves, and no
// slope.
type LearnSettings struct {
	Name  string
	Slope bool // a mean d ln ε/d ln λ is learned beside the level
}

// ErrCurves is what every error of the curves to learn from wraps.
var ErrCurves = errors.New("fit: curves")

// CurveError names the curve and the row that can't be learned from. It wraps ErrCurves.
type CurveError struct {
	Curve  int    // index into the curves; −1 where it is all of them
	Name   string // of the curve
	Row    int    // −1 where it is the whole curve
	Value  float64
	Advice string
}

func (e *CurveError) Error() string {
	s := "fit: curves"
	if e.Curve >= 0 {
		s += fmt.Sprintf(": curve %d", e.Curve)
		if e.Name != "" {
			s += fmt.Sprintf(" (%s)", e.Name)
		}
	}
	if e.Row >= 0 {
		s += fmt.Sprintf(", row %d: %g", e.Row, e.Value)
	}
	return s + ": " + e.Advice
}

// Unwrap returns ErrCurves.
func (e *CurveError) Unwrap() error { return ErrCurves }

// The ends between which hyperparameters are sought: spread and roughness are standard
// deviations of ln ε, the length is one in ln λ. At the longest a curve is level over any
// band. The shortest length is the least of the curves' median steps.
const (
	leastSpread, mostSpread       = 1e-3, 3
	leastRoughness, mostRoughness = 1e-4, 0.5
	mostLength                    = 100

	lengthRatio   = math.Sqrt2 // between the lengths of the mixture
	leastWeight   = 0.01       // of a length that is kept
	fewCurves     = 3
	atBoundMargin = 0.02 // in the logarithm
)

// Learn makes a process from curves of emissivity of the user's own: each is one independent
// draw of a Gaussian process of ln ε, with common hyperparameters,
//
//	ln ε(λ) = ln level + slope·ln(λ/centre) + f(λ) + g,  cov f = spread²·Matérn₅⸝₂(ln(λ/µ)/length)
//
// g independent at each point with variance roughness² + (Std/ε)². Spread, length and
// roughness maximise the marginal likelihood, level and slope integrated out with flat priors
// (H. D. Patterson, R. Thompson, Recovery of inter-block information when block sizes are
// unequal, Biometrika 58 (1971) 545, cited from memory), so that the spread isn't biased by the
// level that was fitted; by Nelder–Mead from the best of a grid of starts, in logarithms.
//
// The process is a mixture over lengths, equally spaced in ln length and flat beforehand
// between the curves' step and 100, weighed by the likelihood with the spread maximised at each;
// the roughness is that of the maximum. What few curves leave open of the level (and the slope)
// is part of the spread. And the spread at each length is multiplied by the ratio of Student's
// to the normal 97.5 % quantile for the degrees of freedom that its curvature shows,
// ν = 1/(2 u²(ln spread)), at least 1: so that central 95 % hold 95 % of new surfaces, however
// few the curves. For two curves that differ in level alone ν = 1 and the factor is 6.5.
//
// The roughness is what the curves show at their own resolution; bands wider than that see
// less. That ε ≤ 1 is left out of the likelihood: near ε = 1 level and spread come out a
// little low. Beyond the curves' wavelengths the process is an extrapolation.
//
// Its errors are *CurveError.
func Learn(curves []MeasuredCurve, s LearnSettings) (emissivity.Process, *LearnReport, error) {
	l, err := newLearner(curves, s)
	if err != nil {
		return emissivity.Process{}, nil, err
	}
	φ := l.best()
	report := &LearnReport{Curves: len(curves), Points: l.points, From: l.from, To: l.to, LogLikelihood: l.logLikelihood(φ)}
	if math.IsInf(report.LogLikelihood, 0) || math.IsNaN(report.LogLikelihood) {
		return emissivity.Process{}, nil, &CurveError{Curve: -1, Row: -1, Advice: "their covariance is singular: are points nearly at one wavelength?"}
	}
	if len(curves) == 1 && φ[0] < l.lo[0]+atBoundMargin {
		return emissivity.Process{}, nil, &CurveError{Curve: 0, Name: curves[0].Name, Row: -1, Advice: "one curve, and one that doesn't vary, says nothing of how surfaces differ: state a spread (emissivity.About), or measure more surfaces"}
	}
	l.describe(report, φ)
	components := l.components(report, φ)
	name := s.Name
	if name == "" {
		name = fmt.Sprintf("surface learned from %d curves", len(curves))
	}
	l.warn(report)
	p := emissivity.NewProcess(name, components...)
	if err := p.Err(); err != nil {
		return p, report, &CurveError{Curve: -1, Row: -1, Advice: err.Error()}
	}
	return p, report, nil
}

// learner holds the curves by their wavelengths: those at the same share a covariance.
type learner struct {
	groups   []learnGroup
	columns  int // of level and slope
	curves   int
	points   int
	from, to pyro.Wavelength
	centre   float64 // ln of a wavelength in m
	lo, hi   [3]float64
}

type learnGroup struct {
	x        []float64 // ln λ
	variance []float64 // of the points' own uncertainties
	y        [][]float64
}

func newLearner(curves []MeasuredCurve, s LearnSettings) (*learner, error) {
	if len(curves) == 0 {
		return nil, &CurveError{Curve: -1, Row: -1, Advice: "none given"}
	}
	l := &learner{columns: 1, curves: len(curves), from: pyro.Wavelength(math.Inf(1))}
	if s.Slope {
		l.columns = 2
	}
	step := math.Inf(1)
	for i, c := range curves {
		if err := checkCurve(i, c); err != nil {
			return nil, err
		}
		n := len(c.Wavelength)
		x, y, v, steps := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n-1)
		for j, λ := range c.Wavelength {
			x[j], y[j] = math.Log(float64(λ)), math.Log(c.Emissivity[j])
			if c.Std != nil {
				v[j] = c.Std[j] * c.Std[j] / (c.Emissivity[j] * c.Emissivity[j])
			}
			if j > 0 {
				steps[j-1] = x[j] - x[j-1]
			}
			l.centre += x[j]
		}
		slices.Sort(steps)
		step = min(step, steps[len(steps)/2])
		l.points += n
		l.from, l.to = min(l.from, c.Wavelength[0]), max(l.to, c.Wavelength[n-1])
		k := slices.IndexFunc(l.groups, func(g learnGroup) bool { return slices.Equal(g.x, x) && slices.Equal(g.variance, v) })
		if k < 0 {
			k = len(l.groups)
			l.groups = append(l.groups, learnGroup{x: x, variance: v})
		}
		l.groups[k].y = append(l.groups[k].y, y)
	}
	l.centre /= float64(l.points)
	l.lo = [3]float64{math.Log(leastSpread), math.Log(min(step, mostLength/4)), math.Log(leastRoughness)}
	l.hi = [3]float64{math.Log(mostSpread), math.Log(mostLength), math.Log(mostRoughness)}
	return l, nil
}

// leastPoints is how many points a curve needs: a level, a spread, a roughness.
const leastPoints = 3

func checkCurve(i int, c MeasuredCurve) error {
	n := len(c.Wavelength)
	switch {
	case len(c.Emissivity) != n || c.Std != nil && len(c.Std) != n:
		return &CurveError{Curve: i, Name: c.Name, Row: -1, Advice: fmt.Sprintf("%d wavelengths, %d emissivities and %d standard uncertainties: one of each for every point", n, len(c.Emissivity), len(c.Std))}
	case n < leastPoints:
		return &CurveError{Curve: i, Name: c.Name, Row: -1, Advice: fmt.Sprintf("%d points: a curve needs %d or more", n, leastPoints)}
	}
	for j, λ := range c.Wavelength {
		ε := c.Emissivity[j]
		fail := func(v float64, advice string) error { return &CurveError{i, c.Name, j, v, advice} }
		switch {
		case !(λ >= 1e-8 && λ <= 1e-3):
			return fail(float64(λ), "a wavelength in m lies between 1e-8 and 1e-3: multiply by pyro.Micrometre")
		case j > 0 && !(λ > c.Wavelength[j-1]):
			return fail(float64(λ), "wavelengths must rise: sort the rows, and average those at one wavelength")
		case !(ε > 0 && ε <= 1):
			return fail(ε, "an emissivity lies above 0 and not above 1: is it in per cent, or a reflectance?")
		case c.Std != nil && !(c.Std[j] >= 0 && c.Std[j] <= ε):
			return fail(c.Std[j], "a standard uncertainty is not negative and not above the emissivity")
		}
	}
	return nil
}

// fitted is the likelihood with level and slope integrated out, and their values.
type fitted struct {
	log  float64
	coef *mat.VecDense
	cov  *mat.SymDense // of coef
}

// at evaluates the marginal likelihood at φ = ln(spread, length, roughness).
func (l *learner) at(φ [3]float64) fitted {
	spread, length, roughness := math.Exp(φ[0]), math.Exp(φ[1]), math.Exp(φ[2])
	p := l.columns
	normal, right := mat.NewSymDense(p, nil), mat.NewVecDense(p, nil)
	quadratic, logDet := 0.0, 0.0
	for _, g := range l.groups {
		n := len(g.x)
		cov := mat.NewSymDense(n, nil)
		for i := range n {
			for j := range i + 1 {
				v := spread * spread * matern((g.x[i]-g.x[j])/length)
				if i == j {
					v += roughness*roughness + g.variance[i]
				}
				cov.SetSym(i, j, v)
			}
		}
		var chol mat.Cholesky
		if !chol.Factorize(cov) {
			return fitted{log: math.Inf(-1)}
		}
		logDet += float64(len(g.y)) * chol.LogDet()
		all := mat.NewDense(n, p+len(g.y), nil)
		for i := range n {
			all.Set(i, 0, 1)
			if p > 1 {
				all.Set(i, 1, g.x[i]-l.centre)
			}
			for k, y := range g.y {
				all.Set(i, p+k, y[i])
			}
		}
		var solved, gram mat.Dense
		if err := chol.SolveTo(&solved, all); err != nil {
			return fitted{log: math.Inf(-1)}
		}
		gram.Mul(all.T(), &solved)
		for k := range g.y {
			quadratic += gram.At(p+k, p+k)
			for a := range p {
				right.SetVec(a, right.AtVec(a)+gram.At(a, p+k))
				for b := range a + 1 {
					normal.SetSym(a, b, normal.At(a, b)+gram.At(a, b))
				}
			}
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(normal) {
		return fitted{log: math.Inf(-1)}
	}
	f := fitted{coef: mat.NewVecDense(p, nil), cov: mat.NewSymDense(p, nil)}
	if chol.SolveVecTo(f.coef, right) != nil || chol.InverseTo(f.cov) != nil {
		return fitted{log: math.Inf(-1)}
	}
	quadratic -= mat.Dot(right, f.coef)
	f.log = -(quadratic + logDet + chol.LogDet() + float64(l.points-p)*math.Log(2*math.Pi)) / 2
	return f
}

func (l *learner) logLikelihood(φ [3]float64) float64 { return l.at(φ).log }

// maximise raises the likelihood over the entries of φ that are named, inside the bounds.
func (l *learner) maximise(φ [3]float64, free ...int) ([3]float64, float64) {
	put := func(x []float64) (q [3]float64, outside float64) {
		q = φ
		for a, k := range free {
			q[k] = min(max(x[a], l.lo[k]), l.hi[k])
			outside += math.Abs(x[a] - q[k])
		}
		return q, outside
	}
	x := make([]float64, len(free))
	for a, k := range free {
		x[a] = φ[k]
	}
	result, err := optimize.Minimize(optimize.Problem{Func: func(x []float64) float64 {
		q, outside := put(x)
		return -l.logLikelihood(q) + outside // the wall is level, but for this
	}}, x, &optimize.Settings{MajorIterations: 400, Converger: &optimize.FunctionConverge{Absolute: 1e-7, Iterations: 15}}, &optimize.NelderMead{SimplexSize: 0.3})
	before := l.logLikelihood(φ)
	if result == nil || err != nil && !(-result.F > before) {
		return φ, before
	}
	q, _ := put(result.X)
	return q, l.logLikelihood(q)
}

// starts is how many of the grid's points are followed.
const starts = 3

// best returns the φ of the greatest likelihood.
func (l *learner) best() [3]float64 {
	type start struct {
		φ   [3]float64
		log float64
	}
	var list []start
	const lengths = 6
	for i := range lengths {
		for _, spread := range []float64{0.05, 0.2, 0.6} {
			for _, roughness := range []float64{0.001, 0.01, 0.05} {
				φ := [3]float64{math.Log(spread), l.lo[1] + (l.hi[1]-l.lo[1])*(float64(i)+0.5)/lengths, math.Log(roughness)}
				list = append(list, start{φ, l.logLikelihood(φ)})
			}
		}
	}
	slices.SortStableFunc(list, func(a, b start) int {
		switch {
		case a.log > b.log:
			return -1
		case a.log < b.log:
			return 1
		}
		return 0
	})
	top, log := list[0].φ, math.Inf(-1)
	for _, s := range list[:starts] {
		φ, _ := l.maximise(s.φ, 0, 1, 2)
		if φ, v := l.maximise(φ, 0, 1, 2); v > log { // a second simplex, where the first has collapsed
			top, log = φ, v
		}
	}
	return top
}

// curvature returns the covariance of the entries of φ named, from the likelihood's curvature,
// and false where it has no maximum inside.
func (l *learner) curvature(φ [3]float64, free ...int) (*mat.SymDense, bool) {
	x := make([]float64, len(free))
	for a, k := range free {
		if φ[k] < l.lo[k]+atBoundMargin || φ[k] > l.hi[k]-atBoundMargin {
			return nil, false
		}
		x[a] = φ[k]
	}
	hess := mat.NewSymDense(len(free), nil)
	fd.Hessian(hess, func(x []float64) float64 {
		q := φ
		for a, k := range free {
			q[k] = x[a]
		}
		return -l.logLikelihood(q)
	}, x, &fd.Settings{Formula: fd.Central, Step: 0.02})
	var chol mat.Cholesky
	if !chol.Factorize(hess) {
		return nil, false
	}
	cov := mat.NewSymDense(len(free), nil)
	return cov, chol.InverseTo(cov) == nil
}

// describe fills the report's parameters.
func (l *learner) describe(r *LearnReport, φ [3]float64) {
	f := l.at(φ)
	r.Parameters = []LearnedParameter{{Name: "level", Value: math.Exp(f.coef.AtVec(0)), LogStd: math.Sqrt(f.cov.At(0, 0)), HasStd: true}}
	r.Centre = pyro.Wavelength(math.Exp(l.centre))
	if l.columns > 1 {
		r.Parameters = append(r.Parameters, LearnedParameter{Name: "slope", Value: f.coef.AtVec(1), Std: math.Sqrt(f.cov.At(1, 1)), HasStd: true})
	}
	var inside []int
	for k := range φ {
		if φ[k] > l.lo[k]+atBoundMargin && φ[k] < l.hi[k]-atBoundMargin {
			inside = append(inside, k)
		}
	}
	cov, ok := l.curvature(φ, inside...)
	for k, name := range []string{"spread", "length", "roughness"} {
		p := LearnedParameter{Name: name, Value: math.Exp(φ[k])}
		if a := slices.Index(inside, k); a < 0 {
			p.AtBound = true
		} else if ok {
			p.LogStd, p.HasStd = math.Sqrt(cov.At(a, a)), true
		}
		r.Parameters = append(r.Parameters, p)
	}
	for i := range r.Parameters {
		if p := &r.Parameters[i]; p.HasStd && p.Name != "slope" {
			p.Std = p.Value * p.LogStd
		}
	}
}

// components returns the mixture over lengths.
func (l *learner) components(r *LearnReport, φ [3]float64) []emissivity.Component {
	count := int(math.Ceil((l.hi[1]-l.lo[1])/math.Log(lengthRatio))) + 1
	type node struct {
		φ      [3]float64
		log, ν float64
	}
	var nodes []node
	most := math.Inf(-1)
	for i := range count {
		at := φ
		at[1] = l.lo[1] + (l.hi[1]-l.lo[1])*float64(i)/float64(count-1)
		q, log := l.maximise(at, 0)
		if math.IsInf(log, -1) {
			continue
		}
		variance := 0.5 // of ln spread: one degree of freedom
		if cov, ok := l.curvature(q, 0); ok {
			variance = min(cov.At(0, 0), variance)
		}
		log += math.Log(variance) / 2
		nodes = append(nodes, node{q, log, 1 / (2 * variance)})
		most = max(most, log)
	}
	total := 0.0
	for _, n := range nodes {
		total += math.Exp(n.log - most)
	}
	var list []emissivity.Component
	for _, n := range nodes {
		weight := math.Exp(n.log-most) / total
		if weight < leastWeight {
			continue
		}
		factor := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: n.ν}.Quantile(0.975) / distuv.UnitNormal.Quantile(0.975)
		f := l.at(n.φ)
		c := emissivity.Component{
			Weight: weight, Centre: pyro.Wavelength(math.Exp(l.centre)), Level: math.Exp(f.coef.AtVec(0)),
			Spread: factor * math.Sqrt(f.cov.At(0, 0)), Roughness: math.Exp(φ[2]),
			Smooth: emissivity.Term{Std: factor * math.Exp(n.φ[0]), Length: math.Exp(n.φ[1])},
		}
		if l.columns > 1 {
			// The wavelength at which level and slope are uncorrelated, inside the curves'.
			x := -f.cov.At(0, 1) / f.cov.At(1, 1)
			x = min(max(x, math.Log(float64(l.from))-l.centre), math.Log(float64(l.to))-l.centre)
			c.Slope, c.SlopeSpread = f.coef.AtVec(1), factor*math.Sqrt(f.cov.At(1, 1))
			c.Centre *= pyro.Wavelength(math.Exp(x))
			c.Level *= math.Exp(c.Slope * x)
			c.Spread = factor * math.Sqrt(max(f.cov.At(0, 0)+2*x*f.cov.At(0, 1)+x*x*f.cov.At(1, 1), 0))
		}
		list = append(list, c)
		r.Lengths = append(r.Lengths, LearnedLength{Length: c.Smooth.Length, Weight: weight, Spread: c.Smooth.Std, Freedom: n.ν, Factor: factor})
	}
	return list
}

func (l *learner) warn(r *LearnReport) {
	widest := 1.0
	for _, n := range r.Lengths {
		widest = max(widest, n.Factor)
	}
	switch {
	case r.Curves == 1:
		r.warn("one curve: how surfaces differ is inferred from how this one varies along the wavelength alone; the spread is widened by Student's factor, up to %.2g", widest)
	case r.Curves < fewCurves:
		r.warn("%d curves, fewer than %d: the spread is widened by Student's factor for so few, up to %.2g", r.Curves, fewCurves, widest)
	}
	for _, p := range r.Parameters {
		switch {
		case p.AtBound && p.Name == "length":
			r.warn("the curves don't fix the length: it ended at %.3g in ln λ", p.Value)
		case p.AtBound:
			r.warn("the %s ended at %.3g, where its search does", p.Name, p.Value)
		case !p.HasStd:
			r.warn("the likelihood has no curvature at the maximum: the %s has no standard uncertainty", p.Name)
		case p.Name == "level" && p.Value > 0.9:
			r.warn("a level of %.3g: that ε ≤ 1 is left out of the learning, so that level and spread come out a little low", p.Value)
		}
	}
}
