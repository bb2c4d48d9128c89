package pyro_test

import (
	"fmt"
	"testing"

	"candent/pyro"
)

func TestFractionAgainstFiftyDigits(t *testing.T) {
	// F(0→λT), exact c₂, 50-digit arithmetic, digits as printed; the table has the rest. Where λT
	// is printed to twelve digits, F is right to d lnF/d lnλT times half a unit of them.
	for _, r := range []struct{ lt, want, rel float64 }{
		{200, 3.4195781384524e-27, 1e-13}, {400, 1.86495205145961e-12, 1e-13}, {600, 9.29336789949607e-8, 1e-13},
		{2897.7719551851726615, 0.25005454682271, 1e-13}, {4107.24848771118, 0.5, 1e-13},
		{1447.89129926, 0.01, 5e-11}, {2195.18865213, 0.1, 2e-11}, {2897.53157101, 0.25, 5e-12},
		{6148.13058504, 0.75, 5e-12}, {9375.89808518, 0.9, 5e-12}, {22884.3031447, 0.99, 5e-12},
	} {
		got := pyro.Fraction(pyro.Wavelength(r.lt)*pyro.Micrometre, 1)
		near(t, fmt.Sprintf("F(%g µm K)", r.lt), got, r.want, r.rel)
	}
}

// fractionBound is the relative error that Fraction states.
const fractionBound = 1e-14

func TestFractionOverTheWholeRange(t *testing.T) {
	// testdata/planck/fraction.csv, 50-digit arithmetic by the script beside it.
	rows := readCheckValues(t, "../testdata/planck/fraction.csv", 50)
	for _, v := range rows {
		near(t, fmt.Sprintf("F(%g m K)", v[0]), pyro.Fraction(pyro.Wavelength(v[0]), 1), v[1], fractionBound)
	}
}

func TestFractionBetweenCloseWavelengths(t *testing.T) {
	// Over a vanishing interval the fraction is πLΔλ/σT⁴; over ratios on both sides of the
	// switch to subtraction it must join up.
	T := 1500 * pyro.Kelvin
	lo := 1 * pyro.Micrometre
	hi := lo * (1 + 0x1p-40)
	want := 3.141592653589793 * pyro.Radiance(lo, T) * float64(hi-lo) / pyro.Exitance(T)
	near(t, "vanishing interval", pyro.FractionBetween(lo, hi, T), want, 1e-11)
	near(t, "swapped", pyro.FractionBetween(hi, lo, T), -want, 1e-11)
	near(t, "at the switch", pyro.FractionBetween(lo, lo*1.0999, T),
		pyro.Fraction(lo*1.0999, T)-pyro.Fraction(lo, T), 1e-12)
	if got := pyro.FractionBetween(lo, lo, T); got != 0 {
		t.Errorf("empty interval: %g", got)
	}
}
