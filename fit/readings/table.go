package readings

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
)

// Settings of a reader. The zero value finds separator and decimal mark by itself.
type Settings struct {
	Name    string   // of the table, in errors
	Missing []string // fields that stand for a missing value; nil: "", "NaN", "Bad", "-9999"
}

// ErrColumn is what errors of a header wrap.
var ErrColumn = errors.New("readings: column")

// RowError is the error of one row (or of one spectrum, at its first row). Reading goes on
// behind it.
type RowError struct {
	Name   string // of the table
	Line   int    // from 1
	Column string // name of the column, or ""
	ID     string // of the spectrum or the row, or ""
	Err    error
}

func (e *RowError) Error() string {
	where := fmt.Sprintf("line %d", e.Line)
	if e.Name != "" {
		where = fmt.Sprintf("%s:%d", e.Name, e.Line)
	}
	if e.Column != "" {
		where += ", column " + e.Column
	}
	return fmt.Sprintf("readings: %s: %v", where, e.Err)
}

func (e *RowError) Unwrap() error { return e.Err }

// maxLine bounds a line, so that a file that isn't a table can't fill the memory.
const maxLine = 1 << 20

// table splits lines into fields.
type table struct {
	set     Settings
	in      *bufio.Scanner
	line    int
	comma   byte
	header  []string
	fields  []string
	columns map[string]int
}

func newTable(r io.Reader, set Settings) (*table, error) {
	if set.Missing == nil {
		set.Missing = []string{"", "NaN", "Bad", "-9999"}
	}
	t := &table{set: set, in: bufio.NewScanner(r), columns: map[string]int{}}
	t.in.Buffer(make([]byte, 0, 4096), maxLine)
	text, err := t.nextLine()
	if errors.Is(err, io.EOF) {
		return nil, fmt.Errorf("%w: the table %s is empty", ErrColumn, set.Name)
	}
	if err != nil {
		return nil, err
	}
	text = strings.TrimPrefix(text, "\ufeff")
	t.comma = separator(text)
	for i, name := range t.split(text, nil) {
		t.header = append(t.header, name)
		if _, twice := t.columns[name]; twice && name != "" {
			return nil, fmt.Errorf("%w: %s, line %d: column %d: %q stands there twice", ErrColumn, set.Name, t.line, i+1, name)
		}
		t.columns[name] = i
	}
	return t, nil
}

// separator guesses the field separator from the header.
func separator(header string) byte {
	for _, c := range []byte{'\t', ';'} {
		if strings.IndexByte(header, c) >= 0 {
			return c
		}
	}
	return ','
}

// nextLine returns the next line that is neither blank nor a comment.
func (t *table) nextLine() (string, error) {
	for t.in.Scan() {
		t.line++
		text := strings.TrimSuffix(t.in.Text(), "\r")
		if trimmed := strings.TrimSpace(text); trimmed != "" && trimmed != "\ufeff" && trimmed[0] != '#' {
			return text, nil
		}
	}
	if err := t.in.Err(); err != nil {
		return "", &RowError{Name: t.set.Name, Line: t.line + 1, Err: fmt.Errorf("line can't be read: %w", err)}
	}
	return "", io.EOF
}

// split appends the fields of a line to dst. Quotes around a field are taken off; a quoted
// field may hold the separator.
func (t *table) split(text string, dst []string) []string {
	for {
		text = strings.TrimLeft(text, " ")
		if strings.HasPrefix(text, `"`) {
			if end := strings.IndexByte(text[1:], '"'); end >= 0 {
				dst = append(dst, text[1:1+end])
				rest := strings.TrimLeft(text[end+2:], " ")
				if rest == "" {
					return dst
				}
				text = rest[1:] // the separator
				continue
			}
		}
		i := strings.IndexByte(text, t.comma)
		if i < 0 {
			return append(dst, strings.TrimRight(text, " "))
		}
		dst = append(dst, strings.TrimRight(text[:i], " "))
		text = text[i+1:]
	}
}

// next reads the next row into fields. A row of the wrong length is an error.
func (t *table) next() error {
	text, err := t.nextLine()
	if err != nil {
		return err
	}
	t.fields = t.split(text, t.fields[:0])
	if len(t.fields) != len(t.header) {
		return t.rowError("", fmt.Errorf("%d fields under %d columns", len(t.fields), len(t.header)))
	}
	return nil
}

func (t *table) rowError(column string, err error) *RowError {
	return &RowError{Name: t.set.Name, Line: t.line, Column: column, Err: err}
}

// missing reports whether the field stands for no value.
func (t *table) missing(column int) bool {
	return slices.Contains(t.set.Missing, t.fields[column])
}

// number parses a field.
func (t *table) number(column int) (float64, error) {
	text := t.fields[column]
	if t.comma != ',' && strings.Count(text, ",") == 1 && !strings.Contains(text, ".") {
		text = strings.Replace(text, ",", ".", 1)
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil {
		return 0, t.rowError(t.header[column], fmt.Errorf("%q is not a number", t.fields[column]))
	}
	return v, nil
}

// finite parses a field that must be there and finite.
func (t *table) finite(column int) (float64, error) {
	if t.missing(column) {
		return 0, t.rowError(t.header[column], errors.New("the value is missing"))
	}
	v, err := t.number(column)
	if err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
		err = t.rowError(t.header[column], fmt.Errorf("%q is not finite", t.fields[column]))
	}
	return v, err
}

// missingColumn is the error of a header without a column.
func (t *table) missingColumn(what string) error {
	return fmt.Errorf("%w: %s, line %d: no column %s among %q", ErrColumn, t.set.Name, t.line, what, t.header)
}
