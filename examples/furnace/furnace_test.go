package main

import (
	"bytes"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"candent/examples/internal/golden"
)

func demoJob() job {
	return job{band: "1550-1650", ε: 0.80, εStd: 0.04, gain: 2.5e-8, gainRel: 0.008, window: 0.91, windowStd: 0.02, wallStd: 12, noise: 0.003, unit: "C"}
}

const badTable = `label,signal,wall_K
a,250,1400
b,250,25
c,Bad,1400
d,2,1700
e,-1,1400
`

// TestOutput compares what the program writes with files that were read by a person.
func TestOutput(t *testing.T) {
	js, bad := demoJob(), demoJob()
	js.json = true
	bad.in, bad.unit, bad.εStd = "-", "K", 0.004
	for _, c := range []struct {
		golden string
		job    job
		failed int
	}{{"demo.txt", demoJob(), 0}, {"demo.json", js, 0}, {"bad.txt", bad, 4}} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(badTable), &out)
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.golden, failed, err, c.failed)
		}
		golden.Check(t, c.golden, c.golden, out.Bytes())
	}
}

func TestWrongFlagsAreExplained(t *testing.T) {
	for name, change := range map[string]func(*job){
		"unit": func(j *job) { j.unit = "X" }, "band": func(j *job) { j.band = "red" }, "window in per cent": func(j *job) { j.window = 91 },
		"gain of 0": func(j *job) { j.gain = 0 }, "picture": func(j *job) { j.plot = "x.gif" }, "no noise": func(j *job) { j.noise = 0 },
		"no such file": func(j *job) { j.in = "no such file" },
	} {
		j := demoJob()
		change(&j)
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader(""), &out); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}

func TestPicture(t *testing.T) {
	j := demoJob()
	j.plot = filepath.Join(t.TempDir(), "load.svg")
	var out bytes.Buffer
	if _, err := run(j, nil, &out); err != nil {
		t.Fatal(err)
	}
	data, err := os.ReadFile(j.plot)
	if err != nil || !bytes.Contains(data, []byte("walls ignored")) {
		t.Errorf("%d bytes, %v", len(data), err)
	}
}
