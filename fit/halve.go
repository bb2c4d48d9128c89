package fit

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// halve asks for half of each standard uncertainty, one name at a time.
func (q *inquiry) halve() {
	e := q.e
	ask := func(name, what string, a Assume, r Readings) {
		q.try(Help{Kind: HalveInput, Name: name, Action: what}, e.bands, a, r)
	}
	if a, r, ok := q.quieter(); ok {
		ask("readings", "the mean of four readings, with half the noise", a, r)
	} else {
		q.note("the noise of the readings, whose size is unknown, can't be halved here: the detectors make no plain radiances of them")
	}
	if a := q.assume(); slices.ContainsFunc(a.Detectors, func(c detector.Channel) bool { return c.Resolution > 0 }) {
		a.Detectors = slices.Clone(a.Detectors)
		for i := range a.Detectors {
			a.Detectors[i].Resolution /= 2
		}
		ask("rounding of the signals", "signals with half the step of resolution", a, q.r)
	}
	if a := q.assume(); a.Temperature.StdK > 0 {
		a.Temperature.StdK /= 2
		ask("temperature known beforehand", to("temperature known beforehand", a.Temperature.StdK, "K"), a, q.r)
	}
	q.halveSurface(func(name string, std float64, s emissivity.Surface) {
		a := q.assume()
		a.Emissivity = s
		ask(name, to(name, std, ""), a, q.r)
	})
	asked, free := map[string]bool{}, map[string]bool{}
	for _, in := range e.sight.inputs {
		switch name := in.Name; {
		case math.IsInf(in.Std, 1) && !free[name]:
			free[name] = true
			q.note("%s is free: give it a standard uncertainty to see what it would bring", name)
		case in.Std > 0 && !math.IsInf(in.Std, 1) && !asked[name]:
			asked[name] = true
			what := to(name, in.Std/2, in.Unit)
			if slices.ContainsFunc(e.sight.inputs, func(o input) bool { return o.Name == name && o.Std != in.Std }) {
				what = name + " to half the uncertainty"
			}
			ask(name, what, withInputs(q.assume(), halved(name)), q.r)
		}
	}
	q.halveCurves(func(name string, a Assume) { ask(name, name+" to half the uncertainty", a, q.r) })
	for i, s := range e.assume.Shared {
		if slices.ContainsFunc(e.assume.Shared[:i], func(o Shared) bool { return o.Name == s.Name }) {
			continue
		}
		a := q.assume()
		a.Shared = slices.Clone(a.Shared)
		for k := range a.Shared {
			if a.Shared[k].Name == s.Name {
				a.Shared[k].Relative, a.Shared[k].Additive = times(a.Shared[k].Relative, 0.5), times(a.Shared[k].Additive, 0.5)
			}
		}
		ask(s.Name, s.Name+" to half the uncertainty", a, q.r)
	}
}

// to words an uncertainty that is reached.
func to(name string, std float64, unit string) string {
	return strings.TrimRight(fmt.Sprintf("%s to ± %.2g %s", name, std, unit), " ")
}

// quieter halves the standard deviation of the readings' noise. Where its size is taken from
// the residuals, the residuals are halved.
func (q *inquiry) quieter() (Assume, Readings, bool) {
	a, r := q.assume(), q.r
	if a.Noise.unknown {
		if a.Detectors != nil || !q.now.described {
			return a, r, a.Detectors == nil
		}
		r.Signal = slices.Clone(r.Signal)
		for j, i := range q.e.used {
			r.Signal[i] = (r.Signal[i] + q.now.model[j]) / 2
		}
		return a, r, true
	}
	r.Std = times(r.Std, 0.5)
	a.Noise.rel /= 2
	a.Noise.floor /= 2
	a.Noise.cov = times(a.Noise.cov, 0.25)
	a.Detectors = slices.Clone(a.Detectors)
	for i := range a.Detectors {
		n := &a.Detectors[i].Noise
		n.Constant, n.PerSignal = n.Constant/4, n.PerSignal/4
	}
	return a, r, true
}

// halveSurface calls ask for each of the surface's priors and known points, with the standard
// uncertainty then and the surface.
func (q *inquiry) halveSurface(ask func(name string, std float64, s emissivity.Surface)) {
	points := func(known []emissivity.Known, with func(...emissivity.Known) emissivity.Surface) {
		for i, k := range known {
			list := slices.Clone(known)
			list[i].Std /= 2
			ask(fmt.Sprintf("emissivity known at %v", k.Wavelength), list[i].Std, with(list...))
		}
	}
	switch s := q.assume().Emissivity.(type) {
	case emissivity.Family:
		for k, name := range s.Parameters() {
			if p := s.Prior(k); p.Std > 0 {
				ask("prior on "+name, p.Std/2, s.WithPrior(name, p.Value, p.Std/2))
			}
		}
		points(s.KnownPoints(), func(k ...emissivity.Known) emissivity.Surface { return s.WithKnownPoints(k...) })
	case emissivity.Process:
		points(s.KnownPoints(), func(k ...emissivity.Known) emissivity.Surface { return s.WithKnownPoints(k...) })
	case emissivity.Model:
		for _, p := range s.Parameters() {
			if p.Prior.Std > 0 {
				ask("prior on "+p.Name, p.Prior.Std/2, emissivity.WithPrior(s, p.Name, p.Prior.Value, p.Prior.Std/2))
			}
		}
	}
}

// halveCurves calls ask for each name of a calibration curve with a covariance.
func (q *inquiry) halveCurves(ask func(name string, a Assume)) {
	name := func(c detector.Channel) string {
		if c.CurveName == "" {
			return "calibration curve"
		}
		return c.CurveName
	}
	var seen []string
	for _, c := range q.e.assume.Detectors {
		if c.Curve == nil || c.CurveCov == [3][3]float64{} || slices.Contains(seen, name(c)) {
			continue
		}
		seen = append(seen, name(c))
		a := q.assume()
		a.Detectors = slices.Clone(a.Detectors)
		for i := range a.Detectors {
			if name(a.Detectors[i]) != name(c) {
				continue
			}
			for k := range a.Detectors[i].CurveCov {
				for l := range a.Detectors[i].CurveCov[k] {
					a.Detectors[i].CurveCov[k][l] /= 4
				}
			}
		}
		ask(name(c), a)
	}
}

func times(v []float64, f float64) []float64 {
	out := slices.Clone(v)
	for i := range out {
		out[i] *= f
	}
	return out
}

// halved returns a change that halves the standard uncertainty of the inputs of one name.
func halved(name string) func(pyro.Input) pyro.Input {
	return func(in pyro.Input) pyro.Input {
		if in.Name == name && !math.IsInf(in.Std, 1) {
			in.Std /= 2
		}
		return in
	}
}

// withInputs returns the assumptions with every input that it names replaced by a changed copy:
// what stood in two places as one input does so afterwards.
func withInputs(a Assume, change func(pyro.Input) pyro.Input) Assume {
	copies := map[*pyro.Input]*pyro.Input{}
	replace := func(in **pyro.Input) {
		if *in == nil {
			return
		}
		c, ok := copies[*in]
		if !ok {
			changed := change(**in)
			c = &changed
			copies[*in] = c
		}
		*in = c
	}
	a.Surroundings.Zones = slices.Clone(a.Surroundings.Zones)
	for i := range a.Surroundings.Zones {
		z := &a.Surroundings.Zones[i]
		replace(&z.Factor)
		replace(&z.Temperature)
		z.Reading, z.Gain = slices.Clone(z.Reading), slices.Clone(z.Gain)
		for k := range z.Reading {
			replace(&z.Reading[k])
		}
		for k := range z.Gain {
			replace(&z.Gain[k])
		}
	}
	a.Path = append([]sightline.Layer(nil), a.Path...)
	for i := range a.Path {
		l := &a.Path[i]
		for _, in := range []**pyro.Input{&l.Transmittance, &l.Slope, &l.Length, &l.Emittance, &l.Temperature} {
			replace(in)
		}
	}
	for _, in := range []**pyro.Input{&a.Field.Fraction, &a.Field.Rest, &a.Field.Spread, &a.Stray} {
		replace(in)
	}
	a.Detectors = slices.Clone(a.Detectors)
	for i := range a.Detectors {
		d := &a.Detectors[i]
		replace(&d.Dark)
		replace(&d.Gain)
		replace(&d.Exposure)
		replace(&d.Width)
		d.Wavelength = slices.Clone(d.Wavelength)
		for k := range d.Wavelength {
			replace(&d.Wavelength[k].Input)
		}
	}
	return a
}
