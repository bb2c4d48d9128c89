package cavity_test

import (
	"errors"
	"fmt"
	"math"
	"testing"

	"candent/emissivity/cavity"
)

// Diffuse isothermal cylinder: bottom centre, mean bottom, aperture by an integral equation
// solved elsewhere in double precision (Nyström; grid doubling changes it by 3e-6 at most),
// and Gouffé's formula, six digits printed.
var cylinders = []struct{ depth, ε, centre, mean, aperture, gouffe float64 }{
	{2, 0.5, 0.839427, 0.858065, 0.808299, 0.842857},
	{2, 0.9, 0.978470, 0.981521, 0.972104, 0.978545},
	{4, 0.5, 0.94603, 0.94961, 0.832943, 0.927807},
	{4, 0.7, 0.976391, 0.977934, 0.914111, 0.970749},
	{4, 0.9, 0.993635, 0.994003, 0.974662, 0.993083},
	{8, 0.5, 0.988011, 0.988257, 0.836538, 0.966397},
	{8, 0.7, 0.994455, 0.994557, 0.915392, 0.988515},
	{8, 0.9, 0.998392, 0.998418, 0.974961, 0.997857},
	{10, 0.7, 0.996563, 0.996598, 0.915445, 0.991354},
	{10, 0.9, 0.998975, 0.998986, 0.974974, 0.998512},
	{16, 0.9, 0.999603, 0.999604, 0.974983, 0.999286},
	{20, 0.7, 0.999196, 0.999195, 0.915479, 0.996229},
	{20, 0.9, 0.999747, 0.999747, 0.974984, 0.999487},
}

func TestCylinder(t *testing.T) {
	worst := 0.0
	for _, r := range cylinders {
		got, err := cavity.Cylinder(r.ε, r.depth, 0)
		if err != nil {
			t.Fatal(err)
		}
		for name, v := range map[string][2]float64{
			"bottom centre": {got.BottomCentre, r.centre}, "mean bottom": {got.BottomMean, r.mean}, "aperture": {got.Aperture, r.aperture},
		} {
			off := math.Abs(v[0] - v[1])
			worst = math.Max(worst, off)
			if !(off <= 1e-4) {
				t.Errorf("L/R = %g, ε = %g, %s: %.6f, want %.6f", r.depth, r.ε, name, v[0], v[1])
			}
		}
		g, err := cavity.Gouffe(cavity.CylinderShape, r.ε, r.depth, 0)
		if err != nil || math.Abs(g-r.gouffe) > 0.5e-6+1e-12 {
			t.Errorf("L/R = %g, ε = %g: Gouffé %.7f (%v), want %.6f", r.depth, r.ε, g, err, r.gouffe)
		}
	}
	t.Logf("worst difference %.1e", worst)
}

func TestSphere(t *testing.T) {
	for _, r := range []struct{ ε, want float64 }{{0.5, 0.990099}, {0.8, 0.997506}, {0.9, 0.998890}} {
		got, err := cavity.Sphere(r.ε, 0.01, 0)
		if err != nil || math.Abs(got-r.want) > 0.5e-6+1e-12 {
			t.Errorf("ε = %g: %.7f (%v), want %.6f", r.ε, got, err, r.want)
		}
		// Gouffé's formula is exact for the sphere: the aperture's rim is removed at depth d where
		// 1/(1 + d²) is the removed fraction.
		g, err := cavity.Gouffe(cavity.SphereShape, r.ε, math.Sqrt(99), 0)
		if err != nil || math.Abs(g-got) > 1e-14 {
			t.Errorf("ε = %g: Gouffé %.15g (%v), exact %.15g", r.ε, g, err, got)
		}
	}
}

func TestEnergyIsConserved(t *testing.T) {
	// A black wall makes every value 1.
	got, err := cavity.Cylinder(1, 3, 0)
	if err != nil || math.Abs(got.BottomCentre-1) > 1e-12 || math.Abs(got.BottomMean-1) > 1e-6 || math.Abs(got.Aperture-1) > 1e-6 {
		t.Errorf("%+v %v", got, err)
	}
}

func TestRefusals(t *testing.T) {
	if _, err := cavity.Cylinder(0.9, 8, 2); !errors.Is(err, cavity.ErrGradient) {
		t.Errorf("a wall with a gradient: %v", err)
	}
	for _, bad := range [][2]float64{{0, 8}, {1.1, 8}, {80, 8}, {0.9, 0}, {0.9, math.Inf(1)}, {math.NaN(), 8}} {
		if _, err := cavity.Gouffe(cavity.ConeShape, bad[0], bad[1], 0); !errors.Is(err, cavity.ErrCavity) {
			t.Errorf("%v: %v", bad, err)
		}
	}
	if _, err := cavity.Sphere(0.9, 1, 0); !errors.Is(err, cavity.ErrCavity) {
		t.Errorf("a sphere that is all hole: %v", err)
	}
}

func ExampleCylinder() {
	bottom := func(ε, depth float64) (float64, error) {
		v, err := cavity.Cylinder(ε, depth, 0)
		return v.BottomMean, err
	}
	value, err := bottom(0.85, 6)
	if err != nil {
		fmt.Println(err)
		return
	}
	u, err := cavity.Uncertainty(bottom, 0.85, 0.05, 6, 0.2)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("bottom %.4f, standard uncertainty %.4f\n", value, u)
	// Output:
	// bottom 0.9957, standard uncertainty 0.0016
}
