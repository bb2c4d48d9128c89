package fit

import (
	"math"

	"candent/pyro"
)

// noteSight says what a sight deserves a word about: bounds among the readings, what cancels
// in a ratio, and a grating's second order.
func (r *Result) noteSight(w *Work) {
	e := r.e
	if !w.sighted {
		return
	}
	for j, side := range w.censored {
		switch side {
		case 1:
			r.note("channel %d is at its upper end: it counts as a lower bound", e.used[j])
		case -1:
			r.note("channel %d is at its lower end: it counts as an upper bound", e.used[j])
		}
	}
	r.noteCelsius(w)
	if e.assume.Field.Fraction != nil && e.n == 2 && r.Relative() {
		r.noteRest(w)
	}
	if e.assume.Stray != nil {
		least := math.Inf(1)
		for j := range e.used {
			least = min(least, float64(e.sight.channel[j].centre))
		}
		for j, i := range e.used {
			if λ := e.sight.channel[j].centre; float64(λ) > 2*least {
				r.note("channel %d (%v) and beyond lie above twice the shortest wavelength: a grating's second order arrives there too, unless a filter stops it", i, λ)
				break
			}
		}
	}
}

// noteCelsius suspects a wall's figure of being in °C where its unit is not declared and the
// sign of its effect hangs on it: the load comes out hotter than the wall as given, and would
// be colder than the wall were the figure in °C.
func (r *Result) noteCelsius(w *Work) {
	for _, s := range r.e.sight.sources {
		in := r.e.sight.inputs[s.temperature]
		if !s.reflected || in.Unit != "" {
			continue
		}
		T := 1 / r.beta
		if v := w.seen.value[s.temperature]; v < T && float64(pyro.Celsius(v)) > T {
			r.note("the load comes out hotter than %s (%.0f K); were that figure in °C the walls would be the hotter, and a larger emissivity would raise the temperature, not lower it: declare the input's Unit as K if it is", in.Name, v)
		}
	}
}

// noteRest says whether the fill of the field cancels in a ratio: only where the rest of the
// field brings less than the noise to both bands.
func (r *Result) noteRest(w *Work) {
	for x, s := range r.e.sight.sources {
		if s.reflected || s.layer >= 0 {
			continue
		}
		r.e.radiate(1/w.seen.value[s.temperature], s.table, w.seen.black, w.seen.rate, w.seen.mean, w.seen.width)
		for j, S := range w.seen.black {
			if share := w.seen.optics.weight[x*r.e.n+j] * S; share > r.sigma[j] {
				r.note("the fill of the field does not cancel in the ratio: the rest brings %.2g %% of channel %d", 100*share/r.model[j], r.e.used[j])
				return
			}
		}
	}
	r.note("the fill of the field cancels in the ratio: the rest brings less than the noise to either band")
}
