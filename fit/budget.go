package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/pyro"
)

// Share is one input's part of the standard uncertainty of the temperature.
type Share struct {
	Name string
	StdK float64
	// EffectK is what an input one standard uncertainty above its value would add to T; the
	// sign tells which way. 0 for readings, which err independently, and where several
	// unknowns go by one name.
	EffectK float64
	// Shared tells that further readings share the error, so that averaging won't remove it.
	Shared bool
}

// Places of Result.share.
const (
	shareReadings = iota
	shareRounding
	shareTemperature
	firstDatum
)

// fillShares splits u²(T) by input: with c the first column of the covariance in units of
// independent data, each datum gives (c·J)².
func (r *Result) fillShares(w *Work) {
	e := r.e
	size := e.size()
	c := r.cov[:size] // symmetric: row 0 is column 0; a common factor cancels in Budget
	clear(r.share)
	clear(r.effect)
	for j := range e.n {
		v := 0.0
		for a, f := range w.jac[j*size : (j+1)*size] {
			v += c[a] * f
		}
		rounding := 0.0
		if e.whiten == nil {
			variance := w.variance(j, w.model[j])
			if w.censored[j] != 0 {
				_, _, weight := bounded(float64(w.censored[j]), w.signal[j]-w.model[j], variance)
				v *= math.Sqrt(weight)
			}
			v /= math.Sqrt(variance)
			rounding = w.rounding[j] / variance
		}
		r.share[shareReadings] += v * v * (1 - rounding)
		r.share[shareRounding] += v * v * rounding
	}
	set := func(at int, v float64) { r.share[at], r.effect[at] = v*v, v }
	if t := e.assume.Temperature; t.StdK > 0 {
		set(shareTemperature, -c[0]/(r.beta*r.beta*t.StdK))
	}
	for i, d := range e.data {
		v := 0.0
		for k, f := range d.row {
			v += c[1+k] * f * d.weight
		}
		set(firstDatum+i, v)
	}
	for k := range e.q {
		if !e.sight.free(k) {
			set(firstDatum+len(e.data)+k, c[1+e.p+k])
		}
	}
}

// name and shared describe the places of share.
func (e *Estimator) shareName(i int) (name string, shared bool) {
	switch {
	case i == shareReadings:
		return "readings", false
	case i == shareRounding:
		return "rounding of the signals", true
	case i == shareTemperature:
		return "temperature known beforehand", true
	case i < firstDatum+len(e.data):
		return e.data[i-firstDatum].name, true
	}
	c := e.sight.columns[i-firstDatum-len(e.data)]
	return c.name, !c.perReading
}

// Budget returns each input's part of the linearised u(T); their squares add up to it.
// It is nil where Uncertainty has none.
func (r *Result) Budget() []Share {
	u, ok := r.Uncertainty()
	if !ok {
		return nil
	}
	total := 0.0
	for _, v := range r.share {
		total += v
	}
	if total == 0 {
		return nil
	}
	scale := u / math.Sqrt(total)
	var list []Share
	for i, v := range r.share {
		if !(v > 0) {
			continue
		}
		name, shared := r.e.shareName(i)
		s := Share{name, scale * math.Sqrt(v), 0 - scale*r.effect[i], shared}
		if k := slices.IndexFunc(list, func(o Share) bool { return o.Name == name }); k >= 0 {
			list[k].StdK, list[k].EffectK = math.Hypot(list[k].StdK, s.StdK), 0
			continue
		}
		list = append(list, s)
	}
	return list
}

// Split returns the two parts of the standard uncertainty: what is new with each reading and
// falls with their number, and what they share.
func (r *Result) Split() (repeatabilityK, sharedK float64, ok bool) {
	budget := r.Budget()
	for _, s := range budget {
		if s.Shared {
			sharedK = math.Hypot(sharedK, s.StdK)
		} else {
			repeatabilityK = math.Hypot(repeatabilityK, s.StdK)
		}
	}
	return repeatabilityK, sharedK, budget != nil
}

// Mean is the mean temperature of several readings.
type Mean struct {
	T                       pyro.Temperature
	StdK                    float64
	RepeatabilityK, SharedK float64 // its two parts
	Readings                int
}

// Interval returns the interval of probability p about the mean.
func (m Mean) Interval(p float64) (low, high pyro.Temperature) {
	q := pyro.Temperature(m.StdK * distuv.UnitNormal.Quantile((1+p)/2))
	return m.T - q, m.T + q
}

// ErrMean says why results can't be averaged.
var ErrMean = errors.New("fit: mean")

// Average returns the mean temperature of results of one estimator, all of them with a
// standard uncertainty. What is new with each reading averages out; what they share is kept
// with its sign, each input for itself, so that it does not.
func Average(results []*Result) (Mean, error) {
	if len(results) == 0 {
		return Mean{}, fmt.Errorf("%w: no results", ErrMean)
	}
	n := float64(len(results))
	var m Mean
	var own float64
	shared := make([]float64, len(results[0].share))
	for i, r := range results {
		u, ok := r.Uncertainty()
		if !ok {
			return Mean{}, fmt.Errorf("%w: result %d has no standard uncertainty (%v)", ErrMean, i, r.State())
		}
		if r.e != results[0].e {
			return Mean{}, fmt.Errorf("%w: result %d is another estimator's", ErrMean, i)
		}
		m.T += pyro.Temperature(1/r.beta) / pyro.Temperature(n)
		total := 0.0
		for _, v := range r.share {
			total += v
		}
		if total == 0 {
			return Mean{}, fmt.Errorf("%w: result %d was not diagnosed: call DiagnoseTo first", ErrMean, i)
		}
		scale := u / math.Sqrt(total) / n
		for k, v := range r.share {
			_, common := r.e.shareName(k)
			switch {
			case !common:
				own += scale * scale * v
			case k == shareRounding:
				shared[k] += scale * math.Sqrt(v)
			default:
				shared[k] += scale * r.effect[k]
			}
		}
	}
	sum := 0.0
	for _, v := range shared {
		sum += v * v
	}
	m.RepeatabilityK, m.SharedK, m.StdK, m.Readings = math.Sqrt(own), math.Sqrt(sum), math.Sqrt(own+sum), len(results)
	return m, nil
}
