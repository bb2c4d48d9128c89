package fit

import (
	"fmt"
	"math"
	"slices"

	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
)

// add asks for a band beside those there are, with the reading that the estimate predicts.
func (q *inquiry) add(b *pyro.Band) {
	name := fmt.Sprintf("%.4g", b.Mean())
	if lo, hi := b.Edges(); lo != hi {
		name = "about " + name
	}
	h := Help{Kind: AddBand, Name: name, Action: "a further band at " + name, Note: "read as the fitted emissivity predicts"}
	if q.stand != "" {
		h.Note += ", " + q.stand
	}
	if q.at == nil {
		q.note("%s: no answer: no estimate says what it would read", h.Action)
		return
	}
	a, r, err := q.extended(b)
	if err != nil {
		q.note("%s: no answer: %v", h.Action, err)
		return
	}
	q.try(h, append(slices.Clone(q.e.bands), b), a, r)
}

// extended returns assumptions and reading with a further band, last.
func (q *inquiry) extended(b *pyro.Band) (Assume, Readings, error) {
	e := q.e
	a, r := q.assume(), q.r
	if masked(b, a.Masks) {
		return a, r, fmt.Errorf("%w: a mask leaves it out", ErrAssume)
	}
	for _, z := range a.Surroundings.Zones {
		if z.Reading != nil {
			return a, r, fmt.Errorf("%w: %s is read by a second instrument, in the bands there are", ErrAssume, z.Name)
		}
	}
	w := e.NewWork()
	if err := w.load(r); err != nil {
		return a, r, err
	}
	rel, level := w.meanNoise()
	if a.Detectors != nil {
		d, err := e.detectorLike(b)
		if err != nil {
			return a, r, err
		}
		a.Detectors = append(slices.Clone(a.Detectors), d)
	}
	last := len(e.bands)
	r.Signal = append(slices.Clone(r.Signal), 0)
	if r.Std != nil {
		r.Std = append(slices.Clone(r.Std), 0)
	}
	additive, err := q.meanAdditive()
	if err != nil {
		return a, r, err
	}
	a.Shared = slices.Clone(a.Shared)
	for k := range a.Shared {
		a.Shared[k].Relative = withMean(a.Shared[k].Relative, e.used)
		a.Shared[k].Additive = withMean(a.Shared[k].Additive, e.used)
	}
	// What is known of the band goes by its signal: noise, shared effects, and the stray light that
	// it adds to the mean.
	set := func(p prediction) {
		r.Signal[last] = p.raw
		std := rel * math.Abs(p.net)
		if r.Std != nil {
			r.Std[last] = std
		}
		if e.noisy {
			a.Detectors[last].Noise.Constant = std * std
		}
		a.Noise = e.assume.Noise.extended(last, std*std)
		for k, s := range a.Shared {
			if s.Additive != nil {
				s.Additive[last] = additive[k] * p.raw
			}
		}
	}
	set(prediction{level, level})
	for range 3 {
		p, err := q.predicted(b, a, r)
		if err != nil {
			return a, r, err
		}
		set(p)
	}
	return a, r, nil
}

// meanAdditive returns the mean of each shared input's additive effect beside the signal.
func (q *inquiry) meanAdditive() ([]float64, error) {
	e := q.e
	means := make([]float64, len(e.assume.Shared))
	for k, s := range e.assume.Shared {
		if s.Additive == nil {
			continue
		}
		for _, i := range e.used {
			means[k] += s.Additive[i] / q.r.Signal[i] / float64(e.n)
		}
		if math.IsNaN(means[k]) || math.IsInf(means[k], 0) {
			return nil, fmt.Errorf("%w: a signal of 0 doesn't say what %s would do to it", ErrAssume, s.Name)
		}
	}
	return means, nil
}

// meanNoise returns the mean relative noise of the channels, and the mean size of their signals
// above dark and in the signals' unit.
func (w *Work) meanNoise() (rel, level float64) {
	e := w.e
	for j, s := range w.signal {
		gain := 1.0
		if w.sighted {
			gain = w.seen.gain[j]
		}
		rel += math.Sqrt(w.variance(j, s)) / math.Abs(s) / float64(e.n)
		level += math.Abs(s) * gain / float64(e.n)
	}
	return rel, level
}

// extended returns the noise of one more channel, whose variance only a covariance needs.
func (n Noise) extended(channels int, variance float64) Noise {
	if n.kind != covariance {
		return n
	}
	cov := make([]float64, 0, (channels+1)*(channels+1))
	for i := range channels {
		cov = append(append(cov, n.cov[i*channels:(i+1)*channels]...), 0)
	}
	n.cov = append(append(cov, make([]float64, channels)...), variance)
	return n
}

// withMean appends the mean of the elements used; nil stays nil.
func withMean(v []float64, used []int) []float64 {
	if v == nil {
		return nil
	}
	mean := 0.0
	for _, i := range used {
		mean += v[i] / float64(len(used))
	}
	return append(slices.Clone(v), mean)
}

// detectorLike returns a detector for a further band: inputs that all detectors share are its
// too; gains and dark levels of their own give it one of their mean value and uncertainty.
func (e *Estimator) detectorLike(b *pyro.Band) (detector.Channel, error) {
	var list []detector.Channel
	for _, i := range e.used {
		list = append(list, e.assume.Detectors[i])
	}
	if slices.ContainsFunc(list, func(c detector.Channel) bool { return c.Curve != nil }) {
		return detector.Channel{}, fmt.Errorf("%w: the bands there are have calibration curves; nobody knows that of another", ErrAssume)
	}
	like := func(name string, of func(*detector.Channel) *pyro.Input) *pyro.Input {
		first := of(&list[0])
		common := true
		var value, std float64
		for i := range list {
			in := of(&list[i])
			common = common && in == first
			if in != nil {
				value, std = value+in.Value/float64(len(list)), std+in.Std/float64(len(list))
			}
		}
		if common {
			return first
		}
		return &pyro.Input{Name: name + " of the further band", Value: value, Std: std}
	}
	d := detector.Channel{
		Dark:         like("dark level", func(c *detector.Channel) *pyro.Input { return c.Dark }),
		Gain:         like("gain", func(c *detector.Channel) *pyro.Input { return c.Gain }),
		Exposure:     like("exposure", func(c *detector.Channel) *pyro.Input { return c.Exposure }),
		CalibratedAt: list[0].CalibratedAt,
	}
	if d.Gain != nil && !(d.Gain.Value > 0) {
		d.Gain = nil
	}
	// What moves the wavelength axis of all: by a like amount, or in proportion to λ.
	λ0 := float64(e.bands[e.used[0]].Mean())
	for _, w := range list[0].Wavelength {
		offset, scale := true, true
		for k, i := range e.used {
			at := slices.IndexFunc(list[k].Wavelength, func(o detector.WavelengthError) bool { return o.Input == w.Input })
			if at < 0 {
				offset, scale = false, false
				break
			}
			per := list[k].Wavelength[at].PerUnit
			offset = offset && per == w.PerUnit
			scale = scale && math.Abs(per*λ0-w.PerUnit*float64(e.bands[i].Mean())) <= 1e-9*math.Abs(per*λ0)
		}
		switch {
		case offset:
			d.Wavelength = append(d.Wavelength, w)
		case scale:
			d.Wavelength = append(d.Wavelength, detector.WavelengthError{Input: w.Input, PerUnit: w.PerUnit * float64(b.Mean()) / λ0})
		}
	}
	return d, nil
}

// prediction is a signal as it would be read, and above its dark level.
type prediction struct{ raw, net float64 }

// predicted returns what the last band would read at the estimate, without noise.
func (q *inquiry) predicted(b *pyro.Band, a Assume, r Readings) (prediction, error) {
	var p prediction
	curve, err := q.at.curve()
	if err != nil {
		return p, err
	}
	lo, hi := b.Edges()
	for _, λ := range []pyro.Wavelength{lo, b.Mean(), hi} {
		if ε := curve.At(λ); !(ε > 0) || !q.at.Relative() && ε > 1 {
			return p, fmt.Errorf("%w: the %v fitted is %.3g at %v", ErrAssume, q.e.assume.Emissivity, ε, λ)
		}
	}
	a.Emissivity = emissivity.Given{Spectrum: curve}
	e, err := New(append(slices.Clone(q.e.bands), b), a)
	if err != nil {
		return p, err
	}
	t, _ := q.at.Temperature()
	ψ := make([]float64, e.q)
	q.sharedOf(e, ψ)
	w := e.NewWork()
	if err := w.load(r); err != nil {
		return p, err
	}
	w.evaluate(1/float64(t), ψ, false)
	last := e.n - 1
	p = prediction{w.model[last], w.model[last]}
	if w.sighted {
		p.net *= w.seen.gain[last]
		p.raw = p.net
		if d := e.sight.channel[last].dark; d >= 0 {
			p.raw += w.seen.value[d]
		}
	}
	if !(p.net > 0) || math.IsInf(p.net, 0) {
		return p, fmt.Errorf("%w: it would read %g", ErrAssume, p.net)
	}
	return p, nil
}

// sharedOf writes the estimate's shared unknowns to those of an estimator with further inputs
// among them, which stay at 0; a process has none.
func (q *inquiry) sharedOf(e *Estimator, η []float64) {
	from := q.at.e
	if from.process != nil {
		return
	}
	next := 0
	for k, c := range e.sight.columns {
		if next < from.q && c == from.sight.columns[next] {
			η[k] = q.at.psi[from.p+next]
			next++
		}
	}
}

// fittedCurve is a result's emissivity as a spectrum.
type fittedCurve func(pyro.Wavelength) float64

// At implements pyro.Spectrum.
func (f fittedCurve) At(λ pyro.Wavelength) float64 { return f(λ) }

func (r *Result) curve() (fittedCurve, error) {
	e := r.e
	switch {
	case r.State() != Determined || !r.fitted:
		return nil, fmt.Errorf("%w: there is no fitted emissivity", ErrAssume)
	case e.model != nil:
		grad, room := make([]float64, e.p), make([]float64, e.p)
		return func(λ pyro.Wavelength) float64 {
			ε, _ := e.model.emissivity(grad, r.psi[:e.p], room, λ, r.beta)
			return ε
		}, nil
	case e.process == nil:
		return func(λ pyro.Wavelength) float64 { return e.family.Emissivity(nil, r.psi[:e.p], λ) }, nil
	}
	type point struct{ x, y float64 }
	var points []point
	for j, ε := range r.posterior.value {
		points = append(points, point{math.Log(float64(e.sight.channel[j].centre)), math.Log(ε)})
	}
	slices.SortStableFunc(points, func(a, b point) int {
		if a.x < b.x {
			return -1
		}
		if a.x > b.x {
			return 1
		}
		return 0
	})
	return func(λ pyro.Wavelength) float64 {
		x := math.Log(float64(λ))
		k := slices.IndexFunc(points, func(p point) bool { return p.x >= x })
		switch {
		case k < 0:
			return math.Exp(points[len(points)-1].y)
		case k == 0 || points[k].x == x:
			return math.Exp(points[k].y)
		}
		a, b := points[k-1], points[k]
		return math.Exp(a.y + (b.y-a.y)*(x-a.x)/(b.x-a.x))
	}, nil
}
