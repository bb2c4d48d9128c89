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
