package detector_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/pyro"
	"candent/pyro/detector"
)

func TestCurrentLoopStates(t *testing.T) {
	loop := detector.CurrentLoop{Low: pyro.Celsius(600), High: pyro.Celsius(1400), Resolution: 0.01} // 50 K/mA
	if err := loop.Check(); err != nil {
		t.Fatal(err)
	}
	clamped := loop
	clamped.ClampLow, clamped.ClampHigh = 4, 20
	for _, c := range []struct {
		loop  detector.CurrentLoop
		mA, C float64
		state detector.LoopState
	}{
		{loop, 4, 600, detector.LoopMeasuring}, {loop, 12, 1000, detector.LoopMeasuring}, {loop, 20, 1400, detector.LoopMeasuring},
		{loop, 3.82, 591, detector.LoopMeasuring}, {loop, 20.48, 1424, detector.LoopMeasuring},
		{loop, 3.8, 590, detector.LoopAtLow}, {loop, 3.804, 590, detector.LoopAtLow}, {loop, 20.5, 1425, detector.LoopAtHigh}, {loop, 20.497, 1425, detector.LoopAtHigh},
		{loop, 3.6, 0, detector.LoopFailureLow}, {loop, 0, 0, detector.LoopFailureLow}, {loop, 21, 0, detector.LoopFailureHigh}, {loop, 22.5, 0, detector.LoopFailureHigh},
		{loop, 3.7, 0, detector.LoopUndefined}, {loop, 20.75, 0, detector.LoopUndefined}, {loop, math.NaN(), 0, detector.LoopUndefined},
		{clamped, 4, 600, detector.LoopAtLow}, {clamped, 3.9, 600, detector.LoopAtLow}, {clamped, 20, 1400, detector.LoopAtHigh}, {clamped, 20.3, 1400, detector.LoopAtHigh},
		{clamped, 4.01, 600.5, detector.LoopMeasuring}, {clamped, 3.7, 0, detector.LoopUndefined},
	} {
		T, state := c.loop.Temperature(c.mA)
		if state != c.state || state >= detector.LoopMeasuring && state <= detector.LoopAtHigh && math.Abs(T.Celsius()-c.C) > 1e-9 {
			t.Errorf("%g mA: %.4f °C, %v; want %g °C, %v", c.mA, T.Celsius(), state, c.C, c.state)
		}
	}
}

func TestCurrentLoopThereAndBack(t *testing.T) {
	loop := detector.CurrentLoop{Low: 873.15, High: 1673.15}
	for T := pyro.Temperature(864); T < 1698; T += 7.3 {
		mA, state := loop.Current(T)
		back, again := loop.Temperature(mA)
		if state != detector.LoopMeasuring || again != state || math.Abs(float64(back-T)) > 1e-11*float64(T) {
			t.Errorf("%v: %g mA (%v), back %v (%v)", T, mA, state, back, again)
		}
	}
	for _, c := range []struct {
		T, end pyro.Temperature
		state  detector.LoopState
	}{{500, 863.15, detector.LoopAtLow}, {2500, 1698.15, detector.LoopAtHigh}} {
		mA, state := loop.Current(c.T)
		back, again := loop.Temperature(mA)
		if state != c.state || again != c.state || math.Abs(float64(back-c.end)) > 1e-9 {
			t.Errorf("%v: %g mA (%v), back %v (%v)", c.T, mA, state, back, again)
		}
	}
	if mA, state := loop.Current(pyro.Temperature(math.NaN())); !math.IsNaN(mA) || state != detector.LoopUndefined {
		t.Errorf("NaN: %g mA, %v", mA, state)
	}
}

// TestCurrentLoopResolution: temperatures that fall evenly on a rounded current are off with
// the standard deviation that StdK states, within 3 standard errors of a uniform one.
func TestCurrentLoopResolution(t *testing.T) {
	loop := detector.CurrentLoop{Low: 873.15, High: 1673.15, Resolution: 0.1}
	const n = 20000
	sum2 := 0.0
	for i := range n {
		T := 900 + 700*pyro.Temperature(i)/n
		mA, _ := loop.Current(T)
		back, _ := loop.Temperature(math.Round(mA/0.1) * 0.1)
		sum2 += math.Pow(float64(back-T), 2)
	}
	if sd := math.Sqrt(sum2 / n); math.Abs(sd/loop.StdK()-1) > 3*math.Sqrt(0.2/n) {
		t.Errorf("%.4f K, stated %.4f K", sd, loop.StdK())
	}
}

func TestCurrentLoopsThatAreNone(t *testing.T) {
	ok := detector.CurrentLoop{Low: 873.15, High: 1673.15}
	for name, spoil := range map[string]func(*detector.CurrentLoop){
		"falling":           func(c *detector.CurrentLoop) { c.High = 800 },
		"no number":         func(c *detector.CurrentLoop) { c.Low = pyro.Temperature(math.NaN()) },
		"clamp in failure":  func(c *detector.CurrentLoop) { c.ClampLow = 3.6 },
		"clamp in scale":    func(c *detector.CurrentLoop) { c.ClampHigh = 19 },
		"coarse resolution": func(c *detector.CurrentLoop) { c.Resolution = 2 },
	} {
		c := ok
		spoil(&c)
		if err := c.Check(); !errors.Is(err, detector.ErrCurrentLoop) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func ExampleCurrentLoop_Temperature() {
	loop := detector.CurrentLoop{Low: pyro.Celsius(600), High: pyro.Celsius(1400), Resolution: 0.01}
	for _, mA := range []float64{12, 20.5, 3.5} {
		switch t, state := loop.Temperature(mA); state {
		case detector.LoopMeasuring:
			fmt.Printf("%.1f °C, standard uncertainty of the resolution %.2f K\n", t.Celsius(), loop.StdK())
		case detector.LoopAtHigh:
			fmt.Printf("%.1f °C or more\n", t.Celsius())
		default:
			fmt.Println("no reading:", state)
		}
	}
	// Output:
	// 1000.0 °C, standard uncertainty of the resolution 0.14 K
	// 1425.0 °C or more
	// no reading: failure (low current)
}
