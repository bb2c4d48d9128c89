package fit

import (
	"math"
	"slices"

	"candent/pyro"
)

// State says what a number rests on.
type State int

const (
	// Undetermined: the interval is open on both sides.
	Undetermined State = iota
	// Bounded: the interval is closed on one side only (or on both with no best value
	// inside, where the readings can't fix the temperature).
	Bounded
	// Determined: the interval at the stated probability closes on both sides inside the
	// temperature range.
	Determined
)

func (s State) String() string { return [...]string{"undetermined", "bounded", "determined"}[s] }

// Result is what one reading tells. Its accessors return a state or an ok beside each
// number; a number whose state says that there is none is 0 and means nothing.
type Result struct {
	e *Estimator

	basins    []basin
	beta      float64
	chi2      float64
	dof       int
	psi       []float64
	cov       []float64 // of (β, ψ)
	hasCov    bool
	fitted    bool
	described bool // model and sigma are filled

	signal, model, sigma []float64 // channels used; the latter two after DiagnoseTo

	hasInterval bool
	probability float64
	limit       float64
	hot, cold   end // in β: the hot end is the smaller

	// Of u²(T): readings, their rounding, temperature prior, data, shared unknowns; and what
	// one standard uncertainty does to β, with its sign (0 for the first two).
	share, effect []float64
	notes         []string

	posterior   *posterior   // of a process; or nil
	discrepancy *Discrepancy // of a family that the readings contradict; or nil
}

// NewResult returns a result for the estimator to write to.
func (e *Estimator) NewResult() *Result {
	f := func(n int) []float64 { return make([]float64, n) }
	size := e.size()
	var post *posterior
	if e.process != nil {
		post = e.newPosterior()
	}
	return &Result{e: e, posterior: post, basins: make([]basin, 0, maxBasins), psi: f(e.p + e.q), cov: f(size * size),
		signal: f(e.n), model: f(e.n), sigma: f(e.n), share: f(firstDatum + len(e.data) + e.q), effect: f(firstDatum + len(e.data) + e.q)}
}

func (r *Result) reset(e *Estimator) {
	r.e = e
	r.basins, r.notes = r.basins[:0], r.notes[:0]
	r.hasCov, r.fitted, r.described, r.hasInterval = false, false, false, false
	r.hot, r.cold = end{}, end{}
	r.discrepancy = nil
	r.limit = math.Inf(-1)
	clear(r.share)
	clear(r.effect)
	free := e.p
	for _, fixed := range e.fixed {
		if fixed {
			free--
		}
	}
	r.dof = e.n + len(e.data) - free
	if t := e.assume.Temperature; t.Value == 0 {
		r.dof--
	}
}

// inside returns how many basins lie inside the interval's Δχ²; the lowest comes first.
func (r *Result) inside() int {
	n := 0
	for _, b := range r.basins {
		if b.chi2 <= r.limit || n == 0 {
			n++
		}
	}
	return n
}

// State returns how far the temperature is determined. Before IntervalTo it is provisional:
// Determined where there is one basin with a covariance.
func (r *Result) State() State {
	if !r.hasInterval {
		if r.hasCov && len(r.basins) == 1 {
			return Determined
		}
		return Undetermined
	}
	s := Undetermined
	if !r.hot.open {
		s++
	}
	if !r.cold.open {
		s++
	}
	if len(r.basins) == 0 {
		s = min(s, Bounded)
	}
	return s
}

// Temperature returns the temperature of the lowest basin where the state is Determined.
// In any other state there is none, and the interval says what is known.
func (r *Result) Temperature() (pyro.Temperature, State) {
	s := r.State()
	if s != Determined {
		return 0, s
	}
	return pyro.Temperature(1 / r.basins[0].beta), s
}

// Uncertainty returns the standard uncertainty of the temperature in K. There is none
// (ok false) where the state is not Determined, where several basins lie inside the
// interval, or where a bound of the emissivity is active: there the interval speaks.
func (r *Result) Uncertainty() (stdK float64, ok bool) {
	if r.State() != Determined || !r.hasCov || r.inside() != 1 {
		return 0, false
	}
	return math.Sqrt(r.cov[0]) / (r.beta * r.beta), true
}

// Interval is a profile interval of the temperature. An open end is where the searched
// range, not the readings, ended it.
type Interval struct {
	Probability       float64
	Low, High         pyro.Temperature
	LowOpen, HighOpen bool
}

// Interval returns the interval that IntervalTo found; ok is false before that.
func (r *Result) Interval() (Interval, bool) {
	if !r.hasInterval {
		return Interval{}, false
	}
	return Interval{r.probability, pyro.Temperature(1 / r.cold.beta), pyro.Temperature(1 / r.hot.beta), r.cold.open, r.hot.open}, true
}

// Basins returns the temperatures of the minima of χ² that lie inside the interval, the
// lowest χ² first.
func (r *Result) Basins() []pyro.Temperature {
	var t []pyro.Temperature
	if len(r.basins) == 0 {
		return t
	}
	for _, b := range r.basins[:r.inside()] {
		t = append(t, pyro.Temperature(1/b.beta))
	}
	return t
}

// Relative reports whether the curve is an amplitude, not an emissivity.
func (r *Result) Relative() bool {
	if p := r.e.process; p != nil {
		return p.surface.IsRelative()
	}
	return r.e.family.IsRelative()
}

// Emissivity returns the fitted emissivity (the amplitude, where the level is relative)
// at the mean wavelength of band i, and its standard uncertainty. ok is false where the state is not Determined,
// or the band is masked; std is 0 with hasStd false where there is no covariance.
func (r *Result) Emissivity(i int) (value, std float64, hasStd, ok bool) {
	if r.State() != Determined || !r.fitted {
		return 0, 0, false, false
	}
	e := r.e
	j := slices.Index(e.used, i)
	if j < 0 {
		return 0, 0, false, false
	}
	if r.posterior != nil {
		return r.posteriorEmissivity(j)
	}
	var room [maxModel]float64
	grad := room[:e.p]
	value = r.curveAt(j, grad)
	if !r.hasCov || r.inside() != 1 {
		return value, 0, false, true
	}
	sum, size := 0.0, e.size()
	for a := range e.p {
		for b := range e.p {
			sum += grad[a] * grad[b] * r.cov[(1+a)*size+1+b]
		}
	}
	return value, math.Sqrt(max(sum, 0)), true, true
}

// Model returns the reading that the estimate explains in band i, and the standard
// deviation that the noise has there; ok is false before DiagnoseTo and for masked bands.
func (r *Result) Model(i int) (reading, std float64, ok bool) {
	j := slices.Index(r.e.used, i)
	if j < 0 || !r.described {
		return 0, 0, false
	}
	return r.model[j], r.sigma[j], true
}

// ParameterState says what a parameter's value rests on.
type ParameterState int

const (
	ParameterUndetermined ParameterState = iota // there is no value
	ParameterDetermined                         // a value with its standard uncertainty
	ParameterFixed                              // held at its value
	ParameterAtBound                            // a bound of the emissivity is active: a value, no uncertainty
	ParameterAmbiguous                          // several basins: that of the lowest, no uncertainty
)

func (s ParameterState) String() string {
	return [...]string{"undetermined", "determined", "fixed", "at bound", "ambiguous"}[s]
}

// Parameter returns the value and the standard uncertainty of a parameter of the family by
// its name; the uncertainty is 0 and means nothing unless the state is ParameterDetermined.
func (r *Result) Parameter(name string) (value, std float64, state ParameterState) {
	k := slices.Index(r.e.parameterNames(), name)
	if k < 0 || r.State() != Determined || !r.fitted || r.posterior != nil {
		return 0, 0, ParameterUndetermined
	}
	value, scale := r.psi[k], 1.0
	if m := r.e.model; m != nil {
		value, scale = m.physical(k, value), m.parameters[k].Hi-m.parameters[k].Lo
	}
	switch {
	case r.e.fixed[k]:
		return value, 0, ParameterFixed
	case r.basins[0].atBound:
		return value, 0, ParameterAtBound
	case r.inside() != 1:
		return value, 0, ParameterAmbiguous
	case !r.hasCov:
		return 0, 0, ParameterUndetermined
	}
	at := (1 + k) * (r.e.size() + 1)
	return value, scale * math.Sqrt(max(r.cov[at], 0)), ParameterDetermined
}

// ChiSquared returns the minimum of χ² and its degrees of freedom.
func (r *Result) ChiSquared() (chi2 float64, degreesOfFreedom int) { return r.chi2, r.dof }

// Undetermined says in words what the readings can't tell, or "".
func (r *Result) Undetermined() string { return r.e.deficient }

// Notes returns what the user should know beside the numbers.
func (r *Result) Notes() []string { return append([]string(nil), r.notes...) }
