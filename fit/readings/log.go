package readings

import (
	"errors"
	"fmt"
	"io"
	"math"
)

// Entry is one row of a log. It is reused by the next call of Next.
type Entry struct {
	Line   int
	Label  string    // of the column label, time_s or time; else the line's number
	Values []float64 // in the order of the columns asked for; NaN where an optional one is absent
}

// Log reads a table of named numbers row by row: a signal, a wall temperature, an exposure.
type Log struct {
	t       *table
	label   int
	columns []int
	names   []string
	entry   Entry
	done    bool
}

// NewLog reads the header of a log. The columns needed must be there, the optional ones may.
func NewLog(r io.Reader, set Settings, needed, optional []string) (*Log, error) {
	t, err := newTable(r, set)
	if err != nil {
		return nil, err
	}
	l := &Log{t: t, label: -1}
	for _, name := range []string{"label", "time_s", "time"} {
		if at := t.column(name); at >= 0 && l.label < 0 {
			l.label = at
		}
	}
	for i, name := range append(append([]string{}, needed...), optional...) {
		at := t.column(name)
		if at < 0 && i < len(needed) {
			return nil, t.missingColumn(name)
		}
		l.columns, l.names = append(l.columns, at), append(l.names, name)
	}
	l.entry.Values = make([]float64, len(l.columns))
	return l, nil
}

// Has reports whether the table has the column.
func (l *Log) Has(name string) bool { return l.t.column(name) >= 0 }

// Next returns the next row, io.EOF behind the last, or a *RowError, behind which Next may be
// called again.
func (l *Log) Next() (*Entry, error) {
	if l.done {
		return nil, io.EOF
	}
	if err := l.t.next(); err != nil {
		l.done = errors.Is(err, io.EOF) || l.t.failed()
		return nil, err
	}
	e := &l.entry
	e.Line, e.Label = l.t.line, fmt.Sprintf("line %d", l.t.line)
	if l.label >= 0 {
		e.Label = l.t.fields[l.label]
	}
	for i, at := range l.columns {
		e.Values[i] = math.NaN()
		if at < 0 {
			continue
		}
		v, err := l.t.finite(at)
		if err != nil {
			row := asRow(err)
			row.ID = e.Label
			return nil, row
		}
		e.Values[i] = v
	}
	return e, nil
}
