package main

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"

	"candent/emissivity"
	"candent/examples/internal/picture"
	"candent/fit"
	"candent/pyro"
)

// draw writes four panels: data and fit, residuals, emissivity, and the curve χ²(T), or for a
// process the posterior of T.
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
	of := drawCurve
	if e.result.IntervalKind() == fit.PosteriorInterval {
		of = drawPosterior
	}
	temperature, err := of(e)
	if err != nil {
		return err
	}
	panels[0], panels[1] = []*plot.Plot{data, curve}, []*plot.Plot{residuals, temperature}
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
		m, σ, ok := e.explained(i)
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
	if len(fitted) == 1 {
		frame(data, fitted[0].X)
		frame(residuals, fitted[0].X)
	}
	picture.AddZero(residuals)
	return data, residuals, rest.AddTo(residuals)
}

// explained returns the reading that the estimate explains in channel i, and its noise. That of
// a process is the mean curve's at the median temperature.
func (e estimated) explained(i int) (m, σ float64, ok bool) {
	if e.result.IntervalKind() == fit.ProfileInterval {
		return e.result.Model(i)
	}
	t, state := e.result.Temperature()
	ε, _, _, ok := e.result.Emissivity(i)
	if state != fit.Determined || !ok {
		return 0, 0, false
	}
	return ε * pyro.Radiance(e.spectrum.Wavelengths[i], t), e.reading.Std[i], true
}

func drawEmissivity(e estimated) (*plot.Plot, error) {
	what := "emissivity"
	if e.result.Relative() {
		what = "amplitude"
	}
	p := picture.New(what+", 95 % band at the estimate", "wavelength / µm", what)
	process, random := e.surface.(emissivity.Process)
	if random {
		p.Title.Text = what + ", 95 % band"
		if !process.IsRelative() {
			p.Title.Text += "; dashed: assumed beforehand"
		}
		if err := drawAssumed(p, process, e.spectrum.Wavelengths); err != nil {
			return nil, err
		}
	}
	T, _ := e.result.Temperature()
	iv, _ := e.result.Interval()
	var mid, lo, hi plotter.XYs
	var alone picture.Errors
	for i, λ := range e.spectrum.Wavelengths {
		ε, u, hasStd, ok := e.result.Emissivity(i)
		if !ok {
			continue
		}
		x := λ.Micrometres()
		mid = append(mid, plotter.XY{X: x, Y: ε})
		if !hasStd {
			continue
		}
		below, above := ε-1.96*u, ε+1.96*u
		if random { // the reading ties ε to T far closer than either is known
			black := pyro.Radiance(λ, T)
			below, above = ε*black/pyro.Radiance(λ, iv.High), ε*black/pyro.Radiance(λ, iv.Low)
		}
		lo, hi = append(lo, plotter.XY{X: x, Y: below}), append(hi, plotter.XY{X: x, Y: above})
		alone.XYs = append(alone.XYs, plotter.XY{X: x, Y: ε})
		alone.YErrors = append(alone.YErrors, struct{ Low, High float64 }{ε - below, above - ε})
	}
	if err := picture.AddBand(p, lo, hi); err != nil {
		return nil, err
	}
	if random && !process.IsRelative() {
		if err := drawEdges(p, process, e.spectrum.Wavelengths); err != nil {
			return nil, err
		}
	}
	if len(mid) == 1 {
		frame(p, mid[0].X)
		return p, alone.AddTo(p)
	}
	return p, picture.AddLine(p, mid, picture.Fit)
}

// frame gives a single wavelength some room.
func frame(p *plot.Plot, x float64) { p.X.Min, p.X.Max = 0.97*x, 1.03*x }

// drawAssumed shades the range of ε that a process assumes beforehand.
func drawAssumed(p *plot.Plot, process emissivity.Process, λ []pyro.Wavelength) error {
	if process.IsRelative() {
		return nil
	}
	p.Y.Min, p.Y.Max = 0, 1
	lo, hi := assumed(process, λ)
	return picture.AddBandIn(p, lo, hi, picture.Before)
}

// drawEdges draws where the range assumed ends, over the band that was found.
func drawEdges(p *plot.Plot, process emissivity.Process, λ []pyro.Wavelength) error {
	lo, hi := assumed(process, λ)
	return errors.Join(picture.AddLine(p, lo, picture.Mark), picture.AddLine(p, hi, picture.Mark))
}

// assumed returns the central 95 % of ε that a process assumes over the wavelengths.
func assumed(process emissivity.Process, λ []pyro.Wavelength) (lo, hi plotter.XYs) {
	first, last := λ[0], λ[len(λ)-1]
	if first == last {
		first, last = 0.97*first, 1.03*last
	}
	const steps = 40
	for k := range steps + 1 {
		at := first + (last-first)*pyro.Wavelength(k)/steps
		a, b := process.Range(at)
		lo = append(lo, plotter.XY{X: at.Micrometres(), Y: a})
		hi = append(hi, plotter.XY{X: at.Micrometres(), Y: b})
	}
	return lo, hi
}

// drawPosterior draws the density of the temperature, the 95 % interval shaded.
func drawPosterior(e estimated) (*plot.Plot, error) {
	p := picture.New("posterior of the temperature, its 95 % interval shaded", "temperature / K", "density / (1/K)")
	t, density := e.result.Posterior()
	iv, _ := e.result.Interval()
	most := slices.Max(density)
	var line, shade, floor plotter.XYs
	within := func(x, y float64) {
		shade, floor = append(shade, plotter.XY{X: x, Y: y}), append(floor, plotter.XY{X: x})
	}
	for i, T := range t {
		x, y := float64(T), density[i]
		for _, end := range []float64{float64(iv.Low), float64(iv.High)} {
			if i > 0 && end > float64(t[i-1]) && end < x {
				f := (end - float64(t[i-1])) / (x - float64(t[i-1]))
				within(end, density[i-1]+f*(y-density[i-1]))
			}
		}
		if T >= iv.Low && T <= iv.High {
			within(x, y)
		}
		if y >= 1e-3*most { // the far tails are no news
			line = append(line, plotter.XY{X: x, Y: y})
		}
	}
	if err := picture.AddBand(p, floor, shade); err != nil {
		return nil, err
	}
	if T, state := e.result.Temperature(); state == fit.Determined {
		if err := picture.AddLine(p, plotter.XYs{{X: float64(T), Y: 0}, {X: float64(T), Y: most}}, picture.Mark); err != nil {
			return nil, err
		}
	}
	p.Y.Min = 0
	return p, picture.AddLine(p, line, picture.Fit)
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
