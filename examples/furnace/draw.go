package main

import (
	"errors"
	"image/color"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"candent/examples/internal/picture"
	"candent/examples/internal/show"
	"candent/fit"
)

// draw shows the load with its 95 % intervals, and above it the walls and what ignoring them gives.
func draw(file string, all []reading, unit show.Unit) error {
	var load, lo, hi, wall, blind plotter.XYs
	for i, r := range all {
		x := float64(i + 1)
		wall = append(wall, plotter.XY{X: x, Y: unit.In(r.wall)})
		if r.blind != nil {
			blind = append(blind, plotter.XY{X: x, Y: unit.In(*r.blind)})
		}
		t, state := r.right.Temperature()
		iv, ok := r.right.Interval()
		if state != fit.Determined || !ok {
			continue
		}
		load = append(load, plotter.XY{X: x, Y: unit.In(t)})
		lo = append(lo, plotter.XY{X: x, Y: unit.In(iv.Low)})
		hi = append(hi, plotter.XY{X: x, Y: unit.In(iv.High)})
	}
	if len(load) == 0 {
		return errors.New("nothing to draw: no row has a temperature")
	}
	p := picture.New("load with its 95 % interval, its walls, and the load with the walls ignored", "row", "temperature / "+unit.String())
	if err := picture.AddBand(p, lo, hi); err != nil {
		return err
	}
	for _, l := range []struct {
		name string
		xy   plotter.XYs
		c    color.Color
	}{{"load", load, picture.Fit}, {"walls", wall, picture.Points}, {"walls ignored", blind, picture.Mark}} {
		if err := picture.AddNamed(p, l.name, l.xy, l.c); err != nil {
			return err
		}
	}
	return picture.Write(file, [][]*plot.Plot{{p}}, 20*vg.Centimeter, 11*vg.Centimeter)
}
