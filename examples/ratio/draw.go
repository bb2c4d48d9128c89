package main

import (
	"errors"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"candent/examples/internal/picture"
	"candent/examples/internal/show"
	"candent/fit/readings"
)

// maxDrawn bounds the memory of a picture; every second point is dropped beyond.
const maxDrawn = 4000

// series is temperature, its 95 % band and the amplitude against time or row.
type series struct {
	t, lo, hi, amplitude plotter.XYs
	every, count         int
	seconds              bool
}

func (s *series) add(row *readings.Row, number int, r estimate, unit show.Unit) {
	if s.every == 0 {
		s.every = 1
	}
	if s.count++; s.count%s.every != 0 {
		return
	}
	x := float64(number)
	if s.seconds = row.HasTimeS; s.seconds {
		x = row.TimeS
	}
	s.t = append(s.t, plotter.XY{X: x, Y: unit.In(r.t)})
	s.amplitude = append(s.amplitude, plotter.XY{X: x, Y: r.amplitude})
	if r.lo != nil && r.hi != nil {
		s.lo = append(s.lo, plotter.XY{X: x, Y: unit.In(*r.lo)})
		s.hi = append(s.hi, plotter.XY{X: x, Y: unit.In(*r.hi)})
	}
	if len(s.t) == maxDrawn {
		for _, xy := range []*plotter.XYs{&s.t, &s.lo, &s.hi, &s.amplitude} {
			*xy = half(*xy)
		}
		s.every *= 2
	}
}

func half(xy plotter.XYs) plotter.XYs {
	out := xy[:0]
	for i := 0; i < len(xy); i += 2 {
		out = append(out, xy[i])
	}
	return out
}

func (s *series) draw(file string, unit show.Unit) error {
	if len(s.t) == 0 {
		return errors.New("nothing to draw: no row could be estimated")
	}
	x := "row"
	if s.seconds {
		x = "time / s"
	}
	top := picture.New("two-colour temperature and its 95 % interval", x, "temperature / "+unit.String())
	if err := picture.AddBand(top, s.lo, s.hi); err != nil {
		return err
	}
	if err := picture.AddLine(top, s.t, picture.Fit); err != nil {
		return err
	}
	bottom := picture.New("amplitude: emissivity × window × fill × gain", x, "amplitude")
	if err := picture.AddLine(bottom, s.amplitude, picture.Points); err != nil {
		return err
	}
	return picture.Write(file, [][]*plot.Plot{{top}, {bottom}}, 20*vg.Centimeter, 15*vg.Centimeter)
}
