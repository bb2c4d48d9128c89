package fit_test

import (
	"math"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// A channel known by its calibration curve alone meets walls, a window and an emissivity that
// change over the band through two nodes placed by A and B. The curve is the one through Zn,
// Al and Ag of a rectangular band 0.85 to 0.95 µm (mpmath, 40 digits), whose interpolation
// error between 1000 and 1340 K is below 14 mK.
func TestACurveMeetsWallsThroughTwoNodes(t *testing.T) {
	curve := detector.Curve{A: 0.895660185301e-6, B: 6.62377857494e-6, C: 20306537.5004}
	band, err := pyro.FlatTop(850*pyro.Nanometre, 950*pyro.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	ε := func(um float64) float64 { return 0.6 - 0.5*(um-0.9) }
	pane := law(func(um float64) float64 { return 0.9 - 0.8*(um-0.9) })
	s := scene{T: 1250, ε: ε, walls: one(1150), τ: pane}
	signal := s.read(band, 0.05) * 0.1e-6 // ∫ dλ, as the curve's signal
	r := estimate(t, []*pyro.Band{band}, fit.Assume{
		Emissivity:   emissivity.Polynomial(1).CentredOn(0.9*µm).Fix("level", 0.6).Fix("slope_per_um", -0.5),
		Surroundings: sightline.Enclosure(input("wall", 1150, 5)),
		Path:         []sightline.Layer{{Name: "pane", Shape: pane}},
		Detectors:    []detector.Channel{{Curve: &curve, CurveCov: [3][3]float64{{1e-6, 0, 0}, {0, 1e-22, 0}, {0, 0, 1e-16}}, CurveName: "calibration"}},
		Range:        fit.Range{Min: 800, Max: 2000},
	}, fit.Readings{Signal: []float64{signal}, Std: []float64{signal * 1e-3}})
	T, _ := determined(t, r)
	close(t, "T", T, 1250, 0.03) // the curve's own error, and the fourth order of the width
	names := map[string]bool{}
	for _, share := range r.Budget() {
		names[share.Name] = true
	}
	if !names["calibration"] || !names["wall"] {
		t.Errorf("budget %v", r.Budget())
	}
}

// A curve's covariance gives the reading the uncertainty that the calibration itself states.
func TestACalibrationsUncertaintyIsCarriedOn(t *testing.T) {
	var points []fit.CalibrationPoint
	true_ := detector.Curve{A: 0.9e-6, B: 7e-6, C: 2e7}
	for _, T := range []pyro.Temperature{1000, 1150, 1300, 1450} {
		points = append(points, fit.CalibrationPoint{T: T, StdK: 0.5, Signal: true_.Signal(T), Std: 2e-4 * true_.Signal(T)})
	}
	c, err := fit.Calibrate(points, nil)
	if err != nil {
		t.Fatal(err)
	}
	cov, ok := c.Covariance()
	if !ok {
		t.Fatal("no covariance")
	}
	band, err := pyro.FlatTop(850*pyro.Nanometre, 950*pyro.Nanometre)
	if err != nil {
		t.Fatal(err)
	}
	for _, T := range []pyro.Temperature{1050, 1300, 1700} {
		y := c.Curve.Signal(T)
		want, err := c.Read(y, 1e-3*y)
		if err != nil {
			t.Fatal(err)
		}
		r := estimate(t, []*pyro.Band{band}, fit.Assume{Emissivity: emissivity.Grey().Fix("level", 1),
			Detectors: []detector.Channel{{Curve: &c.Curve, CurveCov: cov}}}, fit.Readings{Signal: []float64{y}, Std: []float64{1e-3 * y}})
		got, u := determined(t, r)
		close(t, "T", got, float64(T), 1e-6)
		close(t, "u", u, want.StdK, 1e-6*want.StdK)
	}
}

// The wall is read by a second instrument with the same calibration: a gain that is off makes
// both read off by the same factor, so that the piece is off as if nothing else shone.
func TestASecondInstrumentSharesItsCalibration(t *testing.T) {
	bands := lines(t, 1.6, 1.6, 1)
	s := scene{T: 1400, ε: func(float64) float64 { return 0.7 }, walls: one(1300)}
	for _, shared := range []bool{true, false} {
		gain := input("gain", 2, 0.04)
		wallGain := gain
		if !shared {
			wallGain = input("wall gain", 2, 0.04)
		}
		reading := &pyro.Input{Name: "wall reading", Value: 2 * planck(1.6, 1300), Std: 1e-4 * planck(1.6, 1300), PerReading: true}
		y := []float64{2 * s.radiance(1.6)}
		r := estimate(t, bands, fit.Assume{
			Emissivity:   emissivity.Grey().Fix("level", 0.7),
			Surroundings: sightline.Surroundings{Zones: []sightline.Zone{{Name: "roof", Reading: []*pyro.Input{reading}, Gain: []*pyro.Input{wallGain}}}},
			Detectors:    []detector.Channel{{Gain: gain}},
		}, fit.Readings{Signal: y, Std: scaled(y, 1e-5)})
		T, _ := determined(t, r)
		close(t, "T", T, 1400, 1e-6)
		for _, share := range r.Budget() {
			// L = (s/g − 0.3·w/g_w)/0.7: with one gain dL/L = −dg/g; with two the first counts s/(0.7 g L).
			n := math.Log(planck(1.6, 1401)/planck(1.6, 1399)) / 2
			want := -0.02 / n
			if !shared {
				want *= s.radiance(1.6) / (0.7 * planck(1.6, 1400))
			}
			if share.Name == "gain" {
				close(t, "effect of the gain", share.EffectK, want, 1e-4*math.Abs(want))
			}
		}
	}
}
