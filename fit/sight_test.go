package fit_test

import (
	"fmt"
	"math"
	"testing"

	"candent/emissivity"
	"candent/fit"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

func input(name string, value, std float64) *pyro.Input {
	return &pyro.Input{Name: name, Value: value, Std: std}
}

// law is a Spectrum given by a formula.
type law func(um float64) float64

func (f law) At(λ pyro.Wavelength) float64 { return f(float64(λ) * 1e6) }

// planck is Planck's law written out once more, for simulations that share no code with what
// they test.
func planck(um, T float64) float64 {
	const h, c, k = 6.62607015e-34, 299792458, 1.380649e-23
	λ := um * 1e-6
	return 2 * h * c * c / math.Pow(λ, 5) / (math.Exp(h*c/(λ*k*T)) - 1)
}

// scene is everything that a simulated reading depends on, at one wavelength.
type scene struct {
	T      float64
	ε      func(um float64) float64
	walls  []struct{ factor, T float64 }
	wallε  func(um float64) float64
	self   float64
	τ      func(um float64) float64
	fill   float64 // 0 means 1
	rest   float64
	spread float64
	gasT   float64
	gasτ   func(um float64) float64
}

// radiance is the measurement equation, written out.
func (s scene) radiance(um float64) float64 {
	own := planck(um, s.T)
	if s.spread > 0 { // mean over a normal distribution, by the trapezoidal rule
		own = 0
		sum := 0.0
		for z := -8.0; z <= 8; z += 1.0 / 16 {
			f := math.Exp(-z * z / 2)
			own += f * planck(um, s.T+s.spread*z)
			sum += f
		}
		own /= sum
	}
	in, rest := 0.0, 1-s.self
	for _, w := range s.walls {
		e := 1.0
		if s.wallε != nil {
			e = s.wallε(um)
		}
		in += w.factor * e * planck(um, w.T)
		rest -= w.factor
	}
	// Radiosity of the surface, which sees itself: J = εL + (1−ε)(in + self·J).
	ε := s.ε(um)
	x := (ε*own + (1-ε)*in) / (1 - (1-ε)*s.self)
	if s.fill > 0 {
		x *= s.fill
		if s.rest > 0 {
			x += (1 - s.fill) * planck(um, s.rest)
		}
	}
	if s.τ != nil {
		x *= s.τ(um)
	}
	if s.gasτ != nil {
		x = s.gasτ(um)*x + (1-s.gasτ(um))*planck(um, s.gasT)
	}
	return x
}

// read is what a band reads of a scene: Simpson's rule over a flat top, or one wavelength.
func (s scene) read(b *pyro.Band, half float64) float64 {
	um := float64(b.Mean()) * 1e6
	if half == 0 {
		return s.radiance(um)
	}
	a, z := um-half, um+half
	const n = 400
	sum := 0.0
	for i := range n + 1 {
		f := float64(2 + 2*(i%2))
		if i == 0 || i == n {
			f = 1
		}
		sum += f * s.radiance(a+(z-a)*float64(i)/n)
	}
	return sum / (3 * n)
}

// one is a single wall that fills the half-space.
func one(T float64) []struct{ factor, T float64 } { return []struct{ factor, T float64 }{{1, T}} }

func TestSightsRoundTripThroughAnIndependentSimulation(t *testing.T) {
	linear := func(um float64) float64 { return 0.6 - 0.1*(um-1.2) }
	soft := law(func(um float64) float64 { return 0.9 - 0.04*um })
	gas := law(func(um float64) float64 { return 0.05 + 0.1*um })
	base := scene{T: 1400, ε: linear}
	with := func(change func(*scene)) scene {
		s := base
		change(&s)
		return s
	}
	cases := []struct {
		name   string
		scene  scene
		assume fit.Assume
	}{
		{"enclosure", with(func(s *scene) { s.walls = one(1250) }),
			fit.Assume{Surroundings: sightline.Enclosure(input("wall", 1250, 8))}},
		{"enclosure hotter than the piece", with(func(s *scene) { s.walls = one(1550) }),
			fit.Assume{Surroundings: sightline.Enclosure(input("wall", 1550, 8))}},
		{"zones, one of them grey, the rest cold", with(func(s *scene) {
			s.walls = []struct{ factor, T float64 }{{0.3, 1300}, {0.5, 1100}}
			s.wallε = soft
		}), fit.Assume{Surroundings: sightline.Surroundings{Zones: []sightline.Zone{
			{Name: "roof", Factor: input("F roof", 0.3, 0.02), Temperature: input("roof", 1300, 8), Emissivity: soft},
			{Name: "floor", Factor: input("F floor", 0.5, 0.02), Temperature: input("floor", 1100, 8), Emissivity: soft}}}}},
		{"the last zone is the rest", with(func(s *scene) { s.walls = []struct{ factor, T float64 }{{0.3, 1300}, {0.7, 1100}} }),
			fit.Assume{Surroundings: sightline.Surroundings{Remainder: sightline.LastZone, Zones: []sightline.Zone{
				{Name: "roof", Factor: input("F roof", 0.3, 0.02), Temperature: input("roof", 1300, 8)},
				{Name: "floor", Temperature: input("floor", 1100, 8)}}}}},
		{"pieces that see each other", with(func(s *scene) { s.walls = []struct{ factor, T float64 }{{0.6, 1250}}; s.self = 0.4 }),
			fit.Assume{Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{
				{Name: "roof", Factor: input("F roof", 0.6, 0.02), Temperature: input("roof", 1250, 8)}}}}},
		{"a window with a spectrum", with(func(s *scene) { s.τ = func(um float64) float64 { return 0.95 * soft(um) } }),
			fit.Assume{Path: []sightline.Layer{{Name: "pane", Transmittance: input("τ", 0.95, 0.01), Shape: soft}}}},
		{"fouling with a slope", with(func(s *scene) { s.τ = func(um float64) float64 { return 0.8 * math.Pow(um/1.2, 0.3) } }),
			fit.Assume{Path: []sightline.Layer{sightline.Fouling(input("τ", 0.8, 0.02), input("slope", 0.3, 0.1), 1.2*µm)}}},
		{"hot gas", with(func(s *scene) { s.gasT = 1600; s.gasτ = func(um float64) float64 { return math.Exp(-0.8 * gas(um)) } }),
			fit.Assume{Path: []sightline.Layer{sightline.Gas(gas, input("length", 0.8, 0.05), input("gas", 1600, 50))}}},
		{"soot", with(func(s *scene) {
			s.gasT = 1700
			s.gasτ = func(um float64) float64 { return math.Exp(-0.05 * math.Pow(um, -0.95)) }
		}), fit.Assume{Path: []sightline.Layer{sightline.Soot(input("KL", 0.05, 0.01), 0.95, input("flame", 1700, 50))}}},
		{"part of the field", with(func(s *scene) { s.fill = 0.7; s.rest = 1100 }),
			fit.Assume{Field: sightline.Field{Fraction: input("fill", 0.7, 0.02), Rest: input("rest", 1100, 10)}}},
		{"all together", with(func(s *scene) {
			s.walls = []struct{ factor, T float64 }{{0.6, 1300}}
			s.self = 0.4
			s.fill, s.rest = 0.9, 1000
			s.τ = soft
			s.gasT, s.gasτ = 1500, func(um float64) float64 { return math.Exp(-0.3 * gas(um)) }
		}), fit.Assume{
			Surroundings: sightline.Surroundings{Remainder: sightline.Itself, Zones: []sightline.Zone{
				{Name: "roof", Factor: input("F roof", 0.6, 0.02), Temperature: input("roof", 1300, 8)}}},
			Field: sightline.Field{Fraction: input("fill", 0.9, 0.02), Rest: input("rest", 1000, 10)},
			Path:  []sightline.Layer{{Name: "pane", Shape: soft}, sightline.Gas(gas, input("length", 0.3, 0.05), input("gas", 1500, 50))}}},
	}
	for _, wideBands := range []bool{false, true} {
		bands, half := lines(t, 0.9, 1.6, 8), 0.0
		if wideBands {
			half = 0.03
			bands = nil
			for i := range 8 {
				um := 0.9 + 0.1*float64(i)
				b, err := pyro.FlatTop(pyro.Wavelength(um-half)*µm, pyro.Wavelength(um+half)*µm)
				if err != nil {
					t.Fatal(err)
				}
				bands = append(bands, b)
			}
		}
		for _, c := range cases {
			t.Run(fmt.Sprintf("%s/wide=%v", c.name, wideBands), func(t *testing.T) {
				if wideBands && c.scene.self > 0 {
					t.Skip("a wide band's apparent emissivity is that of its mean emissivity: not exact, and said so")
				}
				y := make([]float64, len(bands))
				for i, b := range bands {
					y[i] = c.scene.read(b, half)
				}
				a := c.assume
				a.Emissivity = emissivity.Polynomial(1).CentredOn(1.2*µm).Fix("slope_per_um", -0.1)
				a.Range = fit.Range{Min: 700, Max: 2500}
				r := estimate(t, bands, a, fit.Readings{Signal: y, Std: scaled(y, 0.002)})
				T, _ := determined(t, r)
				close(t, "T", T/c.scene.T, 1, 1e-9)
				level, _, _ := r.Parameter("level")
				close(t, "level", level, 0.6, 1e-8)
			})
		}
	}
}

// A spread of the temperature is known to second order: its error is the fourth's.
func TestASpreadOfTheTemperature(t *testing.T) {
	bands := lines(t, 0.9, 1.6, 8)
	for _, spread := range []float64{1, 10} {
		s := scene{T: 1400, ε: func(float64) float64 { return 0.6 }, spread: spread}
		y := make([]float64, len(bands))
		for i, b := range bands {
			y[i] = s.read(b, 0)
		}
		r := estimate(t, bands, fit.Assume{Emissivity: emissivity.Grey(), Field: sightline.Field{Spread: input("spread", spread, 0.1)}}, fit.Readings{Signal: y, Std: scaled(y, 0.002)})
		T, _ := determined(t, r)
		x := pyro.C2 / (0.9e-6 * 1400) * spread / 1400
		close(t, "T", T/1400, 1, x*x*x*x/8)
	}
}

// From the detector's signal: dark level, gain, exposure, a bent response, stray light.
type bent struct{}

func (bent) True(s float64) (float64, float64) { return s + 1e-6*s*s, 1 + 2e-6*s }

func TestSignalsOfDetectors(t *testing.T) {
	bands := lines(t, 0.9, 1.6, 8)
	s := scene{T: 1400, ε: func(float64) float64 { return 0.6 }, walls: one(1250)}
	detectors := make([]detector.Channel, len(bands))
	exposure := &pyro.Input{Name: "exposure", Value: 1, Std: 0.001, PerReading: true}
	gains := make([]float64, len(bands))
	true_ := make([]float64, len(bands))
	mean := 0.0
	for i, b := range bands {
		gains[i] = (1 + 0.2*float64(i)) * 3e-6
		true_[i] = gains[i] * 2.5 * s.read(b, 0)
		// Stray light is a fraction of the mean of what is read, itself included.
		mean += true_[i] / float64(len(bands)) / (1 - 0.002)
	}
	y := make([]float64, len(bands))
	for i := range bands {
		lin := 120 + true_[i] + 0.002*mean
		y[i] = (math.Sqrt(1+4e-6*lin) - 1) / 2e-6 // bent the other way
		detectors[i] = detector.Channel{
			Dark: input("dark", 120, 2), Gain: input(fmt.Sprintf("gain %d", i), gains[i], gains[i]*0.003), Exposure: exposure,
			Linearity: bent{}, Noise: detector.NoiseModel{Constant: 4, PerSignal: 0.1}, Saturation: 1e9,
		}
	}
	a := fit.Assume{Emissivity: emissivity.Grey(), Surroundings: sightline.Enclosure(input("wall", 1250, 8)), Detectors: detectors, Stray: input("stray light", 0.002, 0.0005)}
	e, err := fit.New(bands, a)
	if err != nil {
		t.Fatal(err)
	}
	if in := e.PerReading(); len(in) != 1 || in[0] != exposure {
		t.Fatalf("per reading: %v", in)
	}
	r, err := e.Estimate(fit.Readings{Signal: y, Inputs: []float64{2.5}})
	if err != nil {
		t.Fatal(err)
	}
	T, _ := determined(t, r)
	close(t, "T", T/1400, 1, 1e-9)
}
