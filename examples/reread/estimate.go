package main

import (
	"errors"
	"fmt"
	"math"

	"candent/examples/internal/show"
	"candent/pyro"
	"candent/pyro/detector"
)

// model is a temperature as a function of inputs with standard uncertainties.
type model struct {
	inputs []input
	at     func(shown pyro.Temperature, x []float64) (pyro.Temperature, error)
}

// input is something known; lo and hi are its limits.
type input struct {
	name               string
	value, std, lo, hi float64
}

func (in input) clamp(v float64) float64 { return min(max(v, in.lo), in.hi) }

// The first two inputs of every model are what is added to the indication, in K.
func indication(indicatorStd float64) []input {
	inf := math.Inf(1)
	return []input{{"resolution of the log", 0, 0, -inf, inf}, {"the indicator itself", 0, indicatorStd, -inf, inf}}
}

// share is what one standard uncertainty of an input adds to the temperature, signed.
type share struct {
	Input string  `json:"input"`
	K     float64 `json:"share_K"`
}

// estimate is what one row gives. An end that is nil is open.
type estimate struct {
	shown  pyro.Temperature
	t      pyro.Temperature
	std    float64
	lo, hi *pyro.Temperature
	budget []share
	notes  []string
}

func (e estimate) determined() bool { return e.lo != nil && e.hi != nil }

// estimate returns the temperature for an indication of a resolution (step, K). Shares are
// the linearised ones; the ends of the interval are where all inputs together have moved by
// 1.96 standard uncertainties in the direction that moves the temperature most, within
// their limits.
func (m *model) estimate(shown pyro.Temperature, step float64, end *detector.CensoredError) (e estimate, err error) {
	e.shown = shown
	x := make([]float64, len(m.inputs))
	std := make([]float64, len(m.inputs))
	for i, in := range m.inputs {
		x[i], std[i] = in.value, in.std
	}
	if end == nil { // at an end the last digit says nothing
		std[0] = step * show.Rectangular
	}
	if e.t, err = m.at(shown, x); err != nil {
		return e, err
	}
	direction := make([]float64, len(x))
	for i, in := range m.inputs {
		if std[i] == 0 {
			continue
		}
		h := 1e-3 * std[i]
		up, down := in.clamp(x[i]+h), in.clamp(x[i]-h)
		x[i] = up
		above, err1 := m.at(shown, x)
		x[i] = down
		below, err2 := m.at(shown, x)
		x[i] = in.value
		if err := errors.Join(err1, err2); err != nil {
			return e, err
		}
		direction[i] = float64(above-below) / (up - down) * std[i]
		e.budget = append(e.budget, share{in.name, direction[i]})
		e.std = math.Hypot(e.std, direction[i])
	}
	side := func(z float64) *pyro.Temperature {
		if e.std == 0 {
			return &e.t
		}
		moved := make([]float64, len(x))
		for i, in := range m.inputs {
			moved[i] = in.clamp(x[i] + z*std[i]*direction[i]/e.std)
		}
		t, err := m.at(shown, moved)
		if err != nil {
			return nil
		}
		return &t
	}
	if end == nil || end.AtHigh {
		e.lo = side(-show.Normal95)
	}
	if end == nil || !end.AtHigh {
		e.hi = side(show.Normal95)
	}
	if e.lo == nil && e.hi == nil {
		return e, errors.New("no temperature of either end fits the assumptions")
	}
	return e, nil
}

// scene is what the target of one band is taken for.
type scene struct{ emissivity, window, background input }

// oneBand inverts
//
//	S = τ(ε S_b(T) + (1 − ε) S_b(T_bg))
//
// for the radiance S that the indicator must have seen.
func oneBand(d detector.Indicator, s scene, indicatorStd float64) *model {
	d.Low, d.High, d.Resolution = pyro.BandMin, pyro.BandMax, 0
	return &model{
		inputs: append(indication(indicatorStd), s.emissivity, s.window, s.background),
		at: func(shown pyro.Temperature, x []float64) (pyro.Temperature, error) {
			radiance, err := d.Radiance(shown + pyro.Temperature(x[0]+x[1]))
			if err != nil && !errors.Is(err, detector.ErrCensored) {
				return 0, err
			}
			ε, τ, background := x[2], x[3], pyro.Temperature(x[4])
			own := radiance/τ - (1-ε)*d.Band.Radiance(background)
			if !(own > 0) {
				return 0, fmt.Errorf("the surroundings at %.0f K alone, reflected with 1 − %.3g, give more than was measured: they are cooler, or the emissivity is higher", float64(background), ε)
			}
			return d.Band.RadianceTemperature(own / ε), nil
		},
	}
}

// twoColour inverts the ratio that the indicator must have measured for another emissivity
// ratio.
func twoColour(d detector.RatioIndicator, ratio input, indicatorStd float64) *model {
	d.Low, d.High = d.Pair.Range()
	d.Resolution = 0
	return &model{
		inputs: append(indication(indicatorStd), ratio),
		at: func(shown pyro.Temperature, x []float64) (pyro.Temperature, error) {
			r, err := d.Ratio(shown + pyro.Temperature(x[0]+x[1]))
			if err != nil && !errors.Is(err, detector.ErrCensored) {
				return 0, err
			}
			return d.Pair.Temperature(r, x[2])
		},
	}
}
