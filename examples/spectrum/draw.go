package main

import (
	"fmt"
	"math"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"candent/examples/internal/picture"
	"candent/fit"
	"candent/pyro"
)

// draw writes four panels: data and fit, residuals, emissivity, and the curve χ²(T).
func draw(file string, e estimated) error {
	panels := make([][]*plot.Plot, 2)
	data, residuals, err := drawData(e)
	if err != nil {
		return err
	}
	curve, err := drawEmissivity(e)
	if err != nil {
		return err
	}
	chi, err := drawCurve(e)
	if err != nil {
		return err
	}
	panels[0], panels[1] = []*plot.Plot{data, curve}, []*plot.Plot{residuals, chi}
	return picture.Write(file, panels, 24*vg.Centimeter, 16*vg.Centimeter)
}

func drawData(e estimated) (data, residuals *plot.Plot, err error) {
	data = picture.New(name(e.spectrum.ID)+": readings and fit", "wavelength / µm", "spectral radiance / W/(m² sr µm)")
	scale := 1e-6
	if e.spectrum.Relative {
		data.Y.Label.Text = "signal"
		scale = 1
	}
	residuals = picture.New("residuals", "wavelength / µm", "(reading − fit) / σ")
	var points, rest picture.Errors
	var fitted plotter.XYs
	for i, λ := range e.spectrum.Wavelengths {
		x := λ.Micrometres()
		m, σ, ok := e.result.Model(i)
		u := σ
		if e.reading.Std != nil {
			u = e.reading.Std[i]
		}
		points.Add(x, e.reading.Signal[i]*scale, u*scale)
		if ok {
			fitted = append(fitted, plotter.XY{X: x, Y: m * scale})
			rest.Add(x, (e.reading.Signal[i]-m)/σ, 1)
		}
	}
	if err := picture.AddLine(data, fitted, picture.Fit); err != nil {
		return nil, nil, err
	}
	if err := points.AddTo(data); err != nil {
		return nil, nil, err
	}
	picture.AddZero(residuals)
	return data, residuals, rest.AddTo(residuals)
}

func drawEmissivity(e estimated) (*plot.Plot, error) {
	what := "emissivity"
	if e.result.Relative() {
		what = "amplitude"
	}
	p := picture.New(what+", 95 % band at the estimate", "wavelength / µm", what)
	var mid, lo, hi plotter.XYs
	for i, λ := range e.spectrum.Wavelengths {
		ε, u, hasStd, ok := e.result.Emissivity(i)
		if !ok {
			continue
		}
		x := λ.Micrometres()
		mid = append(mid, plotter.XY{X: x, Y: ε})
		if hasStd {
			lo = append(lo, plotter.XY{X: x, Y: ε - 1.96*u})
			hi = append(hi, plotter.XY{X: x, Y: ε + 1.96*u})
		}
	}
	if err := picture.AddBand(p, lo, hi); err != nil {
		return nil, err
	}
	return p, picture.AddLine(p, mid, picture.Fit)
}

// drawCurve draws χ² less its minimum around the interval, and where the 95 % level cuts.
func drawCurve(e estimated) (*plot.Plot, error) {
	p := picture.New("χ²(T) with all else eliminated", "temperature / K", "χ² above its minimum")
	iv, _ := e.result.Interval()
	width := float64(iv.High - iv.Low)
	lo, hi := float64(iv.Low)-0.6*width, float64(iv.High)+0.6*width
	lo, hi = math.Max(lo, 200), math.Min(hi, 6000)
	const steps = 300
	t := make([]pyro.Temperature, steps+1)
	for i := range t {
		t[i] = pyro.Temperature(lo + (hi-lo)*float64(i)/steps)
	}
	chi2, _, err := e.e.Curve(e.reading, t)
	if err != nil {
		return nil, fmt.Errorf("curve: %w", err)
	}
	least := math.Inf(1)
	for _, v := range chi2 {
		least = math.Min(least, v)
	}
	const top = 16 // of Δχ²: the curve is drawn in pieces below it
	var piece plotter.XYs
	for i, v := range chi2 {
		if v-least <= top {
			piece = append(piece, plotter.XY{X: float64(t[i]), Y: v - least})
		}
		if v-least > top || i == steps {
			if err := picture.AddLine(p, piece, picture.Fit); err != nil {
				return nil, err
			}
			piece = nil
		}
	}
	if e.result.State() == fit.Determined {
		for _, x := range []float64{float64(iv.Low), float64(iv.High)} {
			if err := picture.AddLine(p, plotter.XYs{{X: x, Y: 0}, {X: x, Y: 8}}, picture.Mark); err != nil {
				return nil, err
			}
		}
	}
	return p, nil
}
