package pyro_test

import (
	"fmt"
	"testing"

	"candent/pyro"
)

func TestFractionAgainstFiftyDigits(t *testing.T) {
	// F(0→λT), exact c₂, 50-digit arithmetic, digits as printed.
	for _, r := range []struct{ lt, want, rel float64 }{
		{200, 3.4195781384524e-27, 1e-13}, {400, 1.86495205145961e-12, 1e-13}, {600, 9.29336789949607e-8, 1e-13},
		{800, 1.64349668368e-5, 5e-12}, {1000, 0.000320769784045, 5e-12}, {2000, 0.0667299401814, 1e-11},
		{2898, 0.250106293657, 5e-12}, {4000, 0.480864643581, 5e-12}, {5000, 0.633725871916, 5e-12},
		{7000, 0.808074969764, 5e-12}, {7500, 0.834366587825, 5e-12}, {10000, 0.914156970928, 5e-12},
		{50000, 0.998903877055, 5e-12}, {100000, 0.999855210247, 5e-12},
		{4107.24848771118, 0.5, 1e-13}, {22884.3031447, 0.99, 1e-11},
	} {
		got := pyro.Fraction(pyro.Wavelength(r.lt)*pyro.Micrometre, 1)
		near(t, fmt.Sprintf("F(%g µm K)", r.lt), got, r.want, r.rel)
	}
}

func TestFractionAgainstPrintedTable(t *testing.T) {
	// Modest, Radiative Heat Transfer, 1993, pp. 775–777, five decimals, printed with
	// c₂ = 14388 µm K, which moves F by up to 1.1e-5.
	for _, r := range []struct{ lt, want float64 }{
		{1200, 0.00213}, {2000, 0.06672}, {3000, 0.27322}, {4000, 0.48085}, {6000, 0.73778}, {20000, 0.98555},
	} {
		got := pyro.Fraction(pyro.Wavelength(r.lt)*pyro.Micrometre, 1)
		if d := got - r.want; d > 1.7e-5 || d < -1.7e-5 {
			t.Errorf("F(%g µm K) = %.6f, printed %.5f", r.lt, got, r.want)
		}
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

func TestFractionBetween(t *testing.T) {
	// In-band exitance in W m⁻², 50-digit arithmetic, eleven digits printed.
	for _, r := range []struct{ t, lo, hi, want float64 }{
		{300, 8, 14, 172.5785587}, {500, 3, 5, 526.30403788}, {1000, 7.5, 13, 6845.6675506},
		{1273.15, 2, 2.6, 25470.488844}, {2000, 0.7, 1.1, 84465.317641},
	} {
		T := pyro.Temperature(r.t)
		got := pyro.FractionBetween(pyro.Wavelength(r.lo)*pyro.Micrometre, pyro.Wavelength(r.hi)*pyro.Micrometre, T)
		near(t, fmt.Sprintf("M(%g to %g µm, %g K)", r.lo, r.hi, r.t), got*pyro.Exitance(T), r.want, 1e-9)
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
