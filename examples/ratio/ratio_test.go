package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

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
		{"demo", "demo.txt", job{ratio: 0.985, ratioStd: 0.01, unit: "C"}, "", 0},
		{"demo, exact ratio, JSON", "exact.json", job{ratio: 0.985, unit: "K", json: true}, "", 0},
		{"bad rows", "bad.txt", job{in: "-", short: "700-800", long: "850-950", ratio: 1, unit: "K"}, badTable, 3},
		{"bad rows, JSON", "bad.json", job{in: "-", short: "700-800", long: "850-950", ratio: 1, unit: "K", json: true}, badTable, 3},
	} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(c.stdin), &out, show.NewProgress(os.Stderr))
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.name, failed, err, c.failed)
		}
		golden.Check(t, c.name, c.golden, out.Bytes())
	}
}

const badTable = `label,short_mV,long_mV
tap 1,1.0,8.0
tap 2,Bad,8.0
tap 3,20,1.0
tap 4,-0.1,2.0
`

func TestWrongFlagsAreExplained(t *testing.T) {
	for _, j := range []job{
		{ratio: 1, unit: "X"}, {ratio: 0, unit: "K"}, {ratio: 1, unit: "K", short: "900", long: "750"},
		{ratio: 1, unit: "K", short: "red", long: "900"}, {ratio: 1, unit: "K", short: "750"}, {ratio: 1, unit: "K", short: "0.75", long: "0.9"},
		{ratio: 1, unit: "K", plot: "x.gif"},
	} {
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader(""), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%+v: no error", j)
		}
	}
}

func TestPictures(t *testing.T) {
	for _, ext := range []string{".png", ".svg"} {
		file := filepath.Join(t.TempDir(), "log"+ext)
		var out bytes.Buffer
		if _, err := run(job{ratio: 1, unit: "C", plot: file}, nil, &out, show.NewProgress(os.Stderr)); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if ext == ".svg" && !bytes.Contains(data, []byte("time / s")) || len(data) < 5000 {
			t.Errorf("%s: %d bytes without the labels", file, len(data))
		}
	}
}
