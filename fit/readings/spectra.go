package readings

import (
	"errors"
	"fmt"
	"io"
	"math"
	"sort"
	"strconv"
	"strings"

	"candent/pyro"
)

// Spectrum is one spectrum, wavelengths rising. Its slices are reused by the next call of
// Next; copy what is to stay.
type Spectrum struct {
	ID          string
	Line        int // of its first row
	Wavelengths []pyro.Wavelength
	Signal      []float64 // W m⁻² sr⁻¹ m⁻¹, or the table's own unit where Relative
	Std         []float64 // standard uncertainties in the unit of Signal; empty where none is given
	Relative    bool      // a signal in any unit: a common unknown gain
	Missing     int       // channels left out because a value was missing
}

// Len, Less and Swap sort a spectrum by wavelength.
func (s *Spectrum) Len() int           { return len(s.Wavelengths) }
func (s *Spectrum) Less(i, j int) bool { return s.Wavelengths[i] < s.Wavelengths[j] }
func (s *Spectrum) Swap(i, j int) {
	s.Wavelengths[i], s.Wavelengths[j] = s.Wavelengths[j], s.Wavelengths[i]
	s.Signal[i], s.Signal[j] = s.Signal[j], s.Signal[i]
	if len(s.Std) > 0 {
		s.Std[i], s.Std[j] = s.Std[j], s.Std[i]
	}
}

// Spectra reads spectra one by one.
type Spectra struct {
	t        *table
	quantity quantity
	axis     axis
	id       int // column, or −1
	value    int // long form
	std      int // long form: standard uncertainty, or −1
	percent  int // or −1
	wide     []wideColumn

	out     Spectrum
	pending bool // fields hold a row that belongs to the next spectrum
	done    bool
}

type wideColumn struct {
	value, std int
	λ          pyro.Wavelength
}

// quantity is what a signal column holds.
type quantity struct {
	name     string
	perMetre float64 // factor to W m⁻² sr⁻¹ m⁻¹, for units per length
	inverse  bool    // per cm⁻¹
	relative bool
}

var quantities = []quantity{
	{name: "radiance_W_m2_sr_nm", perMetre: 1e9},
	{name: "radiance_W_m2_sr_um", perMetre: 1e6},
	{name: "radiance_W_m2_sr_m", perMetre: 1},
	{name: "radiance_W_m2_sr_cm-1", inverse: true},
	{name: "signal", perMetre: 1, relative: true},
}

// factor returns what a value at λ is multiplied by. Per wavenumber, L_λ = L_ν̃/λ², and
// per cm⁻¹ is a hundredth of per m⁻¹.
func (q quantity) factor(λ pyro.Wavelength) float64 {
	if q.inverse {
		return 0.01 / (float64(λ) * float64(λ))
	}
	return q.perMetre
}

// axis is a column of wavelengths.
type axis struct {
	column int
	name   string
}

func (a axis) wavelength(v float64) pyro.Wavelength {
	switch a.name {
	case "wavelength_nm":
		return pyro.Wavelength(v) * pyro.Nanometre
	case "wavelength_um":
		return pyro.Wavelength(v) * pyro.Micrometre
	}
	return pyro.Wavenumber(v)
}

// NewSpectra reads the header of a table of spectra, long or wide.
func NewSpectra(r io.Reader, set Settings) (*Spectra, error) {
	t, err := newTable(r, set)
	if err != nil {
		return nil, err
	}
	s := &Spectra{t: t, id: t.column("id"), percent: t.column("std_percent"), std: -1}
	for _, name := range []string{"wavelength_nm", "wavelength_um", "wavenumber_cm-1"} {
		if c := t.column(name); c >= 0 {
			s.axis = axis{c, name}
		}
	}
	if s.axis.name == "" {
		return s, s.openWide()
	}
	for _, q := range quantities {
		if c := t.column(q.name); c >= 0 {
			s.value, s.quantity = c, q
			s.std = t.column("std_" + q.name)
			return s, nil
		}
	}
	return nil, t.missingColumn("radiance_W_m2_sr_nm, …_um, …_m, …_cm-1 or signal")
}

func (t *table) column(name string) int {
	if c, ok := t.columns[name]; ok {
		return c
	}
	return -1
}

// openWide finds the columns quantity@wavelength.
func (s *Spectra) openWide() error {
	for c, name := range s.t.header {
		what, at, found := strings.Cut(name, "@")
		if !found || strings.HasPrefix(what, "std_") {
			continue
		}
		known := false
		for _, q := range quantities {
			if q.name == what {
				if known = true; len(s.wide) > 0 && q.name != s.quantity.name {
					return fmt.Errorf("%w: %s, line %d: column %d (%s): columns in %s and in %s don't mix", ErrColumn, s.t.set.Name, s.t.line, c+1, name, s.quantity.name, q.name)
				}
				s.quantity = q
			}
		}
		λ, err := parseWavelength(at)
		if !known || err != nil {
			return fmt.Errorf("%w: %s, line %d: column %d: %q is not a quantity and a wavelength such as signal@650nm", ErrColumn, s.t.set.Name, s.t.line, c+1, name)
		}
		s.wide = append(s.wide, wideColumn{c, s.t.column("std_" + name), λ})
	}
	if len(s.wide) == 0 {
		return s.t.missingColumn("wavelength_nm, wavelength_um or wavenumber_cm-1, nor one such as signal@650nm")
	}
	return nil
}

func parseWavelength(text string) (pyro.Wavelength, error) {
	for _, unit := range []string{"nm", "um", "cm-1"} {
		number, found := strings.CutSuffix(text, unit)
		if !found {
			continue
		}
		v, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
		if err != nil {
			return 0, err
		}
		name := "wavelength_" + unit
		λ := axis{name: name}.wavelength(v)
		return λ, checkWavelength(λ)
	}
	return 0, errors.New("no unit")
}

func checkWavelength(λ pyro.Wavelength) error {
	if !(λ >= 10*pyro.Nanometre && λ <= 1000*pyro.Micrometre) {
		return fmt.Errorf("wavelength %v is outside 0.01 to 1000 µm; is the unit right?", λ)
	}
	return nil
}

// Next returns the next spectrum, io.EOF behind the last, or a *RowError, behind which
// Next may be called again.
func (s *Spectra) Next() (*Spectrum, error) {
	if s.done {
		return nil, io.EOF
	}
	s.out.Wavelengths, s.out.Signal, s.out.Std = s.out.Wavelengths[:0], s.out.Signal[:0], s.out.Std[:0]
	s.out.ID, s.out.Line, s.out.Missing, s.out.Relative = "", 0, 0, s.quantity.relative
	var err error
	if s.wide != nil {
		err = s.nextWide()
	} else {
		err = s.nextLong()
	}
	if err != nil {
		return nil, err
	}
	if len(s.out.Wavelengths) == 0 {
		return nil, &RowError{Name: s.t.set.Name, Line: s.out.Line, ID: s.out.ID, Err: errors.New("no channel has a value")}
	}
	if !sort.IsSorted(&s.out) {
		sort.Stable(&s.out)
	}
	return &s.out, nil
}

// nextLong gathers the rows of one id. The first bad row is the spectrum's error; its
// other rows are read and dropped.
func (s *Spectra) nextLong() error {
	var bad *RowError
	begun := false
	for {
		if !s.pending {
			err := s.t.next()
			var row *RowError
			switch {
			case errors.Is(err, io.EOF):
				s.done = true
				if !begun {
					return io.EOF
				}
				if bad != nil {
					return bad
				}
				return nil
			case errors.As(err, &row) && len(s.t.fields) != len(s.t.header) && !s.t.failed():
				if begun || s.id < 0 { // a short row belongs to the spectrum it stands in
					bad, begun = first(bad, row), true
					continue
				}
				return row
			case err != nil:
				s.done = true
				return err
			}
		}
		s.pending = false
		id := ""
		if s.id >= 0 {
			id = s.t.fields[s.id]
		}
		switch {
		case !begun:
			begun = true
			s.out.ID, s.out.Line = id, s.t.line
		case id != s.out.ID:
			s.pending = true
			if bad != nil {
				bad.ID = s.out.ID
				return bad
			}
			return nil
		}
		if err := s.channel(); err != nil {
			bad = first(bad, err)
			bad.ID = s.out.ID
		}
	}
}

func first(a, b *RowError) *RowError {
	if a != nil {
		return a
	}
	return b
}

// failed reports whether the input itself failed, so that nothing can be read behind it.
func (t *table) failed() bool { return t.in.Err() != nil }

// channel adds the row in fields to the spectrum.
func (s *Spectra) channel() *RowError {
	t := s.t
	v, err := t.number(s.axis.column)
	if err != nil {
		return asRow(err)
	}
	λ := s.axis.wavelength(v)
	if err := checkWavelength(λ); err != nil {
		return t.rowError(s.axis.name, err)
	}
	return s.add(λ, s.value, s.std)
}

func asRow(err error) *RowError {
	var row *RowError
	errors.As(err, &row)
	return row
}

// add takes the value (and standard uncertainty) of one channel from the row in fields.
func (s *Spectra) add(λ pyro.Wavelength, value, std int) *RowError {
	t := s.t
	if t.missing(value) || std >= 0 && t.missing(std) || std < 0 && s.percent >= 0 && t.missing(s.percent) {
		s.out.Missing++
		return nil
	}
	f := s.quantity.factor(λ)
	v, err := t.number(value)
	if err != nil {
		return asRow(err)
	}
	if y := v * f; math.IsNaN(y) || math.IsInf(y, 0) {
		return t.rowError(t.header[value], fmt.Errorf("%q is not finite", t.fields[value]))
	}
	u, column := 0.0, std
	switch {
	case std >= 0:
		u, err = t.number(std)
		u *= f
	case s.percent >= 0:
		column = s.percent
		u, err = t.number(s.percent)
		u *= 0.01 * math.Abs(v) * f
	}
	if err != nil {
		return asRow(err)
	}
	if column >= 0 {
		if !(u > 0) || math.IsInf(u, 0) {
			return t.rowError(t.header[column], fmt.Errorf("standard uncertainty %q of the reading %g: it must be positive; leave out a channel that says nothing", t.fields[column], v))
		}
		s.out.Std = append(s.out.Std, u)
	}
	s.out.Wavelengths = append(s.out.Wavelengths, λ)
	s.out.Signal = append(s.out.Signal, v*f)
	return nil
}

func (s *Spectra) nextWide() error {
	if err := s.t.next(); err != nil {
		s.done = errors.Is(err, io.EOF) || s.t.failed()
		return err
	}
	s.out.Line = s.t.line
	if s.id >= 0 {
		s.out.ID = s.t.fields[s.id]
	}
	for _, c := range s.wide {
		if err := s.add(c.λ, c.value, c.std); err != nil {
			err.ID = s.out.ID
			return err
		}
	}
	if n := len(s.out.Std); n > 0 && n != len(s.out.Signal) {
		err := s.t.rowError("", errors.New("some channels have a standard uncertainty and some have none"))
		err.ID = s.out.ID
		return err
	}
	return nil
}
