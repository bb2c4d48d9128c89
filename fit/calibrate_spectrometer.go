package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"candent/pyro"
)

// SourceSpectrum is what a spectrometer showed of a known source: a blackbody at a
// temperature, or a lamp with a certificate.
type SourceSpectrum struct {
	Name string
	// Temperature in K of a blackbody; nil where there is a Lamp.
	Temperature *pyro.Input
	// Lamp is the certified spectral radiance in W m⁻² sr⁻¹ m⁻¹; nil for a blackbody.
	Lamp pyro.Spectrum
	// Level multiplies the radiance: a blackbody's effective emissivity, the scale of a lamp's
	// certificate (1 ± its relative standard uncertainty). nil: exactly 1.
	Level *pyro.Input
	// Signal of each band, dark level subtracted, and its standard uncertainty, independent
	// between channels; Std nil takes the signals for exact.
	Signal, Std []float64
}

// SpectrometerCalibration is the gain of each channel,
//
//	signal_i = g_i · S_i,   S_i the mean spectral radiance in band i, W m⁻² sr⁻¹ m⁻¹
//
// with what is independent in each and what they share.
type SpectrometerCalibration struct {
	Gain []float64 // unit of the signal per W m⁻² sr⁻¹ m⁻¹
	Std  []float64 // standard uncertainty that is independent in each channel, unit of Gain
	// Effects are what channels share, one for each source input with an uncertainty, by its
	// name: where that input lies one Std above its value, the true gain of channel i (and so
	// what is read with Gain) is higher by the fraction Relative[i]. They are ready to be
	// Assume.Shared of readings signal/Gain.
	Effects []Shared

	chi2 float64
	dof  int
}

// CalibrateSpectrometer finds the gain of each band from one source spectrum or more. The
// same *pyro.Input in several sources (the temperature of a furnace that was seen twice, the
// scale of the laboratory) is one shared unknown.
//
// The gain of a channel is the mean of its own signal/radiance over the sources, weighted by
// the whole variance of each: no channel's gain is moved by another's signals, so that a
// spectrum which does not fit its source spoils nothing but χ² says so.
func CalibrateSpectrometer(bands []*pyro.Band, sources []SourceSpectrum) (*SpectrometerCalibration, error) {
	if len(bands) == 0 || len(sources) == 0 {
		return nil, fmt.Errorf("%w: %d bands and %d source spectra: one or more of each are needed", ErrCalibration, len(bands), len(sources))
	}
	for i, b := range bands {
		if b == nil {
			return nil, &CalibrationError{What: "band", Row: i, Err: fmt.Errorf("it is nil")}
		}
	}
	n, m := len(bands), len(sources)
	p := &sourceProblem{n: n, m: m, ratio: make([]float64, n*m), noise: make([]float64, n*m)}
	for j := range sources {
		if err := p.add(j, &sources[j], bands); err != nil {
			return nil, err
		}
	}
	for j := range sources {
		if (sources[j].Std == nil) != (sources[0].Std == nil) {
			return nil, &CalibrationError{What: "source spectrum", Row: j, Err: fmt.Errorf("some spectra have standard uncertainties and some have none: give them for each, or for none")}
		}
	}
	return p.solve(sources[0].Std != nil), nil
}

// sourceProblem holds signal/radiance of channel i before source j at i*m+j, and how both
// depend on noise and on the inputs.
type sourceProblem struct {
	n, m   int
	ratio  []float64
	noise  []float64 // u(signal)/radiance
	inputs []*pyro.Input
	effect [][]float64 // of each input, ∂ ln radiance per standard uncertainty, at i*m+j
}

// add takes in a source.
func (p *sourceProblem) add(j int, s *SourceSpectrum, bands []*pyro.Band) error {
	bad := func(format string, args ...any) error {
		return &CalibrationError{What: "source spectrum", Row: j, Err: fmt.Errorf(format, args...)}
	}
	switch {
	case (s.Temperature == nil) == (s.Lamp == nil):
		return bad("%q: give either the temperature of a blackbody or the radiance of a lamp", s.Name)
	case len(s.Signal) != p.n || s.Std != nil && len(s.Std) != p.n:
		return bad("%q: %d signals and %d uncertainties for %d bands", s.Name, len(s.Signal), len(s.Std), p.n)
	}
	level := 1.0
	if s.Level != nil {
		if err := checkSourceInput(s.Level); err != nil {
			return bad("%q: level: %w", s.Name, err)
		}
		level = s.Level.Value
	}
	var t pyro.Temperature
	if s.Temperature != nil {
		if err := checkSourceInput(s.Temperature); err != nil {
			return bad("%q: temperature: %w", s.Name, err)
		}
		if t = pyro.Temperature(s.Temperature.Value); !(t >= pyro.BandMin && t <= pyro.BandMax) {
			return bad("%q: temperature %v is outside %v to %v; is it in °C?", s.Name, t, pyro.BandMin, pyro.BandMax)
		}
	}
	for i, b := range bands {
		at := i*p.m + j
		bad := func(format string, args ...any) error {
			return &CalibrationError{What: fmt.Sprintf("source spectrum %d (%s), channel", j, s.Name), Row: i, Err: fmt.Errorf(format, args...)}
		}
		radiance := level
		if s.Lamp != nil {
			radiance *= meanOver(b, s.Lamp)
		} else {
			if err := b.Check(t); err != nil {
				return bad("%w", err)
			}
			radiance *= b.Radiance(t)
		}
		if math.IsNaN(radiance) {
			return bad("the lamp's certificate doesn't cover the band at %v: leave the channel out", b.Mean())
		}
		if !(radiance > 0) || math.IsInf(radiance, 0) {
			return bad("the source's radiance at %v is %g: it must be positive", b.Mean(), radiance)
		}
		signal, std := s.Signal[i], 0.0
		if s.Std != nil {
			std = s.Std[i]
		}
		switch {
		case !(signal > 0) || math.IsInf(signal, 0):
			return bad("signal %g must be positive: subtract the dark level first, and leave out a channel that sees nothing", signal)
		case s.Std != nil && !(std > 0) || math.IsInf(std, 0):
			return bad("standard uncertainty %g of the signal must be positive and finite", std)
		}
		p.ratio[at], p.noise[at] = signal/radiance, std/radiance
		if s.Temperature != nil && s.Temperature.Std > 0 {
			p.of(s.Temperature)[at] += b.LogSlope(t) * s.Temperature.Std / float64(t)
		}
		if s.Level != nil && s.Level.Std > 0 {
			p.of(s.Level)[at] += s.Level.Std / level
		}
	}
	return nil
}

func checkSourceInput(in *pyro.Input) error {
	if err := in.Check(); err != nil {
		return err
	}
	if math.IsInf(in.Std, 0) || !(in.Value > 0) {
		return fmt.Errorf("%q: %g ± %g: a source is known: value and uncertainty must be finite, the value positive", in.Name, in.Value, in.Std)
	}
	return nil
}

// meanOver returns the mean of a spectrum over a band.
func meanOver(b *pyro.Band, s pyro.Spectrum) float64 {
	λ, w := b.Nodes()
	sum := 0.0
	for k := range λ {
		sum += w[k] * s.At(λ[k])
	}
	return sum
}

// of returns the effects of an input, made where it is new.
func (p *sourceProblem) of(in *pyro.Input) []float64 {
	for k, known := range p.inputs {
		if known == in {
			return p.effect[k]
		}
	}
	p.inputs = append(p.inputs, in)
	p.effect = append(p.effect, make([]float64, p.n*p.m))
	return p.effect[len(p.effect)-1]
}

func (p *sourceProblem) solve(hasStd bool) *SpectrometerCalibration {
	c := &SpectrometerCalibration{Gain: make([]float64, p.n), Std: make([]float64, p.n)}
	for _, in := range p.inputs {
		c.Effects = append(c.Effects, Shared{Name: in.Name, Relative: make([]float64, p.n)})
	}
	w := make([]float64, p.m)
	for i := range p.n {
		row := func(v []float64) []float64 { return v[i*p.m : (i+1)*p.m] }
		ratio, noise := row(p.ratio), row(p.noise)
		for _, v := range ratio {
			c.Gain[i] += v / float64(p.m)
		}
		// Noise is weighed against the model, so the mean is repeated with its result.
		for range 3 {
			sum := 0.0
			for j := range w {
				u := math.Pow(noise[j]/c.Gain[i], 2)
				for k := range p.effect {
					u += math.Pow(row(p.effect[k])[j], 2)
				}
				if w[j] = 1; u > 0 {
					w[j] = 1 / u
				}
				sum += w[j]
			}
			c.Gain[i] = 0
			for j := range w {
				w[j] /= sum
				c.Gain[i] += w[j] * ratio[j]
			}
		}
		for j := range w {
			c.Std[i] = math.Hypot(c.Std[i], w[j]*noise[j])
			for k := range p.effect {
				c.Effects[k].Relative[i] -= w[j] * row(p.effect[k])[j]
			}
		}
	}
	if hasStd {
		c.chi2, c.dof = p.chiSquared(c.Gain), p.n*(p.m-1)
	}
	return c
}

// chiSquared is the least sum of squares over the gains and the inputs, linearised at the
// gains: of (y_ij − γ_i − Σ a_ijk η_k)/σ_ij and η_k, with y the relative departure.
func (p *sourceProblem) chiSquared(gain []float64) float64 {
	q := len(p.inputs)
	normal, right := mat.NewSymDense(max(q, 1), nil), mat.NewVecDense(max(q, 1), nil)
	for k := range max(q, 1) {
		normal.SetSym(k, k, 1)
	}
	chi2 := 0.0
	mean := make([]float64, q)
	for i := range p.n {
		clear(mean)
		sum, y := 0.0, 0.0
		at := func(j int) (weight, departure float64) {
			σ := p.noise[i*p.m+j] / gain[i]
			return 1 / (σ * σ), p.ratio[i*p.m+j]/gain[i] - 1
		}
		for j := range p.m {
			w, d := at(j)
			sum += w
			y += w * d
			for k := range q {
				mean[k] += w * p.effect[k][i*p.m+j]
			}
		}
		for j := range p.m {
			w, d := at(j)
			d -= y / sum
			chi2 += w * d * d
			for k := range q {
				a := p.effect[k][i*p.m+j] - mean[k]/sum
				right.SetVec(k, right.AtVec(k)+w*a*d)
				for l := k; l < q; l++ {
					normal.SetSym(k, l, normal.At(k, l)+w*a*(p.effect[l][i*p.m+j]-mean[l]/sum))
				}
			}
		}
	}
	var factor mat.Cholesky
	factor.Factorize(normal) // the identity and a sum of squares: positive definite
	var η mat.VecDense
	if err := factor.SolveVecTo(&η, right); err != nil {
		return chi2 // badly conditioned: the sum without the inputs is the larger
	}
	return max(chi2-mat.Dot(right, &η), 0)
}

// ChiSquared returns the sum of squared departures of the spectra from each other, in units
// of their uncertainty with what they share allowed for, and its degrees of freedom: channels
// times (spectra − 1). There are none (0, 0) without uncertainties of the signals.
func (c *SpectrometerCalibration) ChiSquared() (chi2 float64, degreesOfFreedom int) {
	return c.chi2, c.dof
}

// RelativeStd returns the whole relative standard uncertainty of the gain of channel i, of
// its own part and of all that it shares.
func (c *SpectrometerCalibration) RelativeStd(i int) float64 {
	u := c.Std[i] / c.Gain[i]
	for _, e := range c.Effects {
		u = math.Hypot(u, e.Relative[i])
	}
	return u
}
