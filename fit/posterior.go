package fit

import (
	"fmt"
	"math"

	"candent/fit/internal/elementary"
)

// The posterior of 1/T = β for a process: with y(β) the logarithm of the emissivities that
// the readings ask for at β (logRatio), each component c of the mixture gives
//
//	p_c(β) ∝ share_c · N(y(β); µ_c, ΦA_cΦᵀ + RRᵀ + D) · P(ε ≤ 1 | readings, β, c)/P(ε ≤ 1 | c)
//
// with R the shared inputs and D the readings' variance and the roughness. y is a smooth
// function of β, so that over a panel of β it is a polynomial of degree tableDegree in the
// panel's coordinate z, to panelAccuracy; the quadratic form in N is then one of twice the
// degree whose coefficients are found once: a point of the density costs a few
// multiplications for each component. T is flat over the range beforehand, so that p(β) has
// the factor 1/β² beside that of a temperature known beforehand.

// processWork is a Work's scratch for a process.
type processWork struct {
	plan *processPlan

	logSignal, variance []float64
	logNet              []float64   // ln of what a reading has of the surface
	reflecting          bool        // the surface reflects something, or sees itself
	linear              *linearWork // in use where the reading is too weak for logarithms
	forceLinear         bool        // a test asks for it
	shared              []float64   // R, n×q
	boltzmann, rest     []float64
	y, dy, limit        []float64
	inverse             []float64   // 1/√(variance + least diagonal)
	nodes               [][]float64 // y at a panel's nodes, then its coefficients

	groups []groupWork
	comps  []compWork
	panels []panel
	count  int // panels in use

	density  []float64 // of each component at one point
	exponent []float64
	grid     []interval // first in z of their panels, then in β
	coarse   []interval
	stack    []interval
	offset   float64
	safe     float64 // for β below, ε ≤ 1 is certain
	mean     []float64
	cov      []float64
}

type groupWork struct {
	phi      []float64 // n×r, R appended
	r        int
	weight   []float64 // 1/(diagonal + variance)
	gram     []float64 // ΦᵀWΦ
	meanForm []float64 // ΦᵀWµ for each mean, r each
	meanNorm []float64 // µᵀWµ
	weighted []float64 // W·coefficient, scratch
	form     []float64 // ΦᵀWc_m, r×degrees
	norm     [degrees * degrees]float64
	cross    []float64 // µᵀWc_m for each mean
}

type compWork struct {
	lower   []float64 // Cholesky factor of A⁻¹ + ΦᵀWΦ, its diagonal inverted
	base    float64   // constant − ½ ln det
	offset  int       // into a panel's x
	cov     []float64 // of the curve at the plan's points, given the reading
	hasCov  bool
	through []float64
}

const (
	degrees  = tableDegree + 1
	qDegrees = 2*tableDegree + 1

	negligible    = -12  // ln of a density beside the greatest
	panelAccuracy = 1e-4 // of y, in standard deviations of a reading's logarithm
	firstAccuracy = 5e-7 // of y, where the mass is yet to be found
	maxPanels     = 24
	maxIntervals  = 768
)

// panel is an interval of β in which y is a polynomial of z = (β − middle)/half.
type panel struct {
	middle, half float64
	log          []float64 // ln of the density of each component before 1/β², qDegrees each
	x            []float64 // L⁻¹ΦᵀW(c − µ) of each component, r×degrees from its offset
	curve        []float64 // posterior mean of ln ε at the plan's points, degrees each
	hasCurve     []bool
	low          bool // no component's polynomial needs more than lowDegree
}

// interval is a piece of the posterior with the density at its ends and middle.
type interval struct {
	from, to   float64
	fa, fm, fb float64
	panel      int
}

var panelNodes, panelToPower = func() (nodes [degrees]float64, m [degrees][degrees]float64) {
	nodes = chebyshevNodes(&m)
	return nodes, m
}()

func (e *Estimator) newProcessWork() *processWork {
	plan := e.process
	f := func(n int) []float64 { return make([]float64, n) }
	p := &processWork{plan: plan, logSignal: f(e.n), logNet: f(e.n), variance: f(e.n), shared: f(e.n * e.q), boltzmann: f(e.n), rest: f(e.n), y: f(e.n), dy: f(e.n), limit: f(e.n), inverse: f(e.n),
		density: f(len(plan.comps)), exponent: f(len(plan.comps)), mean: f(plan.most), cov: f(plan.most * plan.most),
		groups: make([]groupWork, len(plan.groups)), comps: make([]compWork, len(plan.comps)), panels: make([]panel, maxPanels), grid: make([]interval, 0, maxIntervals), coarse: make([]interval, 0, maxIntervals), stack: make([]interval, 0, 64)}
	for range degrees {
		p.nodes = append(p.nodes, f(e.n))
	}
	for i, g := range plan.groups {
		r := g.r + e.q
		w := &p.groups[i]
		*w = groupWork{r: r, weight: f(e.n), gram: f(r * r), meanForm: f(r * len(plan.means)), meanNorm: f(len(plan.means)), weighted: f(e.n), form: f(r * degrees), cross: f(degrees * len(plan.means)), phi: g.phi}
		if e.q > 0 {
			w.phi = f(e.n * r)
			for j := range e.n {
				copy(w.phi[j*r:], g.phi[j*g.r:(j+1)*g.r])
			}
		}
	}
	size := 0
	for c := range p.comps {
		r, m := p.groups[plan.comps[c].group].r, len(plan.groups[plan.comps[c].group].points)
		p.comps[c] = compWork{lower: f(r * r), offset: size, cov: f(m * m), through: f(r * m)}
		size += r * degrees
	}
	for i := range p.panels {
		p.panels[i].log = f(len(plan.comps) * qDegrees)
		p.panels[i].x = f(size)
		p.panels[i].curve = f(len(plan.comps) * plan.most * degrees)
		p.panels[i].hasCurve = make([]bool, len(plan.comps))
	}
	return p
}

// factorise prepares what depends on the reading's uncertainties alone.
func (w *Work) factorise() error {
	e, p := w.e, w.process
	for i := range p.groups {
		g, plan := &p.groups[i], p.plan.groups[i]
		r := g.r
		for j, v := range p.variance {
			g.weight[j] = 1 / (v + plan.diagonal[j])
			for k := range e.q {
				g.phi[j*r+plan.r+k] = p.shared[j*e.q+k]
			}
		}
		g.formGram()
		clear(g.meanForm)
		for m, mean := range p.plan.means {
			out := g.meanForm[m*r : (m+1)*r]
			norm := 0.0
			for j, v := range g.weight {
				f := v * mean[j]
				norm += f * mean[j]
				for a, φ := range g.phi[j*r : (j+1)*r] {
					out[a] += f * φ
				}
			}
			g.meanNorm[m] = norm
		}
	}
	logWeight := 0.0
	last := -1
	for c := range p.comps {
		k, plan := &p.comps[c], &p.plan.comps[c]
		g := &p.groups[plan.group]
		if plan.group != last {
			last, logWeight = plan.group, 0
			product := 1.0
			for _, v := range g.weight {
				if product *= v; product > 1e200 {
					logWeight += math.Log(product)
					product = 1
				}
			}
			logWeight += math.Log(product)
		}
		r, inner := g.r, g.r-e.q
		l := k.lower
		product := 1.0
		logDet := 0.0
		for a := range r {
			row := l[a*r : a*r+a+1]
			for b := range row {
				v := g.gram[a*r+b]
				if a < inner {
					v += plan.precision[a*inner+b]
				} else if a == b {
					v++
				}
				lb := l[b*r : b*r+b+1]
				v -= dot(row[:b], lb)
				if b < a {
					row[b] = v * lb[b]
					continue
				}
				if !(v > 0) {
					return fmt.Errorf("%w: the readings leave a direction of %v unfixed", ErrReadings, p.plan.surface)
				}
				product *= v
				if product > 1e200 || product < 1e-200 {
					logDet += math.Log(product)
					product = 1
				}
				row[a] = 1 / math.Sqrt(v)
			}
		}
		logDet += math.Log(product)
		k.base = plan.constant + (logWeight-logDet)/2
		k.hasCov = false
	}
	return nil
}

// dot returns aᵀb over the length of a, in four independent sums.
func dot(a, b []float64) float64 {
	b = b[:len(a)]
	var s0, s1, s2, s3 float64
	i := 0
	for ; i+4 <= len(a); i += 4 {
		s0 += a[i] * b[i]
		s1 += a[i+1] * b[i+1]
		s2 += a[i+2] * b[i+2]
		s3 += a[i+3] * b[i+3]
	}
	for ; i < len(a); i++ {
		s0 += a[i] * b[i]
	}
	return (s0 + s1) + (s2 + s3)
}

// formGram forms the lower half of ΦᵀWΦ, four channels at a time.
func (g *groupWork) formGram() {
	clear(g.gram)
	r := g.r
	j := 0
	for ; j+4 <= len(g.weight); j += 4 {
		r0, r1, r2, r3 := g.phi[j*r:(j+1)*r], g.phi[(j+1)*r:(j+2)*r], g.phi[(j+2)*r:(j+3)*r], g.phi[(j+3)*r:(j+4)*r]
		w0, w1, w2, w3 := g.weight[j], g.weight[j+1], g.weight[j+2], g.weight[j+3]
		for a := range r {
			f0, f1, f2, f3 := w0*r0[a], w1*r1[a], w2*r2[a], w3*r3[a]
			out := g.gram[a*r : a*r+a+1]
			b0, b1, b2, b3 := r0[:len(out)], r1[:len(out)], r2[:len(out)], r3[:len(out)]
			for b := range out {
				out[b] += (f0*b0[b] + f1*b1[b]) + (f2*b2[b] + f3*b3[b])
			}
		}
	}
	for ; j < len(g.weight); j++ {
		row := g.phi[j*r : (j+1)*r]
		for a, φ := range row {
			f := g.weight[j] * φ
			out := g.gram[a*r : a*r+a+1]
			for b := range out {
				out[b] += f * row[b]
			}
		}
	}
}

// bracket returns the β between which the posterior has its mass: at the hot end every
// channel needs the least emissivity that counts, at the cold end one channel needs an
// emissivity beyond 1 by widest standard deviations of the readings; safe is where one comes
// as close below 1. y rises with β and is concave, so that Newton's steps end on the hot side
// of what they seek: safe is iterated, the hot end is one step and errs outwards, the cold end,
// close to safe, one step that errs by the square of that distance.
func (w *Work) bracket() (hot, cold float64) {
	e, p := w.e, w.process
	p.safe = math.Inf(1)
	w.fillLimit()
	if !p.plan.bounded {
		if p.reflecting {
			return w.bracketBySteps()
		}
		return e.hottest, e.coldest
	}
	if p.reflecting {
		return w.bracketBySteps()
	}
	β := math.Sqrt(e.hottest * e.coldest)
	for range 40 {
		w.logRatio(p.y, p.dy, β)
		step := math.Inf(1)
		for j, y := range p.y {
			step = min(step, (-p.limit[j]-y)/p.dy[j])
		}
		p.safe = min(max(β+step, e.hottest), e.coldest)
		if math.Abs(p.safe-β) <= 1e-3*β {
			break
		}
		β = p.safe
	}
	toHot, toCold := math.Inf(-1), math.Inf(1)
	for j, y := range p.y { // y is that at β, as good as at safe
		inverse := 1 / p.dy[j]
		toHot = max(toHot, (p.plan.lowest[j]-p.limit[j]-y)*inverse)
		toCold = min(toCold, (p.limit[j]-y)*inverse)
	}
	return max(β+toHot, e.hottest), min(β+toCold, e.coldest)
}

// bracketBySteps is bracket where walls bend y: it still rises with β, up to where they alone
// would be brighter, so that halving finds the ends.
func (w *Work) bracketBySteps() (hot, cold float64) {
	e, p := w.e, w.process
	from := func(reached func() bool) float64 { // the β from which on it holds
		lo, hi := e.hottest, e.coldest
		for range 50 {
			middle := (lo + hi) / 2
			w.logRatio(p.y, nil, middle)
			if reached() {
				hi = middle
			} else {
				lo = middle
			}
		}
		return lo
	}
	above := func(limit func(j int) float64) func() bool {
		return func() bool {
			for j, y := range p.y {
				if y > limit(j) {
					return true
				}
			}
			return false
		}
	}
	if !p.plan.bounded {
		p.safe = math.Inf(1)
		return e.hottest, from(above(func(int) float64 { return math.MaxFloat64 }))
	}
	hot = from(func() bool {
		for j, lowest := range p.plan.lowest {
			if p.y[j] < lowest-p.limit[j] {
				return false
			}
		}
		return true
	})
	p.safe = from(above(func(j int) float64 { return -p.limit[j] }))
	cold = from(above(func(j int) float64 { return p.limit[j] }))
	return hot, cold
}

// fillLimit writes widest standard deviations of each reading's logarithm, the roughness
// included, to limit, and the inverse of the least that may count to inverse.
func (w *Work) fillLimit() {
	e, p := w.e, w.process
	for j, v := range p.variance {
		least := math.Inf(1)
		for _, g := range p.plan.groups {
			least = min(least, g.diagonal[j])
		}
		p.inverse[j] = 1 / math.Sqrt(v+least)
		for _, r := range p.shared[j*e.q : (j+1)*e.q] {
			v += r * r
		}
		d := 0.0
		for _, g := range p.plan.groups {
			d = max(d, g.diagonal[j])
		}
		p.limit[j] = widest * math.Sqrt(v+d)
	}
}

// addPanel fits y over [hot, cold] and prepares the components' densities, halving the
// panel where a polynomial is off by more than panelAccuracy and by more than least.
func (w *Work) addPanel(hot, cold, least float64) error {
	e, p := w.e, w.process
	middle, half := (hot+cold)/2, (cold-hot)/2
	for i, z := range panelNodes {
		w.logRatio(p.nodes[i], nil, middle+half*z)
	}
	worst := 0.0
	for j := range e.n {
		var v, c [degrees]float64
		for i := range v {
			v[i] = p.nodes[i][j]
		}
		for m := range c {
			t := &panelToPower[m]
			c[m] = v[0]*t[0] + v[1]*t[1] + v[2]*t[2] + v[3]*t[3] + v[4]*t[4] + v[5]*t[5]
		}
		for m := range c {
			p.nodes[m][j] = c[m]
		}
		worst = max(worst, math.Abs(c[degrees-1])*min(p.inverse[j], panelAccuracy/least))
	}
	// The last coefficient of Chebyshev's series is 2⁻⁴ of the last power's; the next is
	// smaller still by the series' ratio, for which a tenth is allowed.
	if worst/160 > panelAccuracy && cold-hot > 1e-3*cold {
		if err := w.addPanel(hot, middle, least); err != nil {
			return err
		}
		return w.addPanel(middle, cold, least)
	}
	if p.count == len(p.panels) {
		return fmt.Errorf("%w: the posterior needs more than %d panels between %v and %v: narrow the range", ErrRange, maxPanels, e.assume.Range.Min, e.assume.Range.Max)
	}
	q := &p.panels[p.count]
	p.count++
	q.middle, q.half = middle, half
	for c := range q.hasCurve {
		q.hasCurve[c] = false
	}
	for i := range p.groups {
		p.groups[i].project(p)
	}
	q.low = true
	for c := range p.comps {
		w.quadraticForm(q, c)
		rest := 0.0
		for _, v := range q.log[c*qDegrees+lowDegree+1 : (c+1)*qDegrees] {
			rest += math.Abs(v)
		}
		q.low = q.low && rest < lowRest
	}
	return nil
}

// project forms ΦᵀWc_m, c_mᵀWc_m′ and µᵀWc_m of a panel's coefficients.
func (g *groupWork) project(p *processWork) {
	clear(g.form)
	r, n := g.r, len(g.weight)
	for j := 0; j < n; j += 2 {
		k := min(j+1, n-1)
		var c, d [degrees]float64 // of two channels; of none beyond the last
		for m := range c {
			c[m] = g.weight[j] * p.nodes[m][j]
			if k > j {
				d[m] = g.weight[k] * p.nodes[m][k]
			}
		}
		out, second := g.form, g.phi[k*r:(k+1)*r]
		for i, φ := range g.phi[j*r : (j+1)*r] {
			χ := second[i]
			o := (*[degrees]float64)(out)
			o[0] += c[0]*φ + d[0]*χ
			o[1] += c[1]*φ + d[1]*χ
			o[2] += c[2]*φ + d[2]*χ
			o[3] += c[3]*φ + d[3]*χ
			o[4] += c[4]*φ + d[4]*χ
			o[5] += c[5]*φ + d[5]*χ
			out = out[degrees:]
		}
	}
	for m := range degrees {
		for j, v := range g.weight {
			g.weighted[j] = v * p.nodes[m][j]
		}
		for k := range m + 1 {
			g.norm[m*degrees+k] = dot(p.nodes[k], g.weighted)
		}
		for i, mean := range p.plan.means {
			g.cross[i*degrees+m] = dot(mean, g.weighted)
		}
	}
}

// quadraticForm writes the polynomial of ln p_c over a panel, without P(ε ≤ 1).
func (w *Work) quadraticForm(q *panel, c int) {
	p := w.process
	k, plan := &p.comps[c], &p.plan.comps[c]
	g := &p.groups[plan.group]
	r := g.r
	meanForm := g.meanForm[plan.mean*r : (plan.mean+1)*r]
	all := q.x[k.offset : k.offset+r*degrees]
	var h [degrees * degrees]float64
	copy(h[:], g.norm[:])
	for m := range degrees {
		h[m*degrees] -= g.cross[plan.mean*degrees+m]
	}
	h[0] += g.meanNorm[plan.mean] - g.cross[plan.mean*degrees]
	for i := range r {
		v := *(*[degrees]float64)(g.form[i*degrees:])
		v[0] -= meanForm[i]
		row := k.lower[i*r : i*r+i+1]
		for b, f := range row[:i] {
			x := (*[degrees]float64)(all[b*degrees:])
			v[0] -= f * x[0]
			v[1] -= f * x[1]
			v[2] -= f * x[2]
			v[3] -= f * x[3]
			v[4] -= f * x[4]
			v[5] -= f * x[5]
		}
		d := row[i]
		x := (*[degrees]float64)(all[i*degrees:])
		for m := range x {
			x[m] = v[m] * d
		}
		for m, a := range x {
			for b := range m + 1 {
				h[m*degrees+b] -= a * x[b]
			}
		}
	}
	out := q.log[c*qDegrees : (c+1)*qDegrees]
	clear(out)
	for m := range degrees {
		out[2*m] -= h[m*degrees+m] / 2
		for b := range m {
			out[m+b] -= h[m*degrees+b]
		}
	}
	out[0] += k.base
}

// polynomial evaluates a component's polynomial.
func polynomial(c *[qDegrees]float64, z float64) float64 {
	return c[0] + z*(c[1]+z*(c[2]+z*(c[3]+z*(c[4]+z*(c[5]+z*(c[6]+z*(c[7]+z*(c[8]+z*(c[9]+z*c[10])))))))))
}

// lowDegree is that of the polynomials where the rest is below lowRest.
const (
	lowDegree = 5
	lowRest   = 1e-5
)

// lowPolynomial is polynomial up to lowDegree.
func lowPolynomial(c *[qDegrees]float64, z float64) float64 {
	return c[0] + z*(c[1]+z*(c[2]+z*(c[3]+z*(c[4]+z*c[5]))))
}

// highest returns the greatest value of a component's polynomial on [−1, 1], where it is, and
// the standard deviation that its curvature there has.
func highest(c *[qDegrees]float64) (z, value, width float64) {
	var slope, bend float64
	for range 30 {
		slope, bend = 0, 0
		v := 0.0
		for m := qDegrees - 1; m >= 0; m-- { // Horner, with both derivatives
			bend = bend*z + 2*slope
			slope = slope*z + v
			v = v*z + c[m]
		}
		value = v
		if !(bend < 0) { // no maximum near: the higher end
			a, b := polynomial(c, -1), polynomial(c, 1)
			if a > b {
				return -1, a, 1
			}
			return 1, b, 1
		}
		next := min(max(z-slope/bend, -1), 1)
		if math.Abs(next-z) < 1e-6 {
			break
		}
		z = next
	}
	width = 1 / math.Sqrt(-bend)
	if slope != 0 {
		width = min(width, 1/math.Abs(slope))
	}
	return z, value, width
}

// posteriorAt fills density with each component's at z of a panel, relative to offset, and returns
// their sum. The density is that of β.
func (w *Work) posteriorAt(q *panel, z float64) float64 {
	e, p := w.e, w.process
	β := q.middle + q.half*z
	shift := -2*math.Log(β) - p.offset
	if t := e.assume.Temperature; t.StdK > 0 {
		d := (1/β - float64(t.Value)) / t.StdK
		shift -= d * d / 2
	}
	most := math.Inf(-1)
	log := q.log
	for c := range p.exponent {
		k := (*[qDegrees]float64)(log)
		log = log[qDegrees:]
		v := lowPolynomial(k, z)
		if !q.low {
			v = polynomial(k, z)
		}
		v += shift
		if v > most {
			most = v
		}
		if v < -690 {
			v = -690
		}
		p.exponent[c] = v
	}
	elementary.ExpTo(p.density, p.exponent)
	sum := 0.0
	for c, v := range p.density {
		if β > p.safe {
			switch {
			case p.exponent[c] < most+negligible:
				v = 0
			case most > negligible:
				v *= w.belowOne(q, c, z)
			}
			p.density[c] = v
		}
		sum += v
	}
	return sum
}

// belowOne returns P(ε ≤ 1 | readings, β, c).
func (w *Work) belowOne(q *panel, c int, z float64) float64 {
	p := w.process
	m := len(p.plan.groups[p.plan.comps[c].group].points)
	k := &p.comps[c]
	if !k.hasCov {
		w.curveCovariance(c)
	}
	if !q.hasCurve[c] {
		w.curveMean(q, c)
	}
	near := false
	for a := range m {
		f := (*[degrees]float64)(q.curve[(c*p.plan.most+a)*degrees:])
		v := f[5]
		for i := 4; i >= 0; i-- {
			v = v*z + f[i]
		}
		p.mean[a] = v
		near = near || v > 0 || v*v < 36*k.cov[a*m+a]
	}
	if !near {
		return 1
	}
	copy(p.cov, k.cov)
	return orthant(p.mean, p.cov, m)
}

// curveCovariance fills a component's covariance of the curve at the plan's points, given
// the reading: φᵀ(A⁻¹ + ΦᵀWΦ)⁻¹φ.
func (w *Work) curveCovariance(c int) {
	p := w.process
	k, plan := &p.comps[c], &p.plan.comps[c]
	g := &p.groups[plan.group]
	r, inner := g.r, p.plan.groups[plan.group].r
	points := p.plan.groups[plan.group].points
	m := len(points)
	for a, j := range points {
		u := k.through[a*r : (a+1)*r]
		clear(u)
		copy(u, g.phi[j*r:j*r+inner])
		for i := range r {
			row := k.lower[i*r : i*r+i+1]
			v := u[i]
			for b, f := range row[:i] {
				v -= f * u[b]
			}
			u[i] = v * row[i]
		}
	}
	for a := range m {
		for b := range a + 1 {
			v := 0.0
			ub := k.through[b*r : (b+1)*r]
			for i, f := range k.through[a*r : (a+1)*r] {
				v += f * ub[i]
			}
			k.cov[a*m+b], k.cov[b*m+a] = v, v
		}
	}
	k.hasCov = true
}

// curveMean fills a component's posterior mean of the curve at the plan's points, as
// polynomials over a panel.
func (w *Work) curveMean(q *panel, c int) {
	p := w.process
	k, plan := &p.comps[c], &p.plan.comps[c]
	r := p.groups[plan.group].r
	for a, j := range p.plan.groups[plan.group].points {
		out := (*[degrees]float64)(q.curve[(c*p.plan.most+a)*degrees:])
		*out = [degrees]float64{p.plan.means[plan.mean][j]}
		for i, f := range k.through[a*r : (a+1)*r] {
			x := (*[degrees]float64)(q.x[k.offset+i*degrees:])
			for d := range out {
				out[d] += f * x[d]
			}
		}
	}
	q.hasCurve[c] = true
}
