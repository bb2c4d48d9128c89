package pyro_test

import (
	"math"
	"testing"

	"candent/pyro"
)

// near fails unless got is within rel of want, relatively.
func near(t *testing.T, name string, got, want, rel float64) {
	t.Helper()
	if !(math.Abs(got-want) <= rel*math.Abs(want)) {
		t.Errorf("%s = %.17g, want %.17g (relative difference %.2g, allowed %.2g)",
			name, got, want, got/want-1, rel)
	}
}

const ulp = 0x1p-52 // two roundings of a value near 1

func TestConstants(t *testing.T) {
	// 50-digit values from the defining constants of the SI (2019).
	near(t, "c1", pyro.C1, 3.7417718521927580114e-16, ulp)
	near(t, "c1L", pyro.C1L, 1.1910429723971884141e-16, ulp)
	near(t, "c2", pyro.C2, 0.014387768775039338021, ulp)
	near(t, "σ", pyro.StefanBoltzmann, 5.670374419184429454e-8, ulp)
	near(t, "b", pyro.WienWavelength, 2.8977719551851726615e-3, ulp)
	near(t, "b′", pyro.WienFrequency, 5.8789257576468249466e10, ulp)
	// Preston-Thomas, The International Temperature Scale of 1990, Metrologia 27 (1990) 3.
	near(t, "(c2,ITS-90 − c2)/c2", (pyro.C2ITS90-pyro.C2)/pyro.C2, 1.607093944e-5, 1e-9)
}
