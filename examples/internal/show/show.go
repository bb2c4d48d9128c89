// Package show holds what the example programs share: units, input, progress.
package show

import (
	"fmt"
	"io"
	"os"
	"strings"

	"candent/pyro"
)

// Unit is a temperature scale to print in. Uncertainties stay in kelvin.
type Unit string

// ParseUnit accepts K, C and F.
func ParseUnit(s string) (Unit, error) {
	switch s {
	case "K", "C", "F":
		return Unit(s), nil
	}
	return "", fmt.Errorf("-unit %s: K, C or F", s)
}

// In converts a temperature.
func (u Unit) In(t pyro.Temperature) float64 {
	switch u {
	case "C":
		return t.Celsius()
	case "F":
		return t.Fahrenheit()
	}
	return t.Kelvin()
}

// String returns the unit as it is printed.
func (u Unit) String() string {
	if u == "K" {
		return "K"
	}
	return "°" + string(u)
}

// Open opens the input: the demo where name is empty, standard input where it is "-".
func Open(name, demo string, stdin io.Reader) (in io.ReadCloser, label string, err error) {
	switch name {
	case "":
		return io.NopCloser(strings.NewReader(demo)), "demo.csv", nil
	case "-":
		return io.NopCloser(stdin), "standard input", nil
	}
	f, err := os.Open(name)
	return f, name, err
}

// Progress writes a line to a terminal now and then, and nothing to anything else.
type Progress struct {
	w        *os.File
	terminal bool
	shown    bool
}

// NewProgress reports on w, usually os.Stderr.
func NewProgress(w *os.File) *Progress {
	info, err := w.Stat()
	return &Progress{w: w, terminal: err == nil && info.Mode()&os.ModeCharDevice != 0}
}

// Step is told the count so far.
func (p *Progress) Step(count int) {
	if p.terminal && count%20000 == 0 {
		p.shown = true
		fmt.Fprintf(p.w, "\r%d rows", count)
	}
}

// Done clears the line.
func (p *Progress) Done() {
	if p.shown {
		fmt.Fprint(p.w, "\r                    \r")
	}
}
