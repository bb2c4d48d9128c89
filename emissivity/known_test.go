package emissivity_test

import (
	"slices"
	"testing"

	"candent/emissivity"
	"candent/pyro"
)

func TestWithKnownPointsReplaces(t *testing.T) {
	λ := 900 * pyro.Nanometre
	want := []emissivity.Known{{Wavelength: λ, Value: 0.5, Std: 0.01}, {Wavelength: 2 * λ, Value: 0.4, Std: 0.02}}
	f := emissivity.PowerLaw().KnownAt(λ, 0.7, 0.1)
	if got := f.WithKnownPoints(want...); !slices.Equal(got.KnownPoints(), want) || got.Err() != nil {
		t.Errorf("family: %v, %v", got.KnownPoints(), got.Err())
	}
	if len(f.KnownPoints()) != 1 {
		t.Errorf("the family itself changed: %v", f.KnownPoints())
	}
	p := emissivity.Unknown().KnownAt(λ, 0.7, 0.1)
	if got := p.WithKnownPoints(want...); !slices.Equal(got.KnownPoints(), want) || got.Err() != nil {
		t.Errorf("process: %v, %v", got.KnownPoints(), got.Err())
	}
	if got := p.WithKnownPoints(); len(got.KnownPoints()) != 0 {
		t.Errorf("replaced by none: %v", got.KnownPoints())
	}
	if f.WithKnownPoints(emissivity.Known{Wavelength: λ, Value: 2, Std: 1}).Err() == nil || p.WithKnownPoints(emissivity.Known{Wavelength: λ, Value: 0.5}).Err() == nil {
		t.Error("nonsense was accepted")
	}
}

func TestIsMixed(t *testing.T) {
	for _, p := range []emissivity.Process{emissivity.Unknown(), emissivity.AnySurface(), emissivity.Unknown().Relative()} {
		if !p.IsMixed() {
			t.Errorf("%v: a mixture over levels", p)
		}
	}
	for _, k := range emissivity.Kinds() {
		if k.Process.IsMixed() {
			t.Errorf("%s: one level", k.Name)
		}
	}
}
