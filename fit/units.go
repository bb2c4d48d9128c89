package fit

// An emissivity outside these is no surface's: bright metals reach 0.005, and a
// calibration is not off by a factor of thirty.
const (
	leastLevel = 0.003
	mostLevel  = 30
)

// checkUnit estimates the reading with its level declared relative and asks whether the
// level that comes out is one that a surface can have. It is silent where the shape alone
// does not fix the temperature.
func (e *Estimator) checkUnit(r Readings) error {
	if e.shape == nil {
		return nil
	}
	w, res := e.shape.NewWork(), e.shape.NewResult()
	if e.shape.EstimateTo(res, w, r) != nil || !res.hasCov || len(res.basins) != 1 || res.contradicted() {
		return nil
	}
	level := 0.0
	for j := range e.n {
		ε, _ := e.curve(res.psi[:e.p], e.coord[j])
		level += ε / float64(e.n)
	}
	_, std, hasStd, ok := res.Emissivity(e.used[e.n/2])
	if !ok || !hasStd || std > 0.3*level {
		return nil
	}
	if level < leastLevel || level > mostLevel {
		return &UnitError{Level: level, Temperature: 1 / res.beta}
	}
	return nil
}

// compileShape compiles the same assumptions with a relative level, where that can say
// something: an absolute level about which nothing else is known.
func (e *Estimator) compileShape() (*Estimator, error) {
	if e.model != nil || !e.sight.clear || e.family.IsRelative() || len(e.data) > 0 || e.deficient != "" || e.n < e.p+2 ||
		e.assume.Temperature != (TemperaturePrior{}) {
		return nil, nil
	}
	for _, fixed := range e.fixed {
		if fixed {
			return nil, nil
		}
	}
	a := e.assume
	a.Emissivity = e.family.Relative()
	return New(e.bands, a)
}
