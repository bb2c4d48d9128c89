package main

import (
	"bytes"
	"candent/examples/internal/golden"
	"encoding/json"
	"strings"
	"testing"
)

func demoJob() job {
	return job{surface: "unknown", scale: 1, add: "1600,2200", contact: 3, emissivity: 5}
}

// oneBand is a single reading, which tells no temperature by itself, and a row that is none.
const oneBand = `id,wavelength_nm,radiance_W_m2_sr_um,std_percent
port-1,900,1400,0.5
port-2,900,Bad,0.5
port-3,900,nothing,0.5
`

// TestOutput compares what the program writes with files that were read by a person.
func TestOutput(t *testing.T) {
	js, grey, wide := demoJob(), demoJob(), demoJob()
	js.json, js.surface, js.add = true, "metal", "1550-1650"
	grey.in, grey.surface, grey.add = "-", "grey", "1600"
	wide.in = "-"
	for _, c := range []struct {
		golden string
		job    job
		failed int
	}{{"demo.txt", demoJob(), 0}, {"metal.json", js, 0}, {"oneband.txt", grey, 2}, {"refused.txt", wide, 3}} {
		var out bytes.Buffer
		failed, err := run(c.job, strings.NewReader(oneBand), &out)
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.golden, failed, err, c.failed)
		}
		golden.Check(t, c.golden, c.golden, out.Bytes())
		for _, line := range strings.Split(strings.TrimSpace(out.String()), "\n") {
			if c.job.json && !json.Valid([]byte(line)) {
				t.Errorf("%s: not JSON: %s", c.golden, line)
			}
		}
	}
}

// TestAcceptWide: the flag is what a refusal names.
func TestAcceptWide(t *testing.T) {
	j := demoJob()
	j.in, j.acceptWide = "-", true
	var out bytes.Buffer
	if failed, err := run(j, strings.NewReader(oneBand), &out); err != nil || failed != 2 || !strings.Contains(out.String(), "ε between 0.19 and 0.96 assumed") {
		t.Errorf("%d failed, %v:\n%s", failed, err, out.String())
	}
}

func TestWrongFlagsAreExplained(t *testing.T) {
	for name, change := range map[string]func(*job){
		"surface": func(j *job) { j.surface = "blue" }, "band": func(j *job) { j.add = "red" }, "contact reading": func(j *job) { j.contact = 0 },
		"emissivity": func(j *job) { j.emissivity = -1 }, "scale": func(j *job) { j.scale = 100 }, "no such file": func(j *job) { j.in = "no such file" },
	} {
		j := demoJob()
		change(&j)
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader(""), &out); err == nil {
			t.Errorf("%s: no error", name)
		}
	}
}
