package pyro_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
)

func lines(t testing.TB, um ...float64) []*pyro.Band {
	t.Helper()
	var all []*pyro.Band
	for _, v := range um {
		b, err := pyro.Line(pyro.Wavelength(v) * µm)
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, b)
	}
	return all
}

func TestLowerBoundAndWhatBreaksIt(t *testing.T) {
	const T, ε, k = pyro.Temperature(1300), 0.5, 2
	bands := lines(t, 0.65, 0.9, 1.6, 3.9)
	var alone, walls, std []float64
	for _, b := range bands {
		alone = append(alone, ε*b.Radiance(T))
		walls = append(walls, ε*b.Radiance(T)+(1-ε)*b.Radiance(1500))
		std = append(std, 0.005*ε*b.Radiance(T))
	}
	bound, err := pyro.LowerBound(bands, alone, std, k, pyro.NothingShinesIn)
	if err != nil {
		t.Fatal(err)
	}
	// The shortest channel is nearest to T: its radiance temperature less k·u. That u is
	// linear; the second order of 1 % of radiance is n/2·(0.01/n)² of T, below 0.01 K.
	own := bands[0].RadianceTemperature(alone[0])
	want := float64(own) - k*0.005*pyro.SensitivityToRadiance(0.65*µm, own)
	if bound.Channel != 0 || bound.Temperature >= T || math.Abs(float64(bound.Temperature)-want) > 0.01 {
		t.Errorf("lower bound %+v, want %.4f K from channel 0", bound, want)
	}
	// A surface of emissivity 1 lies on it, without uncertainty.
	black := []float64{bands[0].Radiance(T)}
	if bound, err = pyro.LowerBound(bands[:1], black, []float64{0}, k, pyro.NothingShinesIn); err != nil || math.Abs(float64(bound.Temperature-T)) > 1e-9 {
		t.Errorf("blackbody: %v, %v", bound, err)
	}
	// Hot walls break it: declared against the facts, the bound lies above the surface.
	if bound, err = pyro.LowerBound(bands, walls, std, k, pyro.NothingShinesIn); err != nil || bound.Temperature <= T {
		t.Errorf("walls at 1500 K leave the bound at %v, not above the true %v", bound, T)
	}
}

func TestLowerBoundIsRefused(t *testing.T) {
	bands, one := lines(t, 0.65), []float64{1e8}
	for name, err := range map[string]error{
		"undeclared":          refusal(bands, one, one, 2, pyro.ShinesInUndeclared),
		"something shines in": refusal(bands, one, one, 2, pyro.SomethingShinesIn),
		"no channels":         refusal(nil, nil, nil, 2, pyro.NothingShinesIn),
		"lengths":             refusal(bands, one, nil, 2, pyro.NothingShinesIn),
		"nil band":            refusal([]*pyro.Band{nil}, one, one, 2, pyro.NothingShinesIn),
		"NaN":                 refusal(bands, []float64{math.NaN()}, one, 2, pyro.NothingShinesIn),
		"negative u":          refusal(bands, one, []float64{-1}, 2, pyro.NothingShinesIn),
		"negative k":          refusal(bands, one, one, -2, pyro.NothingShinesIn),
		"lost in noise":       refusal(bands, one, one, 2, pyro.NothingShinesIn),
	} {
		if !errors.Is(err, pyro.ErrNoBound) {
			t.Errorf("%s: error %v", name, err)
		}
	}
}

func refusal(bands []*pyro.Band, readings, std []float64, k float64, declared pyro.ShinesIn) error {
	_, err := pyro.LowerBound(bands, readings, std, k, declared)
	return err
}

func ExampleLowerBound() {
	// A load seen through a hole into a cold chamber, in two bands; nobody knows its emissivity.
	short, err := pyro.Line(0.9 * pyro.Micrometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	long, err := pyro.Line(1.6 * pyro.Micrometre)
	if err != nil {
		fmt.Println(err)
		return
	}
	bound, err := pyro.LowerBound([]*pyro.Band{short, long}, []float64{1.2e8, 2.1e9}, []float64{1e6, 4e7}, 2, pyro.NothingShinesIn)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(bound)
	// Output:
	// at least 1113.9 K (reading less 2 u) if ε ≤ 1 and nothing else shines in
}
