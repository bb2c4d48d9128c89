package main

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"candent/examples/internal/golden"
	"candent/examples/internal/show"
)

// files writes tables to a directory and returns their names, as a person would give them.
func files(t *testing.T, texts map[string]string) string {
	t.Helper()
	dir := t.TempDir()
	for name, text := range texts {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	return dir
}

const certificate = `label;reference_C;indicated_C;U_K;k;emissivity_setting
1;800;801,2;2,0;2;1
2;1000;1002,1;2,2;2;1
3;1200;1203,3;2,6;2;1
4;1400;1404,6;3,2;2;1
`

const indications = `label,indicated_C
charge,902
soak,1251
soak,
tap,1453
end,12510
`

const twoPoints = `label,temperature_K,signal
Al,933.47,1.768
Cu,1357.8,318.9
`

// TestOutput compares what the program writes with files that were read by a person.
func TestOutput(t *testing.T) {
	dir := files(t, map[string]string{"certificate.csv": certificate, "indications.csv": indications, "two.csv": twoPoints})
	in := func(name string) string { return filepath.Join(dir, name) }
	for _, c := range []struct {
		name, golden string
		job          job
		failed       int
	}{
		{"demo", "demo.txt", job{unit: "C"}, 0},
		{"demo, JSON", "demo.json", job{unit: "K", json: true}, 0},
		{"demo, gain only", "gain.txt", job{unit: "K", band: "850-950", gainOnly: true}, 0},
		{"certificate, bad rows in the log", "certificate.txt", job{in: in("certificate.csv"), log: in("indications.csv"), band: "900-1100", unit: "C"}, 2},
		{"the same as JSON", "certificate.json", job{in: in("certificate.csv"), log: in("indications.csv"), band: "900-1100", unit: "C", json: true}, 2},
		{"two points without uncertainty", "two.txt", job{in: in("two.csv"), band: "850-950", unit: "K"}, 0},
	} {
		var out bytes.Buffer
		failed, err := run(c.job, nil, &out, show.NewProgress(os.Stderr))
		if err != nil || failed != c.failed {
			t.Errorf("%s: %d failed, error %v; want %d", c.name, failed, err, c.failed)
		}
		got := strings.ReplaceAll(out.String(), dir+string(filepath.Separator), "")
		golden.Check(t, c.name, c.golden, []byte(got))
		for _, line := range strings.Split(strings.TrimSpace(got), "\n") {
			if c.job.json && !json.Valid([]byte(line)) {
				t.Errorf("%s: not JSON: %s", c.name, line)
			}
		}
	}
}

// TestBadTables: what can't be calibrated with says where it stands.
func TestBadTables(t *testing.T) {
	for name, c := range map[string]struct{ in, says string }{
		"a hole":            {"label,temperature_C,signal_mV\na,700,1\nb,800,\nc,900,20\n", ":3, column signal_mV: the value is missing"},
		"a word":            {"label,temperature_C,signal_mV\na,700,1\nb,hot,4\nc,900,20\n", ":3, column temperature_C"},
		"not rising":        {"label,temperature_C,signal_mV\na,700,1\nb,800,4\nc,900,3\n", ":4: "},
		"dark":              {"# dark not subtracted\ntemperature_C,signal_mV\n700,-1\n800,4\n900,30\n", ":3: signal -1"},
		"some have u":       {"temperature_C,temperature_std_K,signal\n700,0,1\n800,1,4\n900,1,15\n", ":2: it has no uncertainty"},
		"too few":           {"temperature_C,signal_mV\n700,1\n800,4\n", "band"},
		"no unit":           {"temperature,signal_mV\n700,1\n", "temperature_C"},
		"u in °C":           {"temperature_C,temperature_std_C,signal\n700,1,1\n", "temperature_std_K"},
		"two units":         {"temperature_C,signal_mV,signal_std_V\n700,1,1\n", "one unit"},
		"certificate alone": {certificate, "-band-nm"},
		"nothing":           {"", "empty"},
	} {
		var out bytes.Buffer
		_, err := run(job{in: "-", unit: "K"}, strings.NewReader(c.in), &out, show.NewProgress(os.Stderr))
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("%s: %v; want it to say %q", name, err, c.says)
		}
	}
	for name, c := range map[string]struct{ old, new, says string }{
		"no k":          {";2;1\n2", ";0;1\n2", ":2: coverage factor 0"},
		"U missing":     {"1203,3;2,6", "1203,3;", ":4, column U_K"},
		"units mixed":   {"1404,6", "2560", ":5: "},
		"setting in %":  {"3,2;2;1", "3,2;2;95", ":5: "},
		"U in per cent": {"U_K", "U_percent", "U_K"},
	} {
		var out bytes.Buffer
		_, err := run(job{in: "-", band: "900-1100", unit: "K"}, strings.NewReader(strings.Replace(certificate, c.old, c.new, 1)), &out, show.NewProgress(os.Stderr))
		if err == nil || !strings.Contains(err.Error(), c.says) {
			t.Errorf("certificate, %s: %v; want it to say %q", name, err, c.says)
		}
	}
}

func TestWrongFlagsAreExplained(t *testing.T) {
	dir := files(t, map[string]string{"log.csv": "label,signal_V\na,1\n", "points.csv": "temperature_C,signal_mV\n700,1\n800,4\n900,15\n"})
	points := filepath.Join(dir, "points.csv")
	for _, j := range []job{
		{unit: "X"}, {unit: "K", log: points}, {unit: "K", band: "red"}, {unit: "K", gainOnly: true},
		{unit: "K", in: "no/such/file"}, {unit: "K", plot: "x.gif"}, {unit: "K", in: "-", log: "-"},
		{unit: "K", in: points, log: filepath.Join(dir, "log.csv")}, // another unit
	} {
		var out bytes.Buffer
		if _, err := run(j, strings.NewReader("temperature_C,signal_mV\n700,1\n800,4\n900,15\n"), &out, show.NewProgress(os.Stderr)); err == nil {
			t.Errorf("%+v: no error", j)
		}
	}
}

func TestPictures(t *testing.T) {
	for _, ext := range []string{".png", ".svg"} {
		file := filepath.Join(t.TempDir(), "curve"+ext)
		var out bytes.Buffer
		if _, err := run(job{unit: "C", plot: file}, nil, &out, show.NewProgress(os.Stderr)); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if ext == ".svg" && !bytes.Contains(data, []byte("departure / K")) || len(data) < 5000 {
			t.Errorf("%s: %d bytes without the labels", file, len(data))
		}
	}
}
