package its90_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
	"candent/pyro/its90"
)

const µm = pyro.Micrometre

func line(t testing.TB, um float64) *pyro.Band {
	t.Helper()
	b, err := pyro.Line(pyro.Wavelength(um) * µm)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func TestEffectOfTheConstant(t *testing.T) {
	// T(exact c₂) − T₉₀ in mK for one signal ratio to the reference, 50-digit arithmetic,
	// digits as printed.
	for _, r := range []struct {
		t90, um   float64
		reference its90.Point
		want      float64
		digit     float64 // of the last digit printed
	}{
		{1500, 0.65, its90.Silver, 5.1743, 1e-4}, {1500, 0.65, its90.Gold, 2.93225, 1e-5}, {1500, 0.65, its90.Copper, 2.52521, 1e-5}, {1500, 0.9, its90.Gold, 2.9318, 1e-4},
		{2000, 0.65, its90.Silver, 19.9121, 1e-4}, {2000, 0.65, its90.Gold, 15.9262, 1e-4}, {2000, 0.65, its90.Copper, 15.2026, 1e-4}, {2000, 0.9, its90.Gold, 15.9111, 1e-4},
		{2500, 0.65, its90.Silver, 41.147, 1e-3}, {2500, 0.65, its90.Gold, 34.9198, 1e-4}, {2500, 0.65, its90.Copper, 33.7893, 1e-4}, {2500, 0.9, its90.Gold, 34.8055, 1e-4},
		{3000, 0.65, its90.Silver, 68.8384, 1e-4}, {3000, 0.65, its90.Gold, 59.8755, 1e-4}, {3000, 0.65, its90.Copper, 58.2483, 1e-4}, {3000, 0.9, its90.Gold, 59.4192, 1e-4},
		{3500, 0.65, its90.Silver, 102.886, 1e-3}, {3500, 0.65, its90.Gold, 90.7007, 1e-4}, {3500, 0.65, its90.Copper, 88.4885, 1e-4}, {3500, 0.9, its90.Gold, 89.4368, 1e-4},
	} {
		b := line(t, r.um)
		got := 1000 * float64(its90.FromITS90(b, pyro.Temperature(r.t90), r.reference)-pyro.Temperature(r.t90))
		if math.Abs(got-r.want) > 0.5*r.digit+1e-8 {
			t.Errorf("T90 = %g K from %s at %g µm: %.7f mK, want %g", r.t90, r.reference.Name, r.um, got, r.want)
		}
		back := its90.ToITS90(b, its90.FromITS90(b, pyro.Temperature(r.t90), r.reference), r.reference)
		if math.Abs(float64(back)-r.t90) > 1e-12*r.t90 {
			t.Errorf("back to T90: %.12g K, want %g", float64(back), r.t90)
		}
	}
}

func TestClosure(t *testing.T) {
	// Ag → Au → Cu by two ratios is Ag → Cu by their product.
	wide, err := pyro.FlatTop(0.85*µm, 0.95*µm)
	if err != nil {
		t.Fatal(err)
	}
	for name, b := range map[string]*pyro.Band{"0.65 µm": line(t, 0.65), "0.85 to 0.95 µm": wide} {
		first := its90.Ratio(b, its90.Gold.T, its90.Silver)
		second := its90.Ratio(b, its90.Copper.T, its90.Gold)
		got, err := its90.Temperature(b, first*second, its90.Silver)
		if err != nil || math.Abs(float64(got/its90.Copper.T)-1) > 1e-12 {
			t.Errorf("%s: %.13g K, %v", name, float64(got), err)
		}
	}
}

func TestScaleByTheWrittenFormula(t *testing.T) {
	// L(T90)/L(Tref) = (exp(c2/λTref) − 1)/(exp(c2/λT90) − 1), c2 = 0.014388 m K.
	const c2, λ = 0.014388, 0.65e-6
	for _, T := range []float64{1400, 2200, 3300} {
		want := math.Expm1(c2/(λ*1357.77)) / math.Expm1(c2/(λ*T))
		if got := its90.Ratio(line(t, 0.65), pyro.Temperature(T), its90.Copper); math.Abs(got/want-1) > 1e-12 {
			t.Errorf("ratio at %g K: %.15g, want %.15g", T, got, want)
		}
	}
}

func TestUncertaintyByReEstimation(t *testing.T) {
	b := line(t, 0.65)
	const T = 2747.84
	ratio := b.Radiance(T) / b.Radiance(its90.CopperThermodynamic.T)
	at := func(um, ratio float64, ref pyro.Temperature) float64 {
		got, err := its90.Thermodynamic(line(t, um), ratio, its90.Point{Name: "Cu", T: ref})
		if err != nil {
			t.Fatal(err)
		}
		return float64(got)
	}
	near := func(what string, got, want float64) {
		t.Helper()
		if math.Abs(got/want-1) > 1e-4 { // second order of the steps
			t.Errorf("%s: %g K, want %g", what, got, want)
		}
	}
	free := its90.Point{Name: "Cu", T: its90.CopperThermodynamic.T}
	near("ratio", its90.Uncertainty(b, T, free, 1e-4, 0), (at(0.65, ratio*1.0001, free.T)-at(0.65, ratio*0.9999, free.T))/2)
	near("reference", its90.Uncertainty(b, T, its90.CopperThermodynamic, 0, 0), (at(0.65, ratio, free.T+0.04)-at(0.65, ratio, free.T-0.04))/2)
	// The signals stay; what changes is the wavelength that they are read with.
	near("wavelength", its90.Uncertainty(b, T, free, 0, 1e-4), math.Abs(at(0.65*1.0001, ratio, free.T)-at(0.65*0.9999, ratio, free.T))/2)
}

func TestRatiosThatAreNone(t *testing.T) {
	for _, r := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := its90.Temperature(line(t, 0.65), r, its90.Copper); !errors.Is(err, its90.ErrRatio) {
			t.Errorf("%g: %v", r, err)
		}
		if _, err := its90.Thermodynamic(line(t, 0.65), r, its90.Copper); !errors.Is(err, its90.ErrRatio) {
			t.Errorf("%g: %v", r, err)
		}
	}
}

func ExampleTemperature() {
	b, err := pyro.Line(650 * pyro.Nanometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	t90, err := its90.Temperature(b, 100, its90.Copper)
	if err != nil {
		fmt.Println(err)
		return
	}
	// By hand: x = c₂/λT is 16.3026 at copper and less by ln 100 here; T/n = 161.8 K.
	u := its90.Uncertainty(b, t90, its90.Copper, 0.0005, 0.00003)
	fmt.Printf("%.2f, standard uncertainty %.2f K\n", t90, u)
	// Output:
	// 1892.30 K, standard uncertainty 0.08 K
}
