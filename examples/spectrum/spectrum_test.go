package main

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

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
		{"demo", "demo.txt", job{family: "grey", unit: "C"}, "", 0},
		{"demo, linear, JSON", "linear.json", job{family: "linear", unit: "K", json: true}, "", 0},
		{"arbitrary units without uncertainty; bad rows", "bad.txt", job{in: "-", family: "powerlaw", unit: "K"}, badTable, 3},
		{"the same as JSON", "bad.json", job{in: "-", family: "powerlaw", unit: "K", json: true}, badTable, 3},
	} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(c.stdin), &out, show.NewProgress(os.Stderr))
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.name, failed, err, c.failed)
		}
		if dir := os.Getenv("CANDENT_SHOW"); dir != "" {
			if err := os.WriteFile(filepath.Join(dir, c.golden), out.Bytes(), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(filepath.Join("testdata", c.golden))
		if err != nil {
			t.Error(err)
			continue
		}
		if d := cmp.Diff(string(want), out.String()); d != "" {
			t.Errorf("%s (-want +got):\n%s", c.name, d)
		}
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

func TestWrongFlagsAreExplained(t *testing.T) {
	for _, j := range []job{{family: "blue", unit: "K"}, {family: "grey", unit: "R"}, {family: "grey", unit: "K", plot: "x.pdf"}, {in: "no/such/file", family: "grey", unit: "K"}} {
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader(""), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%+v: no error", j)
		}
	}
}

func TestPictures(t *testing.T) {
	for _, ext := range []string{".png", ".svg"} {
		file := filepath.Join(t.TempDir(), "spectrum"+ext)
		var out bytes.Buffer
		if _, err := run(job{family: "linear", unit: "K", plot: file}, nil, &out, show.NewProgress(os.Stderr)); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if ext == ".svg" && !bytes.Contains(data, []byte("emissivity")) || len(data) < 5000 {
			t.Errorf("%s: %d bytes without the labels", file, len(data))
		}
	}
}
