package main

import (
	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"candent/examples/internal/picture"
	"candent/examples/internal/show"
	"candent/pyro"
)

// maxDrawn bounds the memory of a picture; every second point is dropped beyond.
const maxDrawn = 4000

// series is temperature and its 95 % band against time or row.
type series struct {
	t, lo, hi    plotter.XYs
	every, count int
	seconds      bool
}

func (s *series) add(r reading, number int, unit show.Unit) {
	if s.every == 0 {
		s.every = 1
	}
	if s.count++; s.count%s.every != 0 {
		return
	}
	x := float64(number)
	if s.seconds = r.timeS != nil; s.seconds {
		x = *r.timeS
	}
	lo, hi := r.interval()
	s.t = append(s.t, plotter.XY{X: x, Y: unit.In(r.T)})
	s.lo = append(s.lo, plotter.XY{X: x, Y: unit.In(lo)})
	s.hi = append(s.hi, plotter.XY{X: x, Y: unit.In(hi)})
	if len(s.t) == maxDrawn {
		s.t, s.lo, s.hi = half(s.t), half(s.lo), half(s.hi)
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

// draw writes the points' departures over the curve's 95 % band, and the log where there
// is one.
func draw(file string, c *calibrated, s series, unit show.Unit) error {
	top := picture.New("calibration: points less curve, and its 95 % band", "temperature / "+unit.String(), "departure / K")
	lo, hi := c.ends()
	margin := max((hi-lo)/7, 20)
	const steps = 120
	var under, over plotter.XYs
	for i := range steps + 1 {
		t := lo - margin + (hi-lo+2*margin)*pyro.Temperature(i)/steps
		r, err := c.curve.Read(c.signal(t), 0)
		if err != nil || c.noStd {
			continue
		}
		x, u := unit.In(t), show.Normal95*r.StdK
		under, over = append(under, plotter.XY{X: x, Y: -u}), append(over, plotter.XY{X: x, Y: u})
	}
	if err := picture.AddBand(top, under, over); err != nil {
		return err
	}
	picture.AddZero(top)
	var points picture.Errors
	for i, d := range c.curve.Departures() {
		u := 0.0
		if !c.noStd {
			u = c.pointStd(i)
		}
		points.Add(unit.In(c.points[i].T), -d, u)
	}
	if err := points.AddTo(top); err != nil {
		return err
	}
	panels := [][]*plot.Plot{{top}}
	if len(s.t) > 0 {
		x := "row"
		if s.seconds {
			x = "time / s"
		}
		bottom := picture.New("the log, its 95 % interval, and where the calibration ends", x, "temperature / "+unit.String())
		if err := picture.AddBand(bottom, s.lo, s.hi); err != nil {
			return err
		}
		for _, end := range []pyro.Temperature{lo, hi} {
			level := plotter.XYs{{X: s.t[0].X, Y: unit.In(end)}, {X: s.t[len(s.t)-1].X, Y: unit.In(end)}}
			if err := picture.AddLine(bottom, level, picture.Mark); err != nil {
				return err
			}
		}
		if err := picture.AddLine(bottom, s.t, picture.Fit); err != nil {
			return err
		}
		panels = append(panels, []*plot.Plot{bottom})
	}
	return picture.Write(file, panels, 20*vg.Centimeter, vg.Length(len(panels))*8*vg.Centimeter)
}
