package emissivity_test

import (
	"fmt"
	"math"
	"math/cmplx"
	"testing"

	"candent/emissivity"
)

// n, k of M. A. Ordal et al., Appl. Opt. 24 (1985) 4493, 26 (1987) 744 and 27 (1988) 1203
// (volumes and pages from memory), as an open database of optical constants gives them, and
// ε computed elsewhere in double precision before n and k were rounded to four digits. The
// tolerance is half a unit of the last digit of ε, n and k, the latter two through the
// derivatives.
func TestFresnelOfMeasuredIndices(t *testing.T) {
	for _, row := range []struct {
		name    string
		n, k, ε float64
	}{
		{"W 1 µm", 3.083, 3.421, .43463},
		{"W 2 µm", 1.299, 7.566, .08311},
		{"W 5 µm", 2.667, 22.61, .02033},
		{"W 10 µm", 9.194, 44.02, .01801},
		{"Mo 1 µm", 2.537, 3.997, .35627},
		{"Mo 10 µm", 12.13, 55.82, .01476},
		{"Ta 1 µm", 0.9821, 4.887, .14124},
		{"Ta 10 µm", 12.93, 54.67, .01625},
		{"Fe 1 µm", 3.184, 4.144, .36723},
		{"Fe 10 µm", 7.069, 27.9, .03352},
		{"Ni 1 µm", 2.82, 5.11, .27712},
		{"Ni 10 µm", 8.42, 35.7, .02471},
		{"Ti 1 µm", 3.396, 3.242, .45532},
		{"Ti 10 µm", 4.072, 19.66, .03949},
		{"Al 1 µm", 1.379, 9.683, .05548},
		{"Al 10 µm", 25.83, 90.72, .01155},
		{"Cu 1 µm", 0.538, 6.53, .04782},
		{"Cu 10 µm", 8.31, 63, .00820},
		{"Au 1 µm", 0.229, 6.79, .01924},
		{"Au 10 µm", 12.1, 69.2, .00976},
	} {
		grad := make([]float64, 2)
		ε, dT := emissivity.Fresnel{}.Emissivity(grad, []float64{row.n, row.k}, 1*µm, 300)
		tolerance := 0.501e-5 + math.Abs(grad[0])*half4(row.n) + math.Abs(grad[1])*half4(row.k)
		if math.Abs(ε-row.ε) > tolerance || tolerance > 2e-3*row.ε || dT != 0 {
			t.Errorf("%s: %.7f, want %.5f ± %.1g", row.name, ε, row.ε, tolerance)
		}
		given := emissivity.Fresnel{N: emissivity.Constant(row.n), K: emissivity.Constant(row.k)}
		if again, _ := given.Emissivity(nil, nil, 1*µm, 300); again != ε {
			t.Errorf("%s: given %g, free %g", row.name, again, ε)
		}
	}
}

// half4 is half a unit of the fourth significant digit of v.
func half4(v float64) float64 { return 0.5 * math.Pow(10, math.Floor(math.Log10(v))-3) }

// fresnelWritten is 1 − |r|² by the textbook's amplitude coefficients with the angle of refraction.
func fresnelWritten(n, k float64, a emissivity.Angle, p emissivity.Polarisation) float64 {
	ñ, cos := complex(n, k), complex(math.Cos(float64(a)), 0)
	refracted := cmplx.Cos(cmplx.Asin(complex(math.Sin(float64(a)), 0) / ñ))
	r := (cos - ñ*refracted) / (cos + ñ*refracted)
	if p == emissivity.P {
		r = (ñ*cos - refracted) / (ñ*cos + refracted)
	}
	return 1 - real(r)*real(r) - imag(r)*imag(r)
}

func TestFresnelAtAnAngle(t *testing.T) {
	for _, nk := range [][2]float64{{1.5, 0}, {1.5, 0.3}, {3.1, 3.4}, {0.2, 6.8}, {12, 55}} {
		for _, degrees := range []float64{0, 10, 45, 60, 80, 89} {
			a := emissivity.Angle(degrees) * emissivity.Degree
			at := func(p emissivity.Polarisation) float64 {
				ε, _ := emissivity.Fresnel{Angle: a, Polarisation: p}.Emissivity(nil, nk[:], 1*µm, 300)
				return ε
			}
			s, p := at(emissivity.S), at(emissivity.P)
			for q, got := range map[emissivity.Polarisation]float64{emissivity.S: s, emissivity.P: p} {
				if want := fresnelWritten(nk[0], nk[1], a, q); math.Abs(got-want) > 1e-13 {
					t.Errorf("n, k = %v at %v, %v: %.15g, want %.15g", nk, a, q, got, want)
				}
			}
			if u := at(emissivity.Unpolarised); u != (s+p)/2 {
				t.Errorf("n, k = %v at %v: unpolarised %g, mean %g", nk, a, u, (s+p)/2)
			}
			if degrees == 0 && math.Abs(s-p) > 1e-15 || degrees > 0 && !(p > s) {
				t.Errorf("n, k = %v at %v: p %g, s %g", nk, a, p, s)
			}
		}
	}
}

func TestFresnelAtBrewstersAngle(t *testing.T) {
	const n = 1.5
	brewster := emissivity.Angle(math.Atan(n))
	ε, _ := emissivity.Fresnel{Angle: brewster, Polarisation: emissivity.P}.Emissivity(nil, []float64{n, 0}, 1*µm, 300)
	if math.Abs(ε-1) > 1e-15 {
		t.Errorf("p-polarised at Brewster's angle: %.17g", ε)
	}
	// there the s-reflectance is ((n² − 1)/(n² + 1))²
	ε, _ = emissivity.Fresnel{Angle: brewster, Polarisation: emissivity.S}.Emissivity(nil, []float64{n, 0}, 1*µm, 300)
	if want := 1 - math.Pow((n*n-1)/(n*n+1), 2); math.Abs(ε-want) > 1e-15 {
		t.Errorf("s-polarised at Brewster's angle: %.17g, want %.17g", ε, want)
	}
}

func ExampleFresnel() {
	tungsten := []float64{3.083, 3.421} // n, k at 1 µm, Ordal et al. (1988)
	for _, f := range []emissivity.Fresnel{
		{},
		{Angle: 60 * emissivity.Degree, Polarisation: emissivity.P},
		{Angle: 60 * emissivity.Degree, Polarisation: emissivity.S},
	} {
		ε, _ := f.Emissivity(nil, tungsten, 1*µm, 300)
		fmt.Printf("%v: %.4f\n", f, ε)
	}
	// Output:
	// Fresnel emissivity at the normal: 0.4346
	// Fresnel emissivity at 60°, p-polarised: 0.6661
	// Fresnel emissivity at 60°, s-polarised: 0.2465
}
