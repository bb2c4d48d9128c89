// Package picture draws the example programs' plots with gonum/plot.
package picture

import (
	"fmt"
	"image/color"
	"os"
	"path/filepath"
	"strconv"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/plotter"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgsvg"
)

// Colours of what is drawn.
var (
	Fit    = color.RGBA{R: 0xb0, G: 0x3a, B: 0x10, A: 0xff}
	Points = color.RGBA{R: 0x20, G: 0x30, B: 0x45, A: 0xff}
	Mark   = color.RGBA{R: 0x70, G: 0x78, B: 0x80, A: 0xff}
	Shade  = color.RGBA{R: 0xf2, G: 0xd3, B: 0xbf, A: 0xff}
	Before = color.RGBA{R: 0xe4, G: 0xe7, B: 0xeb, A: 0xff} // what was assumed beforehand
)

// New returns an empty plot with a title and labelled axes.
func New(title, x, y string) *plot.Plot {
	p := plot.New()
	p.Title.Text, p.X.Label.Text, p.Y.Label.Text = title, x, y
	p.Title.Padding = vg.Points(6)
	p.X.Padding, p.Y.Padding = vg.Points(4), vg.Points(4)
	p.X.Tick.Marker, p.Y.Tick.Marker = ticks{}, ticks{}
	grid := plotter.NewGrid()
	grid.Vertical.Color, grid.Horizontal.Color = color.Gray{Y: 0xe4}, color.Gray{Y: 0xe4}
	p.Add(grid)
	return p
}

// ticks are the default ones with labels that say the value in full.
type ticks struct{}

// Ticks implements plot.Ticker.
func (ticks) Ticks(lo, hi float64) []plot.Tick {
	list := plot.DefaultTicks{}.Ticks(lo, hi)
	for i := range list {
		if list[i].Label != "" {
			list[i].Label = strconv.FormatFloat(list[i].Value, 'g', 7, 64)
		}
	}
	return list
}

// AddLine adds a line through the points.
func AddLine(p *plot.Plot, xy plotter.XYs, c color.Color) error {
	if len(xy) == 0 {
		return nil
	}
	l, err := plotter.NewLine(xy)
	if err != nil {
		return err
	}
	l.Color, l.Width = c, vg.Points(1.4)
	if c == Mark {
		l.Dashes, l.Width = []vg.Length{vg.Points(4), vg.Points(3)}, vg.Points(1)
	}
	p.Add(l)
	return nil
}

// AddNamed adds a line with its name in the legend; points are marked where they are few.
func AddNamed(p *plot.Plot, name string, xy plotter.XYs, c color.Color) error {
	if len(xy) == 0 {
		return nil
	}
	l, err := plotter.NewLine(xy)
	if err != nil {
		return err
	}
	l.Color, l.Width = c, vg.Points(1.4)
	if c == Mark {
		l.Dashes = []vg.Length{vg.Points(4), vg.Points(3)}
	}
	p.Add(l)
	p.Legend.Add(name, l)
	p.Legend.Left, p.Legend.Top = false, false
	p.Legend.Padding = vg.Points(3)
	return nil
}

// AddBand shades between two lines over the same x.
func AddBand(p *plot.Plot, lo, hi plotter.XYs) error { return AddBandIn(p, lo, hi, Shade) }

// AddBandIn is AddBand in another colour.
func AddBandIn(p *plot.Plot, lo, hi plotter.XYs, c color.Color) error {
	if len(lo) < 2 {
		return nil
	}
	outline := append(plotter.XYs{}, hi...)
	for i := len(lo) - 1; i >= 0; i-- {
		outline = append(outline, lo[i])
	}
	band, err := plotter.NewPolygon(outline)
	if err != nil {
		return err
	}
	band.Color, band.LineStyle.Width = c, 0
	p.Add(band)
	return nil
}

// AddZero adds the line y = 0.
func AddZero(p *plot.Plot) {
	zero := plotter.NewFunction(func(float64) float64 { return 0 })
	zero.Color = Mark
	p.Add(zero)
}

// Errors are points with error bars of one standard uncertainty.
type Errors struct {
	plotter.XYs
	plotter.YErrors
}

// Add adds a point.
func (e *Errors) Add(x, y, u float64) {
	e.XYs = append(e.XYs, plotter.XY{X: x, Y: y})
	e.YErrors = append(e.YErrors, struct{ Low, High float64 }{u, u})
}

// AddTo adds the points to a plot.
func (e *Errors) AddTo(p *plot.Plot) error {
	if len(e.XYs) == 0 {
		return nil
	}
	bars, err := plotter.NewYErrorBars(e)
	if err != nil {
		return err
	}
	bars.Color = Points
	dots, err := plotter.NewScatter(e.XYs)
	if err != nil {
		return err
	}
	dots.GlyphStyle = draw.GlyphStyle{Color: Points, Radius: vg.Points(2), Shape: draw.CircleGlyph{}}
	p.Add(bars, dots)
	return nil
}

// Write draws the panels, row by row, to an .svg or .png file.
func Write(file string, panels [][]*plot.Plot, width, height vg.Length) error {
	tiles := draw.Tiles{Rows: len(panels), Cols: len(panels[0]),
		PadTop: vg.Points(8), PadBottom: vg.Points(8), PadLeft: vg.Points(8), PadRight: vg.Points(14), PadX: vg.Points(18), PadY: vg.Points(14)}
	var canvas vg.CanvasWriterTo
	var area vg.CanvasSizer
	switch ext := strings.ToLower(filepath.Ext(file)); ext {
	case ".svg":
		c := vgsvg.New(width, height)
		canvas, area = c, c
	case ".png":
		c := vgimg.NewWith(vgimg.UseWH(width, height), vgimg.UseDPI(120))
		canvas, area = vgimg.PngCanvas{Canvas: c}, c
	default:
		return fmt.Errorf("-plot %s: the name must end in .svg or .png", file)
	}
	dc := draw.New(area)
	for i, row := range plot.Align(panels, tiles, dc) {
		for k, c := range row {
			if panels[i][k] != nil {
				panels[i][k].Draw(c)
			}
		}
	}
	f, err := os.Create(file)
	if err != nil {
		return err
	}
	if _, err := canvas.WriteTo(f); err != nil {
		f.Close()
		return err
	}
	return f.Close()
}
