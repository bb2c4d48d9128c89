package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/examples/internal/golden"
	"candent/examples/internal/show"
)

// TestOutput compares what the program writes with files that were read by a person.
func TestOutput(t *testing.T) {
	for _, c := range []struct {
		name, golden string
		job          job
		stdin        string
		failed       int
	}{
		{"demo", "demo.txt", job{surface: "grey", unit: "C"}, "", 0},
		{"demo, linear, JSON", "linear.json", job{surface: "linear", unit: "K", json: true}, "", 0},
		{"arbitrary units without uncertainty; bad rows", "bad.txt", job{in: "-", surface: "powerlaw", unit: "K"}, badTable, 3},
		{"the same as JSON", "bad.json", job{in: "-", surface: "powerlaw", unit: "K", json: true}, badTable, 3},
		{"demo, a surface that nobody characterised", "unknown.txt", job{surface: "unknown", unit: "C"}, "", 0},
		{"demo, of any kind, as JSON", "any.json", job{surface: "any", unit: "K", json: true}, "", 0},
		{"demo, several surfaces", "compare.txt", job{surface: "linear", unit: "K", compare: true}, "", 0},
		{"the same as JSON", "compare.json", job{surface: "linear", unit: "K", compare: true, json: true}, "", 0},
		{"too few bands for it", "few.txt", job{in: "-", surface: "unknown", unit: "K"}, fewBands, 2},
		{"taken all the same, as JSON", "accepted.json", job{in: "-", surface: "unknown", unit: "K", json: true, acceptWide: true}, fewBands, 0},
		{"few bands of a named kind", "carbon.txt", job{in: "-", surface: "carbon", unit: "K"}, fewBands, 0},
		{"a process in arbitrary units without uncertainty", "relative.txt", job{in: "-", surface: "oxide", unit: "K"}, badTable, 4},
	} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(c.stdin), &out, show.NewProgress(os.Stderr))
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.name, failed, err, c.failed)
		}
		golden.Check(t, c.name, c.golden, out.Bytes())
		for _, line := range strings.Split(strings.TrimSpace(out.String()), "\n") {
			if c.job.json && !json.Valid([]byte(line)) {
				t.Errorf("%s: not JSON: %s", c.name, line)
			}
		}
	}
}

// badTable holds one spectrum that can be estimated, in arbitrary units, and three that can't.
const badTable = `id;wavelength_nm;signal
good;700;1047
good;750;1979
good;800;3379
good;850;5308
good;900;7832
good;950;10926
good;1000;14661
zero;700;0
zero;750;0
zero;800;0
broken;700;12
broken;750;twelve
broken;800;14
far;70000000;1
`

// fewBands are two spectra of too few bands for a surface that nobody named, and one of three.
const fewBands = `id,wavelength_nm,radiance_W_m2_sr_um,std_percent
one,900,5000,0.5
two,900,5000,0.5
two,1050,9000,0.5
three,900,5000,0.5
three,1050,9000,0.5
three,1200,13000,0.5
`

func TestSurfacesOfTheOption(t *testing.T) {
	for _, name := range strings.Split(strings.ReplaceAll(show.SurfaceNames(), " or ", ", "), ", ") {
		s, err := show.Surface(name)
		if err != nil || s.Err() != nil {
			t.Errorf("%s: %v", name, errors.Join(err, s.Err()))
		}
	}
	for _, k := range emissivity.Kinds() { // as a refusal lists them
		if s, err := show.Surface(k.Name); err != nil || k.Name != "metal" && s.String() != k.Process.String() {
			t.Errorf("%s: %v, %v", k.Name, s, err)
		}
	}
}

func TestWrongFlagsAreExplained(t *testing.T) {
	for _, j := range []job{{surface: "blue", unit: "K"}, {surface: "grey", unit: "R"}, {surface: "grey", unit: "K", plot: "x.pdf"}, {in: "no/such/file", surface: "grey", unit: "K"}} {
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader(""), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%+v: no error", j)
		}
	}
}

func TestPictures(t *testing.T) {
	const chi, density = "all else eliminated", "posterior of the temperature"
	for _, c := range []struct {
		job      job
		file     string
		has, not string
	}{
		{job{surface: "linear"}, "linear.png", "", ""},
		{job{surface: "linear"}, "linear.svg", chi, density},
		{job{surface: "unknown"}, "unknown.svg", density, chi},
		{job{surface: "any", in: "-", acceptWide: true}, "one.svg", "assumed beforehand", chi},
		{job{surface: "oxide"}, "oxide.png", "", ""},
	} {
		c.job.plot, c.job.unit = filepath.Join(t.TempDir(), c.file), "K"
		var out bytes.Buffer
		if _, err := run(c.job, strings.NewReader(fewBands), &out, show.NewProgress(os.Stderr)); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(c.job.plot)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Contains(data, []byte(c.has)) || c.not != "" && bytes.Contains(data, []byte(c.not)) || len(data) < 5000 {
			t.Errorf("%s: %d bytes without the labels", c.file, len(data))
		}
	}
}
