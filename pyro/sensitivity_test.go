package pyro_test

import (
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

func TestSensitivityToRadiance(t *testing.T) {
	// |dT| for 1 %, 0.01·(λT²/c₂)(1 − e^(−c₂/λT)), from the formula, four decimals printed.
	const printed = 0.5e-4 + 1e-9
	um := [...]float64{0.65, 0.9, 1.0, 1.6, 2.2, 3.9, 5.0, 10}
	for _, r := range []struct {
		t    float64
		want [8]float64
	}{
		{300, [8]float64{.0407, .0563, .0626, .1001, .1376, .2440, .3127, .6204}},
		{500, [8]float64{.1129, .1564, .1738, .2780, .3823, .6772, .8660, 1.6398}},
		{1000, [8]float64{.4518, .6255, .6950, 1.1119, 1.5269, 2.6429, 3.2796, 5.3016}},
		{1500, [8]float64{1.0165, 1.4074, 1.5637, 2.4959, 3.3965, 5.5776, 6.6709, 9.6456}},
		{2000, [8]float64{1.8071, 2.5013, 2.7781, 4.3986, 5.8838, 9.1284, 10.6032, 14.2607}},
		{3000, [8]float64{4.0634, 5.6025, 6.2036, 9.5089, 12.2060, 17.2631, 19.2912, 23.8305}},
	} {
		for i, want := range r.want {
			λ, T := pyro.Wavelength(um[i])*pyro.Micrometre, pyro.Temperature(r.t)
			if got := 0.01 * pyro.SensitivityToRadiance(λ, T); math.Abs(got-want) > printed {
				t.Errorf("1 %% of radiance at %v, %v is worth %.5f K, want %.4f", λ, T, got, want)
			}
			if got := 0.01 * pyro.SensitivityToEmissivity(λ, T); math.Abs(got+want) > printed {
				t.Errorf("1 %% of emissivity at %v, %v is worth %.5f K, want −%.4f", λ, T, got, want)
			}
		}
	}
}

func TestSensitivityToSurroundings(t *testing.T) {
	// Re-estimation with the walls moved by ± h. The measured radiance stays.
	λ, T, walls, ε := 3.9*pyro.Micrometre, 1173.15*pyro.Kelvin, 1473.15*pyro.Kelvin, 0.8
	measured := ε*pyro.Radiance(λ, T) + (1-ε)*pyro.Radiance(λ, walls)
	infer := func(walls pyro.Temperature) float64 {
		return pyro.RadianceTemperature(λ, (measured-(1-ε)*pyro.Radiance(λ, walls))/ε).Kelvin()
	}
	const h = 0.01 // K; truncation of the central difference is of order h²
	near(t, "∂T/∂T_s", pyro.SensitivityToSurroundings(λ, T, walls, ε), (infer(walls+h)-infer(walls-h))/(2*h), 1e-7)
}

func TestSensitivityToWavelength(t *testing.T) {
	// Re-estimation with the wavelength moved by ± h at constant radiance.
	for _, λ := range []pyro.Wavelength{0.65 * µm, 0.9 * µm, 3.9 * µm, 10 * µm} {
		const T, h = 1300.0, 1e-5
		l := pyro.Radiance(λ, T)
		d := float64(pyro.RadianceTemperature(λ*(1+h), l)-pyro.RadianceTemperature(λ*(1-h), l)) / (2 * h * float64(λ))
		near(t, fmt.Sprintf("∂T/∂λ at %v", λ), pyro.SensitivityToWavelength(λ, T), d, 1e-6)
	}
}

func TestSensitivityOfABandToWavelength(t *testing.T) {
	// Re-estimation with a band assumed ± h off, all of its responsivity moved.
	const T, h = pyro.Temperature(1300), 1e-5
	for _, f := range []func(shift pyro.Wavelength) (*pyro.Band, error){
		func(d pyro.Wavelength) (*pyro.Band, error) { return pyro.FlatTop(0.7*µm+d, 1.1*µm+d) },
		func(d pyro.Wavelength) (*pyro.Band, error) { return pyro.FlatTop(8*µm+d, 14*µm+d) },
		func(d pyro.Wavelength) (*pyro.Band, error) { return pyro.Gaussian(0.9*µm+d, 0.02*µm, 0.03*µm) },
	} {
		at := func(shift pyro.Wavelength) *pyro.Band {
			b, err := f(shift)
			if err != nil {
				t.Fatal(err)
			}
			return b
		}
		b := at(0)
		d := h * b.Mean()
		s := b.Radiance(T)
		want := float64(at(d).RadianceTemperature(s)-at(-d).RadianceTemperature(s)) / float64(2*d)
		near(t, fmt.Sprintf("∂T/∂λ of a band at %v", b.Mean()), b.SensitivityToWavelength(T), want, 1e-6)
	}
	line, err := pyro.Line(3.9 * µm)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "∂T/∂λ of a line", line.SensitivityToWavelength(T), pyro.SensitivityToWavelength(3.9*µm, T), 1e-14)
}

func TestSensitivityToWavelengthChangesSignAtThePeak(t *testing.T) {
	const T = 1300
	peak := pyro.PeakWavelength(T)
	if pyro.SensitivityToWavelength(0.99*peak, T) >= 0 || pyro.SensitivityToWavelength(1.01*peak, T) <= 0 {
		t.Error("no change from − to + at the peak")
	}
	// At 0.65 µm, 1300 K: n = 17.027, (5/n − 1)·T/λ = −1.41 K/nm, by hand.
	if got := 1e-9 * pyro.SensitivityToWavelength(0.65*µm, T); math.Abs(got+1.41) > 0.5e-2 {
		t.Errorf("1 nm at 0.65 µm, 1300 K is worth %.4f K, want −1.41", got)
	}
}

func TestSensitivitiesOfAPair(t *testing.T) {
	// Re-estimation with one band assumed ± h off, and with ratios ± h off.
	const T, h = pyro.Temperature(1500), 1e-5
	p := linePair(t, 0.75, 0.9, 900, 2800)
	temperature := func(p *pyro.Pair, ratio, e float64) float64 {
		got, err := p.Temperature(ratio, e)
		if err != nil {
			t.Fatal(err)
		}
		return float64(got)
	}
	q := p.Ratio(T)
	short, long := p.SensitivityToWavelengths(T)
	near(t, "∂T/∂λ_short", short, (temperature(linePair(t, 0.75*(1+h), 0.9, 900, 2800), q, 1)-
		temperature(linePair(t, 0.75*(1-h), 0.9, 900, 2800), q, 1))/(2*h*0.75e-6), 1e-6)
	near(t, "∂T/∂λ_long", long, (temperature(linePair(t, 0.75, 0.9*(1+h), 900, 2800), q, 1)-
		temperature(linePair(t, 0.75, 0.9*(1-h), 900, 2800), q, 1))/(2*h*0.9e-6), 1e-6)
	if short >= 0 || long <= 0 {
		t.Errorf("in Wien's region the short one is negative, the long one positive: %g, %g K/m", short, long)
	}
	near(t, "∂T/∂lnε_r", p.SensitivityToEmissivityRatio(T), (temperature(p, 0.98*q, 0.98*(1+h))-temperature(p, 0.98*q, 0.98*(1-h)))/(2*h), 1e-6)
	near(t, "∂T/∂lnQ", p.SensitivityToRatio(T), (temperature(p, q*(1+h), 1)-temperature(p, q*(1-h), 1))/(2*h), 1e-6)
}

func TestEffectiveWavelengthsOfRatios(t *testing.T) {
	// Λ = λ₁λ₂/(λ₂−λ₁) in µm, Wien's limit, from the formula, as printed. Planck's law adds to
	// x = c₂/λT the factor 1/(1 − e⁻ˣ); at the lowest temperature of a band it is below 1e-7 here.
	for _, r := range []struct{ short, long, want, printed float64 }{
		{0.467, 0.665, 1.568460, 5e-7}, {0.5, 0.7, 1.75, 0}, {0.555, 0.665, 3.355227, 5e-7}, {0.7, 0.9, 3.15, 0}, {0.8, 1.0, 4.0, 0},
		{0.85, 1.0, 5.666667, 5e-7}, {0.95, 1.05, 9.975, 0}, {0.9, 1.55, 2.146154, 5e-7}, {1.52, 1.64, 20.773333, 5e-7},
		{1.55, 1.65, 25.575, 0}, {2.0, 2.2, 22.0, 0},
	} {
		p := linePair(t, r.short, r.long, 250, 3000)
		got := p.EffectiveWavelength(250).Micrometres()
		if math.Abs(got-r.want) > r.printed+1e-7*r.want {
			t.Errorf("Λ of %g/%g µm = %.7f µm, want %.6f", r.short, r.long, got, r.want)
		}
	}
	// 1 % of emissivity ratio, 0.01·ΛT²/c₂ in K (Wien), three decimals printed. Planck's n₁ − n₂
	// differs from x₁ − x₂ by x₁/(e^x₁−1) − x₂/(e^x₂−1).
	for _, r := range []struct{ short, long, t, want float64 }{
		{0.7, 0.9, 1000, 2.189}, {0.7, 0.9, 1500, 4.926}, {0.7, 0.9, 2000, 8.757},
		{0.95, 1.05, 1000, 6.933}, {0.95, 1.05, 1500, 15.599}, {0.95, 1.05, 2000, 27.732},
		{1.55, 1.65, 1000, 17.776}, {1.55, 1.65, 1500, 39.995}, {1.55, 1.65, 2000, 71.102},
	} {
		p := linePair(t, r.short, r.long, 500, 3000)
		x1, x2 := 14387.7688/(r.short*r.t), 14387.7688/(r.long*r.t)
		planck := (x1 - x2) / (x1 - x2 + x1/math.Expm1(x1) - x2/math.Expm1(x2))
		if got := -0.01 * p.SensitivityToEmissivityRatio(pyro.Temperature(r.t)); math.Abs(got-r.want*planck) > 0.5e-3*planck+1e-6 {
			t.Errorf("1 %% of emissivity ratio at %g/%g µm, %g K is worth %.4f K, want %.4f", r.short, r.long, r.t, got, r.want*planck)
		}
	}
}

func TestFiniteErrorsOfSettings(t *testing.T) {
	// What an instrument set to an emissivity of its own reads, from the formula, 1e-4 K printed.
	const printed = 0.5e-4 + 1e-9
	for _, r := range []struct{ t, ε, set, um, want float64 }{
		{1273.15, 0.8, 1, 0.9, 1250.9199}, {1273.15, 0.8, 1, 1.6, 1234.1883}, {1273.15, 0.8, 1, 3.9, 1186.3340},
		{1273.15, 0.8, 1, 5.0, 1168.6727}, {1273.15, 0.8, 1, 10, 1118.4053}, {1273.15, 0.8, 0.85, 0.9, 1267.0326},
		{573.15, 0.3, 1, 2.2, 518.4465}, {573.15, 0.3, 1, 10, 393.5689},
	} {
		λ := pyro.Wavelength(r.um) * pyro.Micrometre
		got := pyro.RadianceTemperature(λ, r.ε*pyro.Radiance(λ, pyro.Temperature(r.t))/r.set).Kelvin()
		if math.Abs(got-r.want) > printed {
			t.Errorf("%g K, %g µm, ε %g set to %g: %.5f K, want %.4f K", r.t, r.um, r.ε, r.set, got, r.want)
		}
	}
	// The same where what the surface reflects of its surroundings is not taken off.
	for _, r := range []struct{ t, walls, ε, um, want float64 }{
		{323.15, 296.15, 0.95, 10, 325.6316}, {323.15, 296.15, 0.5, 10, 364.1571},
		{1173.15, 1473.15, 0.8, 0.9, 1330.4835}, {1173.15, 1473.15, 0.8, 3.9, 1334.6731},
	} {
		λ := pyro.Wavelength(r.um) * pyro.Micrometre
		l := pyro.Radiance(λ, pyro.Temperature(r.t)) + (1-r.ε)/r.ε*pyro.Radiance(λ, pyro.Temperature(r.walls))
		if got := pyro.RadianceTemperature(λ, l).Kelvin(); math.Abs(got-r.want) > printed {
			t.Errorf("%g K among %g K, %g µm, ε %g: %.5f K, want %.4f K", r.t, r.walls, r.um, r.ε, got, r.want)
		}
	}
}

func ExampleSensitivityToEmissivity() {
	// What an emissivity set 5 % too high costs at 1500 K.
	for _, λ := range []pyro.Wavelength{650 * pyro.Nanometre, 1.6 * pyro.Micrometre, 3.9 * pyro.Micrometre} {
		fmt.Printf("%v: %+.1f K\n", λ, 0.05*pyro.SensitivityToEmissivity(λ, 1500))
	}
	// Output:
	// 0.65 µm: -5.1 K
	// 1.6 µm: -12.5 K
	// 3.9 µm: -27.9 K
}
