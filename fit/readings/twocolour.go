package readings

import (
	"errors"
	"fmt"
	"io"
	"strings"
	"time"
)

// Row is one row of a two-colour log. It is reused by the next call of Next.
type Row struct {
	Line              int
	TimeS             float64   // where the column is time_s
	Time              time.Time // where it is time
	Label             string    // the text of whichever column it is
	Short, Long       float64
	ShortStd, LongStd float64
	HasTimeS, HasTime bool
	HasStd            bool
}

// TwoColour reads a two-colour log row by row.
type TwoColour struct {
	t                              *table
	label                          int
	short, long, shortStd, longStd int
	unit                           string
	row                            Row
	done                           bool
}

// NewTwoColour reads the header of a two-colour log.
func NewTwoColour(r io.Reader, set Settings) (*TwoColour, error) {
	t, err := newTable(r, set)
	if err != nil {
		return nil, err
	}
	c := &TwoColour{t: t, label: -1}
	for _, name := range []string{"time_s", "time", "label"} {
		if at := t.column(name); at >= 0 && c.label < 0 {
			c.label = at
		}
	}
	var units [2]string
	var ok [2]bool
	c.short, units[0], ok[0] = t.withSuffix("short")
	c.long, units[1], ok[1] = t.withSuffix("long")
	for i, name := range []string{"short", "long"} {
		if !ok[i] {
			return nil, t.missingColumn(name)
		}
	}
	if units[0] != units[1] {
		return nil, fmt.Errorf("%w: %s, line %d: short is in %q and long in %q: they must be in one unit", ErrColumn, set.Name, t.line, units[0], units[1])
	}
	c.unit = units[0]
	c.shortStd, c.longStd = t.column("short_std"+units[0]), t.column("long_std"+units[0])
	if (c.shortStd < 0) != (c.longStd < 0) {
		return nil, fmt.Errorf("%w: %s, line %d: one of short_std%s and long_std%s is missing", ErrColumn, set.Name, t.line, units[0], units[0])
	}
	return c, nil
}

// withSuffix finds the column name or name_unit, but not name_std.
func (t *table) withSuffix(name string) (column int, suffix string, ok bool) {
	for i, h := range t.header {
		rest, found := strings.CutPrefix(h, name)
		if !found || strings.HasPrefix(rest, "_std") || rest != "" && rest[0] != '_' {
			continue
		}
		return i, rest, true
	}
	return 0, "", false
}

// Unit returns the unit suffix of the columns without its underscore, "" where there is none.
func (c *TwoColour) Unit() string { return strings.TrimPrefix(c.unit, "_") }

// Next returns the next row, io.EOF behind the last, or a *RowError, behind which Next may
// be called again.
func (c *TwoColour) Next() (*Row, error) {
	if c.done {
		return nil, io.EOF
	}
	t := c.t
	if err := t.next(); err != nil {
		c.done = errors.Is(err, io.EOF) || t.failed()
		return nil, err
	}
	c.row = Row{Line: t.line}
	r := &c.row
	if c.label >= 0 {
		r.Label = t.fields[c.label]
		switch t.header[c.label] {
		case "time_s":
			v, err := t.number(c.label)
			if err != nil {
				return nil, err
			}
			r.TimeS, r.HasTimeS = v, true
		case "time":
			v, err := time.Parse(time.RFC3339, r.Label)
			if err != nil {
				return nil, t.rowError("time", fmt.Errorf("%q is not a time of RFC 3339, such as 2026-03-01T12:00:00Z", r.Label))
			}
			r.Time, r.HasTime = v, true
		}
	}
	var err error
	if r.Short, err = c.t.finite(c.short); err == nil {
		r.Long, err = c.t.finite(c.long)
	}
	if err == nil && c.shortStd >= 0 {
		r.HasStd = true
		if r.ShortStd, err = c.std(c.shortStd); err == nil {
			r.LongStd, err = c.std(c.longStd)
		}
	}
	if err != nil {
		row := asRow(err)
		row.ID = r.Label
		return nil, row
	}
	return r, nil
}

func (c *TwoColour) std(column int) (float64, error) {
	v, err := c.t.finite(column)
	if err == nil && !(v > 0) {
		err = c.t.rowError(c.t.header[column], fmt.Errorf("standard uncertainty %g must be positive", v))
	}
	return v, err
}
