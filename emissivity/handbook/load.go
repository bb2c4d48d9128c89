package handbook

import (
	"embed"
	"encoding/csv"
	"errors"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"sync"

	"candent/pyro"
)

// The tables. spectral.csv and total.csv have a row for each entry; lists within a field
// are separated by spaces:
//
//	direction    normal, hemispherical or unstated
//	K            spectral: one temperature, or the lowest and the highest; total: one for each
//	             value. Empty: not stated
//	um           wavelengths, µm
//	emissivity   one for each wavelength or temperature, or one for all temperatures;
//	             a..b is a range: its middle, with at least (b − a)/2√3 as standard uncertainty
//	std          standard uncertainty, absolute or in % of the value; a|b is the larger;
//	             one for each value or one for all
//	spread       key into spreads.csv: where std comes from
//	source       key into sources.csv
//	mark         data or memory; memory has at least 25 % and 0.02
//
//go:embed *.csv
var files embed.FS

// least of a recalled value's standard uncertainty: relative, and absolute.
const (
	recalledRelative = 0.25
	recalledAbsolute = 0.02
)

type loaded struct {
	spectral                  []Spectral
	total                     []Total
	spectralNames, totalNames []string
}

var tables = sync.OnceValues(load)

func load() (loaded, error) {
	var out loaded
	sources, err := keyed("sources.csv", "key", "citation")
	if err != nil {
		return out, err
	}
	spreads, err := keyed("spreads.csv", "key", "statement")
	if err != nil {
		return out, err
	}
	err = each("spectral.csv", func(r row) error {
		s := Spectral{Entry: r.entry(sources, spreads)}
		kelvin, um := r.list("K"), r.list("um")
		if len(kelvin) > 2 {
			return fmt.Errorf("%d temperatures", len(kelvin))
		}
		if len(kelvin) > 0 {
			s.Coldest, s.Hottest = pyro.Temperature(kelvin[0]), pyro.Temperature(kelvin[len(kelvin)-1])
		}
		for _, v := range um {
			s.Wavelengths = append(s.Wavelengths, pyro.Wavelength(v)*pyro.Micrometre)
		}
		s.Emissivities, s.Std = r.values(len(um))
		out.spectral = append(out.spectral, s)
		return r.err
	})
	if err != nil {
		return out, err
	}
	err = each("total.csv", func(r row) error {
		e := Total{Entry: r.entry(sources, spreads)}
		for _, v := range r.list("K") {
			e.Temperatures = append(e.Temperatures, pyro.Temperature(v))
		}
		e.Emissivities, e.Std = r.values(max(1, len(e.Temperatures)))
		out.total = append(out.total, e)
		return r.err
	})
	for _, s := range out.spectral {
		out.spectralNames = append(out.spectralNames, s.Material)
	}
	for _, e := range out.total {
		out.totalNames = append(out.totalNames, e.Material)
	}
	for _, names := range []*[]string{&out.spectralNames, &out.totalNames} {
		slices.Sort(*names)
		*names = slices.Compact(*names)
	}
	return out, err
}

// row is a line of a table by the names of its columns. The first error stays in err.
type row struct {
	cells map[string]string
	err   error
}

func (r *row) fail(format string, args ...any) {
	if r.err == nil {
		r.err = fmt.Errorf(format, args...)
	}
}

func (r *row) fields(column string) []string { return strings.Fields(r.cells[column]) }

func (r *row) number(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		r.fail("%w", err)
	}
	return v
}

func (r *row) list(column string) []float64 {
	var all []float64
	for _, f := range r.fields(column) {
		all = append(all, r.number(f))
	}
	return all
}

func (r *row) entry(sources, spreads map[string]string) Entry {
	e := Entry{Material: r.cells["material"], State: r.cells["state"], Note: r.cells["note"]}
	switch d := r.cells["direction"]; d {
	case "normal":
		e.Direction = Normal
	case "hemispherical":
		e.Direction = Hemispherical
	case "unstated":
	default:
		r.fail("direction %q", d)
	}
	switch m := r.cells["mark"]; m {
	case "data":
	case "memory":
		e.Mark = FromMemory
	default:
		r.fail("mark %q", m)
	}
	var known bool
	if e.Source, known = sources[r.cells["source"]]; !known {
		r.fail("source %q", r.cells["source"])
	}
	if e.Spread, known = spreads[r.cells["spread"]]; !known {
		r.fail("spread %q", r.cells["spread"])
	}
	if strings.Contains(r.cells["emissivity"], "..") {
		e.Spread += "; where the source has a range, no less than half of it over √3"
	}
	return e
}

// values returns n emissivities with their standard uncertainties.
func (r *row) values(n int) (ε, std []float64) {
	ε, std = make([]float64, n), make([]float64, n)
	values, stds := r.fields("emissivity"), r.fields("std")
	if len(values) != 1 && len(values) != n || len(stds) != 1 && len(stds) != n {
		r.fail("%d values and %d standard uncertainties for %d points", len(values), len(stds), n)
		return
	}
	for i := range n {
		lo, hi, ranged := strings.Cut(values[min(i, len(values)-1)], "..")
		ε[i] = r.number(lo)
		if ranged {
			a, b := ε[i], r.number(hi)
			ε[i] = (a + b) / 2
			std[i] = (b - a) / (2 * math.Sqrt(3))
		}
		for _, s := range strings.Split(stds[min(i, len(stds)-1)], "|") {
			number, relative := strings.CutSuffix(s, "%")
			v := r.number(number)
			if relative {
				v *= ε[i] / 100
			}
			std[i] = max(std[i], v)
		}
		if r.cells["mark"] == "memory" {
			std[i] = max(std[i], recalledRelative*ε[i], recalledAbsolute)
		}
	}
	return
}

// each calls f for every row of a table.
func each(name string, f func(r row) error) error {
	file, err := files.Open(name)
	if err != nil {
		return fmt.Errorf("handbook: %w", err)
	}
	lines, err := csv.NewReader(file).ReadAll()
	if err = errors.Join(err, file.Close()); err != nil {
		return fmt.Errorf("handbook: %s: %w", name, err)
	}
	for i, line := range lines[1:] {
		r := row{cells: make(map[string]string, len(line))}
		for c, cell := range line {
			r.cells[lines[0][c]] = cell
		}
		if err := f(r); err != nil {
			return fmt.Errorf("handbook: %s, line %d: %w", name, i+2, err)
		}
	}
	return nil
}

// keyed reads a table of two columns.
func keyed(name, key, value string) (map[string]string, error) {
	all := make(map[string]string)
	err := each(name, func(r row) error {
		if _, twice := all[r.cells[key]]; twice {
			return fmt.Errorf("%s twice", r.cells[key])
		}
		all[r.cells[key]] = r.cells[value]
		return nil
	})
	return all, err
}
