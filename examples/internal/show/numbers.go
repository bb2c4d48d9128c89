package show

import (
	"encoding/json"
	"fmt"
	"io"
	"strconv"
	"strings"

	"candent/pyro"
)

// Normal95 is half the width of a 95 % interval in standard uncertainties.
const Normal95 = 1.959963984540054

// Band parses N or LO-HI in nm.
func Band(flag, text string) (*pyro.Band, error) {
	lo, hi, flat := strings.Cut(text, "-")
	a, err := strconv.ParseFloat(lo, 64)
	b := a
	if err == nil && flat {
		b, err = strconv.ParseFloat(hi, 64)
	}
	if err != nil {
		return nil, fmt.Errorf("-%s %q: a wavelength in nm such as 900, or a band such as 850-950", flag, text)
	}
	if !flat {
		return pyro.Line(pyro.Wavelength(a) * pyro.Nanometre)
	}
	return pyro.FlatTop(pyro.Wavelength(a)*pyro.Nanometre, pyro.Wavelength(b)*pyro.Nanometre)
}

// WidestPair compiles the pair from the lowest temperature at which the bands have a
// radiance to speak of, up to the end of the range.
func WidestPair(short, long *pyro.Band) (*pyro.Pair, error) {
	var err error
	for lo := pyro.BandMin; lo < 1000; lo += 50 {
		var p *pyro.Pair
		if p, err = pyro.NewPair(short, long, lo, pyro.BandMax); err == nil {
			return p, nil
		}
	}
	return nil, err
}

// Round keeps ten significant digits, more than any reading has.
func Round(v float64) float64 {
	r, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', 10, 64), 64)
	if err != nil {
		return v
	}
	return r
}

// Rounded is Round for a number that may be unknown.
func Rounded(v *float64) *float64 {
	if v == nil {
		return nil
	}
	r := Round(*v)
	return &r
}

// WriteError writes the line of a row that could not be estimated.
func WriteError(out io.Writer, asJSON bool, label string, err error) error {
	if asJSON {
		return json.NewEncoder(out).Encode(struct {
			Label string `json:"label"`
			Error string `json:"error"`
		}{label, err.Error()})
	}
	_, err = fmt.Fprintf(out, "%-22s not estimated: %v\n", label, err)
	return err
}

// Resolution returns the step of a number as it was written, 0.1 for 12.5, and 0 for one
// with an exponent.
func Resolution(text string) float64 {
	if strings.ContainsAny(text, "eE") {
		return 0
	}
	step := 1.0
	if at := strings.LastIndexAny(text, ".,"); at >= 0 {
		for range len(text) - at - 1 {
			step /= 10
		}
	}
	return step
}

// Rectangular is the standard deviation of a step of 1, 1/√12.
const Rectangular = 0.28867513459481287
