package fit

import (
	"fmt"
	"math"

	"candent/emissivity"
	"candent/pyro/sightline"
)

// seen is what one reading's inputs make of a sight: the model of channel j is
//
//	m = a·S·E + b·(1 − E_b) + c
//
// with E_b the emissivity averaged over what is reflected, and each coefficient moving with
// the shared unknowns η by an effect.
type seen struct {
	value   []float64 // of the inputs
	own     nominalOptics
	optics  *nominalOptics
	a, b, c []float64
	gain    []float64 // gain × exposure
	coord   []float64 // of E_b
	spread  []spread
	effect  []effect // n×q
	self    float64  // view factor of the surface to itself, and its change by each η
	bySelf  []float64
	shape   float64 // spread of the temperature, K, and its standard uncertainty
	byShape float64

	black, rate, mean []float64 // of one source
	width             []spread
}

// effect is what η by one changes: a by its first, and relative to a by β·rate·(c1 + c2β); b
// and c to second order.
type effect struct{ a, c1, c2, b, bb, c, cc float64 }

func (w *Work) newSeen() {
	e := w.e
	s := e.sight
	f := func(n int) []float64 { return make([]float64, n) }
	v := &w.seen
	v.value = f(len(s.inputs))
	v.optics = &s.at
	if s.moving {
		v.own.optics = newOptics(e.n, len(s.sources))
		for range s.optics {
			v.own.by = append(v.own.by, newOptics(e.n, len(s.sources)))
		}
		v.optics = &v.own
	}
	v.a, v.b, v.c, v.gain, v.coord = f(e.n), f(e.n), f(e.n), f(e.n), f(e.n)
	v.effect, v.bySelf = make([]effect, e.n*e.q), f(e.q)
	v.black, v.rate, v.mean = f(e.n), f(e.n), f(e.n)
	if !e.lines {
		v.spread, v.width = make([]spread, e.n), make([]spread, e.n)
	}
}

// look takes in the inputs of a reading.
func (w *Work) look(values []float64) error {
	e, v := w.e, &w.seen
	s := e.sight
	next := 0
	for k := range s.inputs {
		in := &s.inputs[k]
		v.value[k] = in.Value
		if !in.PerReading || values == nil {
			continue
		}
		if next >= len(values) {
			return fmt.Errorf("%w: %d values for the inputs that change per reading: Estimator.PerReading lists them", ErrReadings, len(values))
		}
		v.value[k] = values[next]
		if err := in.vet(values[next]); err != nil {
			return err
		}
		next++
	}
	if values != nil && next != len(values) {
		return fmt.Errorf("%w: %d values for %d inputs that change per reading: Estimator.PerReading lists them", ErrReadings, len(values), next)
	}
	if s.moving {
		e.lookThrough(&v.own, v.value)
	}
	for j := range s.channel {
		c := &s.channel[j]
		v.gain[j] = 1
		if c.gain >= 0 {
			v.gain[j] = v.value[c.gain]
		}
		if c.exposure >= 0 {
			v.gain[j] *= v.value[c.exposure]
		}
	}
	return nil
}

// open takes in the declared values of the inputs, as before any reading.
func (w *Work) open() {
	if !w.sighted {
		return
	}
	if err := w.look(nil); err != nil {
		panic("fit: open: " + err.Error()) // declared values were vetted by New
	}
	w.shine(0)
}

// vet refuses a value that an input can't have.
func (in *input) vet(value float64) error {
	bad := func(advice string) error { return &InputError{in.Name, value, advice} }
	switch {
	case math.IsNaN(value) || math.IsInf(value, 0):
		return bad("it must be finite")
	case in.kind == temperature && sightline.CheckTemperature(in.Name, value) != nil:
		return bad(fmt.Sprintf("a temperature lies between %v and %v: is it in °C?", sightline.Coldest, sightline.Hottest))
	case in.kind == fraction && !(value >= 0 && value <= 1):
		return bad("it is a fraction between 0 and 1, not per cent")
	case in.kind == positive && !(value > 0):
		return bad("it must be positive")
	}
	return nil
}

// shine adds up what the sources give, and what each η changes. mean is the channels' mean
// signal above the dark level, of which stray light is a fraction.
func (w *Work) shine(mean float64) {
	e, v := w.e, &w.seen
	s := e.sight
	o := v.optics
	q := e.q
	clear(v.effect)
	clear(v.bySelf)
	copy(v.a, o.a)
	copy(v.b, o.known)
	copy(v.c, o.add)
	v.self = o.self
	clear(v.spread)
	for c, k := range s.optics {
		col, by := s.inputs[k].column, &o.by[c]
		v.bySelf[col] = by.self
		for j := range e.n {
			f := &v.effect[j*q+col]
			f.a += by.a[j]
			f.b += by.known[j]
			f.c += by.add[j]
		}
	}
	if !e.lines {
		for j, known := range v.b { // a known radiance is taken to have the surface's own spectrum over the band
			v.coord[j] = known * e.coord[j]
		}
	}
	for x := range s.sources {
		w.addSource(x)
	}
	if !e.lines {
		w.finishMoments()
	}
	v.shape, v.byShape = 0, 0
	if s.spread >= 0 {
		v.shape = v.value[s.spread]
		if k := s.inputs[s.spread].column; k >= 0 {
			v.byShape = s.columns[k].std
		}
	}
	w.addDetectors(mean)
	first := q - len(e.assume.Shared)
	for k := range e.assume.Shared {
		for j := range e.n {
			f := &v.effect[j*q+first+k]
			r := e.relative[j*len(e.assume.Shared)+k]
			f.a += r * v.a[j]
			f.b += r * v.b[j]
			f.c += r*v.c[j] + e.additive[j*len(e.assume.Shared)+k]
		}
	}
}

// addSource adds one source at its temperature.
func (w *Work) addSource(x int) {
	e, v := w.e, &w.seen
	s := e.sight
	src := &s.sources[x]
	q, T := e.q, v.value[src.temperature]
	β := 1 / T
	e.radiate(β, src.table, v.black, v.rate, v.mean, v.width)
	weight := v.optics.weight[x*e.n : (x+1)*e.n]
	col := s.inputs[src.temperature].column
	std := 0.0
	if col >= 0 {
		std = s.columns[col].std
	}
	for j, S := range v.black {
		f := weight[j] * S
		rate := v.rate[j]
		if src.reflected {
			v.b[j] += f
			if v.spread != nil {
				μ, m := v.mean[j], &v.spread[j]
				v.coord[j] += f * μ
				m.v += f * (v.width[j].v + μ*μ)
				m.s += f * (v.width[j].s + 3*μ*v.width[j].v + μ*μ*μ)
			}
		} else {
			v.c[j] += f
		}
		add := func(k int, first, second float64) {
			to := &v.effect[j*q+k]
			if src.reflected {
				to.b += first
				to.bb += second
			} else {
				to.c += first
				to.cc += second
			}
		}
		if col >= 0 { // S(T + δ) to second order, R = d ln S/dβ
			add(col, -f*β*β*rate*std, f*std*std*β*β*β*(β*(2*rate*rate+e.rate[j]*rate)+2*rate))
		}
		for _, t := range s.channel[j].shift {
			add(t.column, f*(t.c0+β*rate*(t.c1+t.c2*β)), 0)
		}
		for c, k := range s.optics {
			add(s.inputs[k].column, v.optics.by[c].weight[x*e.n+j]*S, 0)
		}
	}
}

// finishMoments turns sums over what is reflected into the mean coordinate and central
// moments about it.
func (w *Work) finishMoments() {
	v := &w.seen
	for j, b := range v.b {
		m := &v.spread[j]
		if !(b > 0) {
			*m, v.coord[j] = spread{}, w.e.coord[j]
			continue
		}
		v.coord[j] /= b
		μ := v.coord[j]
		second, third := m.v/b, m.s/b
		*m = spread{v: second - μ*μ, s: third - 3*μ*second + 2*μ*μ*μ}
	}
}

// addDetectors adds what dark levels, gains, exposures, shifts and stray light do.
func (w *Work) addDetectors(mean float64) {
	e, v := w.e, &w.seen
	s := e.sight
	q := e.q
	last, r := -1, 0.0 // most channels share their inputs
	relative := func(j, k int) {
		if k < 0 || s.inputs[k].column < 0 {
			return
		}
		col := s.inputs[k].column
		if k != last {
			last, r = k, s.columns[col].std/v.value[k]
		}
		f := &v.effect[j*q+col]
		f.a += r * v.a[j]
		f.b += r * v.b[j]
		f.c += r * v.c[j]
	}
	for j := range s.channel {
		c := &s.channel[j]
		relative(j, c.gain)
		relative(j, c.exposure)
		for _, t := range c.shift {
			f := &v.effect[j*q+t.column]
			f.a += t.c0 * v.a[j]
			f.c1 += t.c1
			f.c2 += t.c2
		}
		if c.dark >= 0 {
			if col := s.inputs[c.dark].column; col >= 0 {
				v.effect[j*q+col].c += s.columns[col].std / v.gain[j]
			}
		}
		if s.stray >= 0 {
			v.c[j] += v.value[s.stray] * mean / v.gain[j]
			if col := s.inputs[s.stray].column; col >= 0 {
				v.effect[j*q+col].c += s.columns[col].std * mean / v.gain[j]
			}
		}
	}
}

// linearised takes a signal to the unit of radiance, net of the dark level; rounding is the
// variance that its resolution brings, a step's rectangular distribution.
func (w *Work) linearised(j int, signal, std float64) (value, u, rounding float64) {
	v := &w.seen
	c := &w.e.sight.channel[j]
	slope := 1.0
	if c.Linearity != nil {
		signal, slope = c.Linearity.True(signal)
	}
	if c.dark >= 0 {
		signal -= v.value[c.dark]
	}
	f := slope / v.gain[j]
	rounding = c.Resolution * c.Resolution / 12 * f * f
	return signal / v.gain[j], math.Sqrt(std*std*f*f + rounding), rounding
}

// evaluateSight is evaluate's loop for models with a sight or with shared unknowns.
func (w *Work) evaluateSight(β float64, θ, η []float64) {
	e, v := w.e, &w.seen
	size, p, q := e.size(), e.p, e.q
	shape, self := v.shape, v.self
	if k := e.spreadColumn(); k >= 0 {
		shape += v.byShape * η[k]
	}
	for k, h := range η {
		self += v.bySelf[k] * h
	}
	wide := !e.lines && e.table.functions != tableMean
	gradB := w.modelRoom[:p]
	for j := range e.n {
		row := w.jac[j*size : (j+1)*size]
		S, R := w.black[j], w.rate[j]
		k0 := e.rate[j]
		bend := R * (R + k0) // dR/dβ, exact for a line
		bySpread := 0.0      // ∂S/∂shape, at S before it
		if s := shape; s != 0 || v.byShape != 0 {
			β2 := β * β
			d := β2 * (β2*R*(2*R+k0) + 2*β*R) // ∂²S/∂T² / S
			dd := 4*β*β2*R*(2*R+k0) + β2*β2*(4*R+k0)*bend + 6*β2*R + 2*β*β2*bend
			f := 1 + s*s*d/2
			bySpread = S * s * d
			S *= f
			R += s * s * dd / 2 / f
		}
		var ε, dε, εb float64
		if e.model != nil {
			ε, dε, εb = w.modelRow(j, β, row[1:1+p], gradB, θ)
		} else if !wide {
			d := w.coord[j]
			ε, dε = e.curve(θ, d)
			f := 1.0
			if e.link == emissivity.Exp {
				f = ε
			}
			for k := range p {
				row[1+k] = f
				f *= d
			}
			if e.lines {
				dε, εb = 0, ε
				copy(gradB, row[1:1+p])
			} else {
				dε *= w.dcoord[j]
				db := v.coord[j]
				εb, _ = e.curve(θ, db)
				f := 1.0
				if e.link == emissivity.Exp {
					f = εb
				}
				for k := range gradB {
					gradB[k] = f
					f *= db
				}
			}
		} else {
			ε, dε = e.overBand(row[1:1+p], θ, w.coord[j], w.dcoord[j], w.spread[j])
			εb, _ = e.overBand(gradB, θ, v.coord[j], 0, v.spread[j])
		}
		E, slope, bySelf := apparent(ε, self)
		Eb, slopeB, bySelfB := apparent(εb, self)
		a, b, c, da := v.a[j], v.b[j], v.c[j], 0.0
		effects := v.effect[j*q : (j+1)*q]
		for k, h := range η {
			f := &effects[k]
			t := β * R * (f.c1 + f.c2*β)
			a += h * (f.a + v.a[j]*t)
			da += h * v.a[j] * ((R+β*bend)*(f.c1+f.c2*β) + β*R*f.c2)
			b += h * (f.b + h/2*f.bb)
			c += h * (f.c + h/2*f.cc)
		}
		for k := range p {
			row[1+k] = a*S*slope*row[1+k] - b*slopeB*gradB[k]
		}
		row[0] = a*S*R*E + da*S*E + a*S*slope*dε
		for k, h := range η {
			f := &effects[k]
			row[1+p+k] = S*E*(f.a+v.a[j]*β*R*(f.c1+f.c2*β)) + (1-Eb)*(f.b+h*f.bb) + f.c + h*f.cc +
				v.bySelf[k]*(a*S*bySelf-b*bySelfB)
		}
		if k := e.spreadColumn(); k >= 0 {
			row[1+p+k] += a * bySpread * v.byShape * E
		}
		w.model[j] = a*S*E + b*(1-Eb) + c
	}
}

// apparent is the emissivity of a surface that sees its like with view factor F,
// E = ε/(1 − (1−ε)F), with ∂E/∂ε and ∂E/∂F.
func apparent(ε, f float64) (E, byε, byF float64) {
	if f == 0 {
		return ε, 1, ε * (1 - ε)
	}
	n := 1 / (1 - (1-ε)*f)
	return ε * n, (1 - f) * n * n, ε * (1 - ε) * n * n
}

func (e *Estimator) spreadColumn() int {
	if e.sight.spread < 0 {
		return -1
	}
	return e.sight.inputs[e.sight.spread].column
}

// clearlyTooBright is χ² at the cold end of the range above which no temperature fits.
const clearlyTooBright = 25

// tooBright returns a *WallsError where the cold end of the range is the best temperature,
// and the readings are still below the model.
func (w *Work) tooBright(b basin) error {
	e := w.e
	if !w.sighted || b.beta != e.coldest || b.chi2 < clearlyTooBright || b.chi2 < 5*float64(e.n) {
		return nil
	}
	worst, at := 0.0, -1
	for j, m := range w.model {
		z := (m - w.signal[j]) / math.Sqrt(w.variance(j, m))
		if z < 0 {
			return nil
		}
		if z > worst {
			worst, at = z, j
		}
	}
	if at < 0 {
		return nil
	}
	v := &w.seen
	return &WallsError{e.used[at], v.b[at] + v.c[at], w.signal[at]}
}

// surface takes channel j's reading to what it says of the surface at the last blackbody:
// the apparent emissivity E = (s − b − c)/(aS − b), and ln E's sensitivity: s times this is
// the relative size of the surface's part. ok is false where the surface doesn't matter.
func (w *Work) surface(j int) (E, net float64, ok bool) {
	s, S := w.signal[j], w.black[j]
	if !w.sighted {
		return s / S, s, s > 0 && S > 0
	}
	v := &w.seen
	net = s - v.b[j] - v.c[j]
	lift := v.a[j]*S - v.b[j]
	E = net / lift
	if f := v.self; f > 0 { // back from apparent
		E = E * (1 - f) / (1 - E*f)
	}
	return E, net, E > 0 && !math.IsInf(E, 1)
}

// InputError names an input of a reading that can't have its value. It wraps ErrReadings.
type InputError struct {
	Name   string
	Value  float64
	Advice string
}

func (e *InputError) Error() string {
	return fmt.Sprintf("fit: readings: input %q = %g: %s", e.Name, e.Value, e.Advice)
}

func (e *InputError) Unwrap() error { return ErrReadings }
