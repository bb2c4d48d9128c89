package fit_test

import (
	"math"
	"testing"

	"candent/fit"
	"candent/pyro"
	"candent/pyro/its90"
)

// filterTable is the responsivity of an invented interference filter with a silicon detector
// behind it: steep on the short side, slow on the long one, a shoulder, and a foot of 1e-4
// to where it is blocked. Wavelength in nm.
var filterTable = [][2]float64{
	{630, 0}, {634, 0.0001}, {638, 0.0004}, {640, 0.002}, {642, 0.011}, {643, 0.042}, {644, 0.165}, {645, 0.452}, {646, 0.741}, {647, 0.895},
	{648, 0.951}, {649, 0.972}, {650, 0.990}, {651, 1.000}, {652, 0.987}, {653, 0.951}, {654, 0.874}, {655, 0.702}, {656, 0.468}, {657, 0.262},
	{658, 0.133}, {659, 0.071}, {660, 0.043}, {662, 0.018}, {664, 0.0065}, {668, 0.0013}, {674, 0.0003}, {690, 0.0001}, {700, 0},
}

// filterSignal integrates the filter over Planck's law by Simpson's rule, with constants of
// its own: the measurement that is simulated. The error is below 1e-12 of the signal at
// steps of 1/100 of a table's.
func filterSignal(T, shift float64) float64 {
	const c1L, c2, steps = 1.1910429723971884e-16, 0.014387768775039338, 100
	sum := 0.0
	for i := 1; i < len(filterTable); i++ {
		a, b := filterTable[i-1], filterTable[i]
		h := (b[0] - a[0]) / steps
		for k := 0; k <= steps; k++ {
			w := 2.0
			switch {
			case k == 0 || k == steps:
				w = 1
			case k%2 == 1:
				w = 4
			}
			f := float64(k) / steps
			λ := (a[0] + f*(b[0]-a[0])) * 1e-9
			r := a[1] + f*(b[1]-a[1])
			λ += shift
			sum += w * h / 3 * r * c1L / math.Pow(λ, 5) / math.Expm1(c2/(λ*T))
		}
	}
	return 1e-3 * sum // of an arbitrary gain
}

func filterBand(t testing.TB, table [][2]float64) *pyro.Band {
	t.Helper()
	var λ []pyro.Wavelength
	var r []float64
	for _, p := range table {
		λ, r = append(λ, pyro.Wavelength(p[0])*pyro.Nanometre), append(r, p[1])
	}
	b, err := pyro.Tabulated(λ, r, pyro.PerWatt)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// TestChainFromCopper is a round trip: signals are simulated at published temperatures of
// fixed points, the chain starts from copper, and how far it ends from the others, and how
// far it says that it may, stands beside the published standard uncertainties (half of the
// 95 % ones; Woolliams et al., Thermodynamic temperature assignment to the point of inflection of
// the melting curve of high-temperature fixed points, Phil. Trans. R. Soc. A 374 (2016)
// 20150044). It tests arithmetic, not the published values.
//
// Known for each chain: the copper point to 0.04 K, each signal to 5e-5 of itself (detector
// linearity), the filter's wavelength to 0.01 nm.
func TestChainFromCopper(t *testing.T) {
	const signalRel, wavelengthStd = 5e-5, 0.01e-9
	cu, hot := its90.CopperThermodynamic, []its90.Point{its90.CobaltCarbon, its90.PlatinumCarbon, its90.RheniumCarbon}
	band := filterBand(t, filterTable)
	coarse := [][2]float64{} // the same filter, taken with every second step of a monochromator
	for i, p := range filterTable {
		if i%2 == 0 {
			coarse = append(coarse, p)
		}
	}
	at := func(p its90.Point) fit.CalibrationPoint {
		s := filterSignal(float64(p.T), 0)
		return fit.CalibrationPoint{T: p.T, StdK: p.StdK, Signal: s, Std: signalRel * s}
	}
	gain, err := fit.CalibrateGain([]fit.CalibrationPoint{at(cu)}, band)
	if err != nil {
		t.Fatal(err)
	}
	sampled, err := fit.CalibrateGain([]fit.CalibrationPoint{at(cu)}, filterBand(t, coarse))
	if err != nil {
		t.Fatal(err)
	}
	predicted, err := fit.Calibrate([]fit.CalibrationPoint{at(cu)}, band)
	if err != nil {
		t.Fatal(err)
	}
	three, err := fit.Calibrate([]fit.CalibrationPoint{at(cu), at(hot[0]), at(hot[1])}, nil)
	if err != nil {
		t.Fatal(err)
	}
	ends, err := fit.Calibrate([]fit.CalibrationPoint{at(cu), at(hot[0]), at(hot[2])}, nil)
	if err != nil {
		t.Fatal(err)
	}
	type reader interface {
		Read(signal, std float64) (fit.Reading, error)
	}
	t.Log("round trip from the Cu point; error and standard uncertainty in mK")
	t.Logf("%-6s %10s %6s | %-46s %10s %8s %s", "point", "T / K", "publ.", "chain", "error", "u", "")
	for i, p := range hot {
		signal := filterSignal(float64(p.T), 0)
		wavelength := math.Abs(gain.SensitivityToWavelength(p.T)) * wavelengthStd
		for _, c := range []struct {
			name         string
			r            reader
			allowed      float64 // error in units of the published standard uncertainty; 0: see below
			λ            bool    // rests on the filter's wavelength
			extrapolated [3]bool
		}{
			{"Cu alone, responsivity known", gain, 1e-4, true, [3]bool{true, true, true}},
			{"Cu alone, a table of half the points", sampled, 0, true, [3]bool{true, true, true}},
			{"Cu alone, Sakuma–Hattori with A, B predicted", predicted, 0.05, true, [3]bool{true, true, true}},
			{"Cu, Co-C, Pt-C through Sakuma–Hattori", three, 0.05, false, [3]bool{false, false, true}},
			{"Cu, Co-C, Re-C through Sakuma–Hattori", ends, 0.05, false, [3]bool{}},
		} {
			r, err := c.r.Read(signal, signalRel*signal)
			if err != nil {
				t.Fatal(err)
			}
			u := r.StdK
			if c.λ {
				u = math.Hypot(u, wavelength)
			}
			mark := ""
			if r.Extrapolated {
				mark = "extrapolated"
			}
			d := float64(r.T - p.T)
			t.Logf("%-6s %10.2f %6.0f | %-46s %+10.3f %8.0f %s", p.Name, float64(p.T), 1e3*p.StdK, c.name, 1e3*d, 1e3*u, mark)
			if r.Extrapolated != c.extrapolated[i] {
				t.Errorf("%s by %s: extrapolated %v", p.Name, c.name, r.Extrapolated)
			}
			if c.allowed == 0 {
				// A table too coarse is another filter: no stated uncertainty covers it, and the round
				// trip sees it.
				if math.Abs(d) < 0.1*p.StdK {
					t.Errorf("%s by %s: off by %.5f K only: does the simulation use the same table?", p.Name, c.name, d)
				}
				continue
			}
			if math.Abs(d) > c.allowed*p.StdK || math.Abs(d) > u {
				t.Errorf("%s by %s: off by %.4f K, stated %.4f K, published %.3f K", p.Name, c.name, d, u, p.StdK)
			}
		}
		// The chain's uncertainty by the formula of its90, and by re-estimation with a filter
		// that truly stood 0.01 nm further up.
		want := its90.Uncertainty(band, p.T, cu, math.Sqrt2*signalRel, wavelengthStd/float64(band.Mean()))
		r, err := gain.Read(signal, signalRel*signal)
		if err != nil {
			t.Fatal(err)
		}
		// A stretch of all wavelengths (its90) and a shift differ by the width of the filter.
		if u := math.Hypot(r.StdK, wavelength); math.Abs(u/want-1) > 0.01 {
			t.Errorf("%s: u %.5f K, its90 %.5f K", p.Name, u, want)
		}
		moved, err := fit.CalibrateGain([]fit.CalibrationPoint{{T: cu.T, Signal: filterSignal(float64(cu.T), wavelengthStd)}}, band)
		if err != nil {
			t.Fatal(err)
		}
		off, err := moved.Read(filterSignal(float64(p.T), wavelengthStd), 0)
		if err != nil {
			t.Fatal(err)
		}
		if d := math.Abs(float64(off.T - p.T)); math.Abs(d/wavelength-1) > 1e-3 {
			t.Errorf("%s: 0.01 nm moves it by %.6f K, stated %.6f K", p.Name, d, wavelength)
		}
		// The published uncertainties are of the size that copper's own carries up, (T/T_Cu)²
		// in Wien's limit: the realisations they were assigned from had such chains.
		if carried := cu.StdK * math.Pow(float64(p.T/cu.T), 2); p.StdK < 0.5*carried || p.StdK > 3*carried {
			t.Errorf("%s: published %.3f K, carried from Cu %.3f K", p.Name, p.StdK, carried)
		}
	}
}
