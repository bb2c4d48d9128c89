package emissivity_test

import (
	"errors"
	"math"
	"testing"

	"candent/emissivity"
)

func TestPriorsAreCopies(t *testing.T) {
	plain := emissivity.Polynomial(1)
	fixed := plain.Fix("slope_per_um", -0.1).WithPrior("level", 0.8, 0.05).KnownAt(1*µm, 0.7, 0.02).Relative()
	if fixed.Err() != nil {
		t.Fatal(fixed.Err())
	}
	if plain.Prior(1).Set || plain.IsRelative() || len(plain.KnownPoints()) != 0 {
		t.Error("the original changed")
	}
	if p := fixed.Prior(1); !p.Set || p.Value != -0.1 || p.Std != 0 {
		t.Errorf("fixed slope: %+v", p)
	}
	if p := fixed.Prior(0); p != (emissivity.Prior{Value: 0.8, Std: 0.05, Set: true}) {
		t.Errorf("level: %+v", p)
	}
	if k := fixed.KnownPoints(); len(k) != 1 || k[0].Value != 0.7 || !fixed.IsRelative() {
		t.Errorf("known %+v, relative %v", k, fixed.IsRelative())
	}
	a, b := fixed.KnownAt(2*µm, 0.5, 0.1), fixed.KnownAt(3*µm, 0.4, 0.1)
	if a.KnownPoints()[1].Value != 0.5 || b.KnownPoints()[1].Value != 0.4 {
		t.Error("two families share their known points")
	}
}

func TestNonsensicalPriorsAreRefused(t *testing.T) {
	for name, f := range map[string]emissivity.Family{
		"unknown name":     emissivity.Grey().Fix("slope_per_um", 0),
		"no uncertainty":   emissivity.Grey().WithPrior("level", 0.8, 0),
		"NaN":              emissivity.Grey().Fix("level", math.NaN()),
		"emissivity above": emissivity.Grey().KnownAt(1*µm, 1.2, 0.1),
		"emissivity in %":  emissivity.Grey().KnownAt(1*µm, 80, 5),
		"refused already":  emissivity.Polynomial(7).Fix("level", 0.5),
	} {
		if !errors.Is(f.Err(), emissivity.ErrFamily) {
			t.Errorf("%s: error %v", name, f.Err())
		}
	}
}
