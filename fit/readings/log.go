package readings

import (
	"errors"
	"fmt"
	"io"
	"strings"

	"candent/pyro"
)

// Log reads a table row by row whose columns the caller looks up: calibration points, a
// certificate, what an indicator wrote.
type Log struct {
	t     *table
	label int
	row   LogRow
	done  bool
}

// LogRow is one row of a Log. It is reused by the next call of Next.
type LogRow struct {
	Line     int
	Label    string // the text of time_s, time or label, the first of these columns that is there
	TimeS    float64
	HasTimeS bool // the column is time_s
	t        *table
}

// Column is a column of a Log. One that a table doesn't have is not Found.
type Column struct {
	Name  string
	Unit  string // the suffix of the name behind its last part: K in temperature_std_K
	Found bool
	index int
}

// NewLog reads the header of a table.
func NewLog(r io.Reader, set Settings) (*Log, error) {
	t, err := newTable(r, set)
	if err != nil {
		return nil, err
	}
	l := &Log{t: t, label: -1}
	for _, name := range []string{"time_s", "time", "label"} {
		if at := t.column(name); at >= 0 && l.label < 0 {
			l.label = at
		}
	}
	return l, nil
}

// Column finds the column name or name_unit, but not name_std.
func (l *Log) Column(name string) Column {
	i, suffix, ok := l.t.withSuffix(name)
	if !ok {
		return Column{Name: name}
	}
	return Column{Name: l.t.header[i], Unit: strings.TrimPrefix(suffix, "_"), Found: true, index: i}
}

// Require is Column, with the error of a column that isn't there.
func (l *Log) Require(name string) (Column, error) {
	c := l.Column(name)
	if !c.Found {
		return c, l.t.missingColumn(name)
	}
	return c, nil
}

// RequireTemperature is Require for a temperature: the unit must be K, C or F.
func (l *Log) RequireTemperature(name string) (Column, error) {
	c, err := l.Require(name)
	if err == nil && c.Unit != "K" && c.Unit != "C" && c.Unit != "F" {
		err = fmt.Errorf("%w: %s, line %d: %q says no unit of temperature: name it %s_K, %s_C or %s_F", ErrColumn, l.t.set.Name, l.t.line, c.Name, name, name, name)
	}
	return c, err
}

// Next returns the next row, io.EOF behind the last, or a *RowError, behind which Next may
// be called again.
func (l *Log) Next() (*LogRow, error) {
	if l.done {
		return nil, io.EOF
	}
	if err := l.t.next(); err != nil {
		l.done = errors.Is(err, io.EOF) || l.t.failed()
		return nil, err
	}
	l.row = LogRow{Line: l.t.line, t: l.t}
	if l.label >= 0 {
		l.row.Label = l.t.fields[l.label]
		if l.t.header[l.label] == "time_s" {
			v, err := l.row.Number(Column{Name: "time_s", Found: true, index: l.label})
			if err != nil {
				return nil, err
			}
			l.row.TimeS, l.row.HasTimeS = v, true
		}
	}
	return &l.row, nil
}

// Text returns the field as it was written.
func (r *LogRow) Text(c Column) string { return r.t.fields[c.index] }

// Number returns a field's value. A missing one, or one that is not a finite number, is a
// *RowError.
func (r *LogRow) Number(c Column) (float64, error) {
	v, err := r.t.finite(c.index)
	if err != nil {
		row := asRow(err)
		row.ID = r.Label
		return 0, row
	}
	return v, nil
}

// Optional is Number, with a value for a column that the table doesn't have.
func (r *LogRow) Optional(c Column, without float64) (float64, error) {
	if !c.Found {
		return without, nil
	}
	return r.Number(c)
}

// Temperature returns a field's temperature by the unit of its column.
func (r *LogRow) Temperature(c Column) (pyro.Temperature, error) {
	v, err := r.Number(c)
	switch {
	case err != nil:
		return 0, err
	case c.Unit == "C":
		return pyro.Celsius(v), nil
	case c.Unit == "F":
		return pyro.Fahrenheit(v), nil
	}
	return pyro.Temperature(v), nil
}

// Error returns a *RowError of the row.
func (r *LogRow) Error(c Column, err error) error {
	row := r.t.rowError(c.Name, err)
	row.Line, row.ID = r.Line, r.Label
	return row
}
