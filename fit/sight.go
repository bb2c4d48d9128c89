package fit

import (
	"fmt"
	"math"
	"slices"

	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// sight is the compiled way of the light from the surface to the signal. At one wavelength
//
//	X = a·S·E + Σ_r w_r S_r·(1 − E) + κ·(1 − E) + Σ_s w_s S_s + γ
//
// where E is the emissivity, or ε/(1 − (1−ε)F) on a surface that sees itself; r are the zones
// that it reflects, s what shines in from elsewhere (the rest of the field, layers of the
// path), and κ and γ what is known as a radiance. The weights depend on the inputs smoothly;
// their derivatives are taken once, by central differences, where no such input changes with
// the reading.
type sight struct {
	inputs  []input
	columns []column // of η
	sources []source
	optics  []int // inputs that the weights depend on and that are uncertain
	moving  bool  // one that the weights depend on has a new value with each reading
	spread  int   // input that is the spread of the temperature, or −1
	stray   int   // input that is the stray fraction, or −1
	channel []channel
	clear   bool // no surroundings, path, field or detectors are declared

	at nominalOptics
}

// input is a declared input and where it acts.
type input struct {
	*pyro.Input
	kind    inputKind
	column  int // of η, or −1 where it is exact
	inOptic bool
}

type inputKind int

const (
	anything inputKind = iota
	temperature
	fraction // 0 to 1
	positive
)

// column is one of the unknowns η, in units of its standard uncertainty.
type column struct {
	name       string
	std        float64
	perReading bool
	free       bool // no prior
}

// source is something at a temperature of its own that shines on the surface or into the path.
type source struct {
	name        string
	temperature int // input
	reflected   bool
	layer       int // of the path, or −1
	table       *bandTable
}

// channel is a used band's detector, with its inputs' indices; −1 where there is none.
type channel struct {
	detector.Channel
	centre               pyro.Wavelength
	dark, gain, exposure int
	shift                []shift
}

// bound says whether a signal is one: −1 where the truth is at most that, 1 at least.
func (c *channel) bound(signal float64) int8 {
	switch {
	case c.Saturation != 0 && signal >= c.Saturation:
		return 1
	case c.Floor != 0 && signal <= c.Floor:
		return -1
	}
	return 0
}

// shift is an input that moves the centre of a band: the relative change of S per standard
// uncertainty is c0 + β·rate·(c1 + c2·β), rate = d ln S/dβ. A calibration curve's
// uncertainty has the same form.
type shift struct {
	column     int
	c0, c1, c2 float64
}

// optics are the weights of a sight for given values of its inputs.
type optics struct {
	a, known, add []float64 // n
	weight        []float64 // source × n
	self          float64
}

func newOptics(n, sources int) optics {
	f := func(k int) []float64 { return make([]float64, k) }
	return optics{a: f(n), known: f(n), add: f(n), weight: f(n * sources)}
}

// nominalOptics are the weights at the declared values, and their derivatives by the columns
// of sight.optics.
type nominalOptics struct {
	optics
	by []optics
}

// compileSight lists inputs and columns, and vets what was declared.
func (e *Estimator) compileSight() error {
	a := &e.assume
	s := &sight{spread: -1, stray: -1}
	e.sight = s
	var λ []pyro.Wavelength
	for _, b := range e.bands {
		lo, hi := b.Edges()
		λ = append(λ, b.Mean(), lo, hi)
	}
	if err := a.Surroundings.Check(len(e.bands), λ...); err != nil {
		return fmt.Errorf("%w: %w", ErrAssume, err)
	}
	for i := range a.Path {
		if err := a.Path[i].Check(λ...); err != nil {
			return fmt.Errorf("%w: %w", ErrAssume, err)
		}
	}
	if err := a.Field.Check(λ...); err != nil {
		return fmt.Errorf("%w: %w", ErrAssume, err)
	}
	if a.Detectors != nil && len(a.Detectors) != len(e.bands) {
		return fmt.Errorf("%w: %d detectors for %d bands", ErrAssume, len(a.Detectors), len(e.bands))
	}
	s.clear = a.Surroundings.Empty() && len(a.Path) == 0 && a.Field.Whole() && a.Detectors == nil && a.Stray == nil

	for i := range a.Surroundings.Zones {
		z := &a.Surroundings.Zones[i]
		s.register(z.Factor, fraction, true)
		for k := range z.Reading {
			s.register(z.Reading[k], anything, true)
			if z.Gain != nil {
				s.register(z.Gain[k], positive, true)
			}
		}
		if z.Temperature != nil {
			s.sources = append(s.sources, source{name: z.Name, temperature: s.register(z.Temperature, temperature, false), reflected: true, layer: -1})
		}
	}
	s.register(a.Field.Fraction, fraction, true)
	if a.Field.Rest != nil {
		s.sources = append(s.sources, source{name: "rest of the field", temperature: s.register(a.Field.Rest, temperature, false), layer: -1})
	}
	s.spread = s.register(a.Field.Spread, anything, false)
	for i := range a.Path {
		l := &a.Path[i]
		s.register(l.Transmittance, fraction, true)
		s.register(l.Slope, anything, true)
		s.register(l.Length, anything, true)
		s.register(l.Emittance, fraction, true)
		if l.Temperature != nil {
			s.sources = append(s.sources, source{name: l.Name, temperature: s.register(l.Temperature, temperature, false), layer: i})
		}
	}
	if err := e.compileDetectors(); err != nil {
		return err
	}
	if a.Stray != nil {
		if err := a.Stray.Check(); err != nil {
			return fmt.Errorf("%w: %w", ErrAssume, err)
		}
		if !(a.Stray.Value >= 0 && a.Stray.Value < 1) {
			return fmt.Errorf("%w: stray light %g: it is a fraction of the mean signal", ErrAssume, a.Stray.Value)
		}
		s.stray = s.register(a.Stray, anything, false)
	}
	for k, in := range s.inputs {
		if in.inOptic {
			if in.column >= 0 {
				s.optics = append(s.optics, k)
			}
			s.moving = s.moving || in.PerReading
		}
	}
	for _, shared := range a.Shared {
		s.columns = append(s.columns, column{name: shared.Name, std: 1})
	}
	e.q = len(s.columns)
	return nil
}

// nominal returns the declared values of the inputs.
func (s *sight) nominal() []float64 {
	value := make([]float64, len(s.inputs))
	for k, in := range s.inputs {
		value[k] = in.Value
	}
	return value
}

// compileOptics computes the weights at the declared values, and the tables of wide bands
// with what the light passes folded into their responsivities.
func (e *Estimator) compileOptics() {
	s := e.sight
	s.at.optics = newOptics(e.n, len(s.sources))
	for range s.optics {
		s.at.by = append(s.at.by, newOptics(e.n, len(s.sources)))
	}
	e.lookThrough(&s.at, s.nominal())
	if e.lines {
		return
	}
	value := s.nominal()
	e.table = newBandTable(e, e.hottest, e.coldest, func(i int, λ pyro.Wavelength) float64 {
		out := 0.0
		e.chain(λ, i, value, func(r ray) { out = r.a }, func(int, float64) {})
		return out
	})
	for x := range s.sources {
		s.sources[x].table = newBandTable(e, 1/float64(sightline.Hottest), 1/float64(sightline.Coldest), func(i int, λ pyro.Wavelength) float64 {
			out := 0.0
			e.chain(λ, i, value, func(ray) {}, func(at int, w float64) {
				if at == x {
					out = w
				}
			})
			return out
		})
	}
}

// free reports whether column k has no prior. The last columns are those of Assume.Shared.
func (s *sight) free(k int) bool { return s.columns[k].free }

// register lists an input once, however often it is named, and returns its index; −1 for nil.
func (s *sight) register(i *pyro.Input, kind inputKind, inOptics bool) int {
	if i == nil {
		return -1
	}
	k := slices.IndexFunc(s.inputs, func(o input) bool { return o.Input == i })
	if k < 0 {
		k = len(s.inputs)
		in := input{Input: i, kind: kind, column: -1}
		if i.Std > 0 {
			c := column{name: i.Name, std: i.Std, perReading: i.PerReading}
			if c.free = math.IsInf(i.Std, 1); c.free {
				c.std = math.Abs(i.Value) // η counts in its own size
				if c.std == 0 {
					c.std = 1
				}
			}
			in.column = len(s.columns)
			s.columns = append(s.columns, c)
		}
		s.inputs = append(s.inputs, in)
	}
	s.inputs[k].inOptic = s.inputs[k].inOptic || inOptics
	return k
}

func (e *Estimator) compileDetectors() error {
	s := e.sight
	s.channel = make([]channel, e.n)
	e.noisy = e.assume.Detectors != nil
	e.bent = e.bent || e.assume.Surroundings.Remainder == sightline.Itself
	for j, i := range e.used {
		c := channel{dark: -1, gain: -1, exposure: -1}
		if e.assume.Detectors != nil {
			c.Channel = e.assume.Detectors[i]
		}
		if err := c.Check(); err != nil {
			return fmt.Errorf("%w: band %d: %w", ErrAssume, i, err)
		}
		e.noisy = e.noisy && (c.Noise != (detector.NoiseModel{}) || c.Resolution > 0)
		if c.Noise.PerSignal > 0 && e.assume.Noise.kind != perReading {
			return fmt.Errorf("%w: band %d: its detector has a noise model, and Noise declares another", ErrAssume, i)
		}
		e.bent = e.bent || c.Noise.PerSignal > 0 || c.Saturation != 0 || c.Floor != 0
		c.dark = s.register(c.Dark, anything, false)
		c.gain = s.register(c.Gain, positive, false)
		c.exposure = s.register(c.Exposure, positive, false)
		λ := float64(e.bands[i].Mean())
		if c.Curve != nil {
			mean, _ := c.Curve.Moments()
			λ = float64(mean)
		}
		c.centre = pyro.Wavelength(λ)
		for _, w := range c.Wavelength {
			k := s.inputs[s.register(w.Input, anything, false)].column
			if k < 0 {
				continue
			}
			δ := w.PerUnit * s.columns[k].std
			t := shift{column: k, c0: -5 * δ / λ, c1: -δ / λ}
			c.shift = append(c.shift, calibrated(t, λ, c.CalibratedAt))
		}
		if c.Width != nil {
			if k := s.inputs[s.register(c.Width, positive, false)].column; k >= 0 {
				// S = L + σ²L″/2 with λ²L″/L = x² − 12x + 30 in Wien's limit, x = −β·rate = kβ.
				f := c.Width.Value * s.columns[k].std / (λ * λ)
				c.shift = append(c.shift, calibrated(shift{column: k, c0: 30 * f, c1: 12 * f, c2: -pyro.C2 / λ * f}, λ, c.CalibratedAt))
			}
		}
		if c.Curve != nil {
			e.compileCurve(&c)
		}
		s.channel[j] = c
	}
	return nil
}

// calibrated takes from a shift what the calibration at a temperature took up; 0 K: nothing.
func calibrated(t shift, λ float64, at pyro.Temperature) shift {
	if at > 0 {
		β := 1 / float64(at)
		t.c0 = -β * lineRate(λ, β) * (t.c1 + t.c2*β)
	}
	return t
}

// lineRate is d ln L/dβ at one wavelength.
func lineRate(λ, β float64) float64 { return pyro.C2 / λ / math.Expm1(-pyro.C2/λ*β) }

// compileCurve adds a column for each direction of a calibration curve's covariance. With
// y = c₂β/(A + Bβ), d ln S = dC/C − (β/A)·(d ln S/dβ)·(dA + β dB).
func (e *Estimator) compileCurve(c *channel) {
	s := e.sight
	name := c.CurveName
	if name == "" {
		name = "calibration curve"
	}
	var l [3][3]float64 // Cholesky factor; a variance of 0 gives a column of zeros
	for i := range 3 {
		for j := range i + 1 {
			v := c.CurveCov[i][j]
			for k := range j {
				v -= l[i][k] * l[j][k]
			}
			switch {
			case i > j && l[j][j] > 0:
				l[i][j] = v / l[j][j]
			case i == j && v > 1e-12*c.CurveCov[i][i]:
				l[i][i] = math.Sqrt(v)
			}
		}
	}
	for k := range 3 {
		if l[0][k] == 0 && l[1][k] == 0 && l[2][k] == 0 {
			continue
		}
		c.shift = append(c.shift, shift{column: len(s.columns), c0: l[0][k], c1: -l[1][k] / c.Curve.A, c2: -l[2][k] / c.Curve.A})
		s.columns = append(s.columns, column{name: name, std: 1})
	}
}

// lookThrough fills the weights at the values given, and their derivatives by the optics'
// inputs, per standard uncertainty.
func (e *Estimator) lookThrough(dst *nominalOptics, value []float64) {
	e.weights(&dst.optics, value)
	const h = 1e-4 // of a standard uncertainty
	s := e.sight
	for c, k := range s.optics {
		by, keep := &dst.by[c], value[k]
		std := s.columns[s.inputs[k].column].std
		value[k] = keep + h*std
		e.weights(by, value)
		value[k] = keep - h*std
		e.subtractWeights(by, value, 1/(2*h))
		value[k] = keep
	}
}

// weights fills the weights of all channels at their mean wavelengths.
func (e *Estimator) weights(dst *optics, value []float64) {
	for j, i := range e.used {
		e.chain(e.sight.channel[j].centre, i, value, func(v ray) {
			dst.a[j], dst.known[j], dst.add[j], dst.self = v.a, v.known, v.add, v.self
		}, func(x int, v float64) { dst.weight[x*e.n+j] = v })
	}
}

// subtractWeights turns dst into (dst − weights)·f.
func (e *Estimator) subtractWeights(dst *optics, value []float64, f float64) {
	self := dst.self
	for j, i := range e.used {
		e.chain(e.sight.channel[j].centre, i, value, func(v ray) {
			dst.a[j], dst.known[j], dst.add[j], dst.self = (dst.a[j]-v.a)*f, (dst.known[j]-v.known)*f, (dst.add[j]-v.add)*f, (self-v.self)*f
		}, func(x int, v float64) { dst.weight[x*e.n+j] = (dst.weight[x*e.n+j] - v) * f })
	}
}

// ray is what arrives beside the sources at one wavelength.
type ray struct{ a, known, add, self float64 }

// chain follows the light at one wavelength of band i from the surface to the detector.
func (e *Estimator) chain(λ pyro.Wavelength, i int, value []float64, whole func(ray), weight func(source int, w float64)) {
	s, a := e.sight, &e.assume
	v := func(in *pyro.Input) float64 {
		for k := range s.inputs {
			if s.inputs[k].Input == in {
				return value[k]
			}
		}
		return in.Value
	}
	behind := 1.0 // transmittance from a layer to the detector
	at := len(s.sources)
	for k := len(a.Path) - 1; k >= 0; k-- {
		l := &a.Path[k]
		τ, α := l.At(λ, v)
		if l.Temperature != nil {
			at--
			weight(at, α*behind)
		}
		behind *= τ
	}
	φ := 1.0
	if a.Field.Fraction != nil {
		φ = v(a.Field.Fraction)
	}
	if a.Field.Rest != nil {
		ε := 1.0
		if a.Field.RestEmissivity != nil {
			ε = a.Field.RestEmissivity.At(λ)
		}
		at--
		weight(at, behind*(1-φ)*ε)
	}
	r := ray{a: behind * φ, self: a.Surroundings.Self(v)}
	at = 0
	for k := range a.Surroundings.Zones {
		z := &a.Surroundings.Zones[k]
		f := r.a * a.Surroundings.Factor(k, v) / (1 - r.self)
		switch {
		case z.Temperature != nil:
			if z.Emissivity != nil {
				f *= z.Emissivity.At(λ)
			}
			weight(at, f)
			at++
		case z.Radiance != nil:
			r.known += f * z.Radiance.At(λ)
		default:
			reading := v(z.Reading[i])
			if z.Gain != nil {
				reading /= v(z.Gain[i])
			}
			r.known += f * reading
		}
	}
	whole(r)
}

// PerReading lists the inputs that have a new value with each reading, in the order in which
// Readings.Inputs gives them.
func (e *Estimator) PerReading() []*pyro.Input {
	var list []*pyro.Input
	for _, in := range e.sight.inputs {
		if in.PerReading {
			list = append(list, in.Input)
		}
	}
	return list
}
