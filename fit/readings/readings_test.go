package readings_test

import (
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"runtime"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"candent/fit/readings"
	"candent/pyro"
)

// all reads every spectrum as text, errors too.
func all(t *testing.T, table string, set readings.Settings) string {
	t.Helper()
	var b strings.Builder
	s, err := readings.NewSpectra(strings.NewReader(table), set)
	if err != nil {
		return "header: " + err.Error() + "\n"
	}
	for range 100 {
		x, err := s.Next()
		if errors.Is(err, io.EOF) {
			return b.String()
		}
		if err != nil {
			fmt.Fprintf(&b, "error: %v\n", err)
			continue
		}
		fmt.Fprintf(&b, "%q line %d relative %v missing %d:", x.ID, x.Line, x.Relative, x.Missing)
		for i, λ := range x.Wavelengths {
			fmt.Fprintf(&b, " %.4g nm %.6g", λ.Nanometres(), x.Signal[i])
			if len(x.Std) > 0 {
				fmt.Fprintf(&b, " ± %.3g", x.Std[i])
			}
		}
		b.WriteByte('\n')
	}
	t.Fatal("no end")
	return ""
}

func TestSpectra(t *testing.T) {
	for _, c := range []struct{ name, table, want string }{
		{"long, nm, std", "id,wavelength_nm,radiance_W_m2_sr_nm,std_radiance_W_m2_sr_nm,operator\na,700,2,0.1,x\na,650,1,0.1,x\nb,650,3,0.2,y\n",
			`"a" line 2 relative false missing 0: 650 nm 1e+09 ± 1e+08 700 nm 2e+09 ± 1e+08
"b" line 4 relative false missing 0: 650 nm 3e+09 ± 2e+08
`},
		{"no id, µm, per cent, BOM, CR LF, tabs, decimal comma", "\ufeffwavelength_um\tradiance_W_m2_sr_um\tstd_percent\r\n0,65\t1,5\t2\r\n# note\r\n0,9\t-2\t1\r\n",
			`"" line 2 relative false missing 0: 650 nm 1.5e+06 ± 3e+04 900 nm -2e+06 ± 2e+04
`},
		{"semicolons, missing values", "id;wavelength_nm;signal\n1;650;10\n1;700;-9999\n1;750;Bad\n1;800;\n1;850;12\n",
			`"1" line 2 relative true missing 3: 650 nm 10 850 nm 12
`},
		{"per metre", "wavelength_nm,radiance_W_m2_sr_m\n650,5\n", "\"\" line 2 relative false missing 0: 650 nm 5\n"},
		// L_λ = L_ν̃/λ²: at 2000 cm⁻¹, 1 per cm⁻¹ is 0.01 per m⁻¹ and 0.01/(5e-6)² = 4e8 per m.
		{"per wavenumber", "wavenumber_cm-1,radiance_W_m2_sr_cm-1,std_radiance_W_m2_sr_cm-1\n2000,1,0.5\n", "\"\" line 2 relative false missing 0: 5000 nm 4e+08 ± 2e+08\n"},
		{"wide", "id,signal@700nm,signal@0.65um,std_signal@700nm,std_signal@0.65um\nx,2,1,0.2,0.1\ny,4,3,0.2,0.1\n",
			`"x" line 2 relative true missing 0: 650 nm 1 ± 0.1 700 nm 2 ± 0.2
"y" line 3 relative true missing 0: 650 nm 3 ± 0.1 700 nm 4 ± 0.2
`},
		{"a bad number is its spectrum's error", "id,wavelength_nm,signal\na,650,1\na,700,x\nb,650,2\n",
			`error: readings: log.csv:3, column signal: "x" is not a number
"b" line 4 relative true missing 0: 650 nm 2
`},
		{"σ of 0", "id,wavelength_nm,signal,std_signal\na,650,1,0\nb,650,2,0.1\n",
			`error: readings: log.csv:2, column std_signal: standard uncertainty "0" of the reading 1: it must be positive; leave out a channel that says nothing
"b" line 3 relative true missing 0: 650 nm 2 ± 0.1
`},
		{"wavelength in the wrong unit", "wavelength_um,signal\n650000,1\n", "error: readings: log.csv:2, column wavelength_um: wavelength 650000 µm is outside 0.01 to 1000 µm; is the unit right?\n"},
		{"zero wavelength", "wavelength_nm,signal\n0,1\n", "error: readings: log.csv:2, column wavelength_nm: wavelength 0 µm is outside 0.01 to 1000 µm; is the unit right?\n"},
		{"short row", "id,wavelength_nm,signal\na,650\nb,650,2\n",
			"error: readings: log.csv:2: 2 fields under 3 columns\n\"b\" line 3 relative true missing 0: 650 nm 2\n"},
		{"nothing but missing", "id,wavelength_nm,signal\na,650,Bad\n", "error: readings: log.csv:2: no channel has a value\n"},
		{"no signal column", "wavelength_nm,power\n650,1\n", "header: readings: column: log.csv, line 1: no column radiance_W_m2_sr_nm, …_um, …_m, …_cm-1 or signal among [\"wavelength_nm\" \"power\"]\n"},
		{"no wavelength", "id,signal\na,1\n", "header: readings: column: log.csv, line 1: no column wavelength_nm, wavelength_um or wavenumber_cm-1, nor one such as signal@650nm among [\"id\" \"signal\"]\n"},
		{"twice", "id,id,signal\n", "header: readings: column: log.csv, line 1: column 2: \"id\" stands there twice\n"},
		{"empty", "", "header: readings: column: the table log.csv is empty\n"},
	} {
		if d := cmp.Diff(c.want, all(t, c.table, readings.Settings{Name: "log.csv"})); d != "" {
			t.Errorf("%s (-want +got):\n%s", c.name, d)
		}
	}
}

func TestMissingCodesCanBeSet(t *testing.T) {
	got := all(t, "wavelength_nm,signal\n650,99\n700,-9999\n", readings.Settings{Missing: []string{"99"}})
	if want := "\"\" line 2 relative true missing 1: 700 nm -9999\n"; got != want {
		t.Errorf("got %q, want %q", got, want)
	}
}

func TestTwoColour(t *testing.T) {
	for _, c := range []struct{ name, table, want string }{
		{"seconds, unit, std", "time_s,short_mV,long_mV,short_std_mV,long_std_mV,remark\n0,1.5,10,0.01,0.05,a\n0.5,x,10,0.01,0.05,b\n1,1.6,11,0.01,0.05,c\n",
			`in mV
0 s 1.5 10 ± 0.01 0.05
error: readings: line 3, column short_mV: "x" is not a number
1 s 1.6 11 ± 0.01 0.05
`},
		{"RFC 3339, semicolons, decimal comma", "time;short;long\n2026-03-01T12:00:00Z;1,5;10\nyesterday;1;2\n",
			`2026-03-01 12:00:00 +0000 UTC 1.5 10
error: readings: line 3, column time: "yesterday" is not a time of RFC 3339, such as 2026-03-01T12:00:00Z
`},
		{"label", "label,short,long\n\"heat 7, tap\",1,2\nheat 8,Bad,2\n", "heat 7, tap 1 2\nerror: readings: line 3, column short: the value is missing\n"},
		{"σ of 0", "short,long,short_std,long_std\n1,2,0,1\n", "error: readings: line 2, column short_std: standard uncertainty 0 must be positive\n"},
		{"units differ", "short_mV,long_V\n", "header: readings: column: , line 1: short is in \"_mV\" and long in \"_V\": they must be in one unit\n"},
		{"one std", "short,long,long_std\n", "header: readings: column: , line 1: one of short_std and long_std is missing\n"},
		{"no long", "short,lang\n", "header: readings: column: , line 1: no column long among [\"short\" \"lang\"]\n"},
	} {
		var b strings.Builder
		log, err := readings.NewTwoColour(strings.NewReader(c.table), readings.Settings{})
		if err != nil {
			fmt.Fprintf(&b, "header: %v\n", err)
		}
		if log != nil && log.Unit() != "" {
			fmt.Fprintf(&b, "in %s\n", log.Unit())
		}
		for log != nil {
			r, err := log.Next()
			if errors.Is(err, io.EOF) {
				break
			}
			if err != nil {
				fmt.Fprintf(&b, "error: %v\n", err)
				continue
			}
			switch {
			case r.HasTimeS:
				fmt.Fprintf(&b, "%g s", r.TimeS)
			case r.HasTime:
				fmt.Fprint(&b, r.Time)
			default:
				b.WriteString(r.Label)
			}
			fmt.Fprintf(&b, " %g %g", r.Short, r.Long)
			if r.HasStd {
				fmt.Fprintf(&b, " ± %g %g", r.ShortStd, r.LongStd)
			}
			b.WriteByte('\n')
		}
		if d := cmp.Diff(c.want, b.String()); d != "" {
			t.Errorf("%s (-want +got):\n%s", c.name, d)
		}
	}
}

// rows is a table of n rows, made as it is read.
type rows struct {
	header string
	row    func(i int) string
	n, i   int
	left   string
}

func (r *rows) Read(p []byte) (int, error) {
	if r.left == "" {
		switch {
		case r.i == 0:
			r.left = r.header
		case r.i > r.n:
			return 0, io.EOF
		default:
			r.left = r.row(r.i)
		}
		r.i++
	}
	n := copy(p, r.left)
	r.left = r.left[n:]
	return n, nil
}

func TestLongLogsNeedNoMemory(t *testing.T) {
	const n = 300_000
	spectra, err := readings.NewSpectra(&rows{header: "id,wavelength_nm,signal,std_percent\n", n: n,
		row: func(i int) string { return fmt.Sprintf("%d,%d,%d,1\n", i/100, 600+i%100, 1000+i%7) }}, readings.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	heap := func() uint64 {
		runtime.GC()
		var m runtime.MemStats
		runtime.ReadMemStats(&m)
		return m.HeapAlloc
	}
	count, channels := 0, 0
	var early uint64
	for {
		s, err := spectra.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		channels += len(s.Signal)
		if count++; count == 10 {
			early = heap()
		}
	}
	if channels != n {
		t.Fatalf("%d channels, not %d", channels, n)
	}
	const allowance = 256 << 10 // the runtime's own noise
	if late := heap(); late > early+allowance {
		t.Errorf("the heap grew from %d to %d bytes over %d spectra", early, late, count)
	}
	runtime.KeepAlive(spectra)
}

func TestNeighbourStd(t *testing.T) {
	// Grey spectra at 1500 K, 64 channels from 0.7 to 1.1 µm, 1 % of noise. The median of 62
	// values scatters by 11 %, 0.8 % for the mean over 200 spectra; neighbours share
	// channels, which adds to it. The spectrum's own curvature over three channels is 2e-4.
	rng := rand.New(rand.NewPCG(1, 9))
	λ := make([]pyro.Wavelength, 64)
	y, std := make([]float64, 64), make([]float64, 64)
	sum := 0.0
	const spectra = 200
	for range spectra {
		for i := range y {
			λ[i] = (0.7 + 0.4*pyro.Wavelength(i)/63) * pyro.Micrometre
			y[i] = 0.6 * pyro.Radiance(λ[i], 1500) * (1 + 0.01*rng.NormFloat64())
		}
		rel, err := readings.NeighbourStd(std, λ, y)
		if err != nil {
			t.Fatal(err)
		}
		sum += rel
		if std[5] != rel*y[5] {
			t.Fatalf("std %g of the reading %g at rel %g", std[5], y[5], rel)
		}
	}
	if mean := sum / spectra; math.Abs(mean/0.01-1) > 0.04 {
		t.Errorf("mean estimate %.5f, true 0.01", mean)
	}
	if _, err := readings.NeighbourStd(std[:7], λ[:7], y[:7]); !errors.Is(err, readings.ErrNoise) {
		t.Errorf("seven channels: %v", err)
	}
	y[9] = -1
	if _, err := readings.NeighbourStd(std, λ, y); !errors.Is(err, readings.ErrNoise) {
		t.Errorf("a negative reading: %v", err)
	}
}

func FuzzSpectra(f *testing.F) {
	f.Add("id,wavelength_nm,signal,std_percent\na,650,1,1\na,700,2,1\n")
	f.Add("\ufeffwavenumber_cm-1;radiance_W_m2_sr_cm-1\r\n2000;1,5\r\n")
	f.Add("signal@650nm,signal@700nm\n1,2\n\"")
	f.Fuzz(func(t *testing.T, table string) {
		s, err := readings.NewSpectra(strings.NewReader(table), readings.Settings{})
		if err != nil {
			return
		}
		for range strings.Count(table, "\n") + 2 {
			x, err := s.Next()
			if err != nil {
				continue
			}
			if len(x.Wavelengths) == 0 || len(x.Signal) != len(x.Wavelengths) || len(x.Std) > 0 && len(x.Std) != len(x.Signal) {
				t.Fatalf("lengths %d %d %d", len(x.Wavelengths), len(x.Signal), len(x.Std))
			}
			for i, λ := range x.Wavelengths {
				if !(λ > 0) || math.IsNaN(x.Signal[i]) || math.IsInf(x.Signal[i], 0) || i > 0 && λ < x.Wavelengths[i-1] {
					t.Fatalf("channel %d: %v %g", i, λ, x.Signal[i])
				}
				if len(x.Std) > 0 && !(x.Std[i] > 0) {
					t.Fatalf("channel %d: std %g", i, x.Std[i])
				}
			}
		}
		if _, err := s.Next(); !errors.Is(err, io.EOF) {
			t.Fatalf("behind the end: %v", err)
		}
	})
}

func FuzzTwoColour(f *testing.F) {
	f.Add("time_s,short,long,short_std,long_std\n0,1,2,0.1,0.1\n")
	f.Add("label;short_mV;long_mV\nx;1,5;2\n")
	f.Fuzz(func(t *testing.T, table string) {
		s, err := readings.NewTwoColour(strings.NewReader(table), readings.Settings{})
		if err != nil {
			return
		}
		for range strings.Count(table, "\n") + 2 {
			r, err := s.Next()
			if err != nil {
				continue
			}
			if math.IsNaN(r.Short) || math.IsInf(r.Long, 0) || r.HasStd && !(r.ShortStd > 0 && r.LongStd > 0) {
				t.Fatalf("%+v", r)
			}
		}
	})
}

func ExampleNewSpectra() {
	table := "id,wavelength_nm,radiance_W_m2_sr_um,std_percent\nA-1,700,2100,0.5\nA-1,900,9300,0.5\n"
	spectra, err := readings.NewSpectra(strings.NewReader(table), readings.Settings{})
	if err != nil {
		fmt.Println(err)
		return
	}
	for {
		s, err := spectra.Next()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			fmt.Println(err)
			continue
		}
		fmt.Println(s.ID, s.Wavelengths, s.Signal)
	}
	// Output: A-1 [0.7 µm 0.9 µm] [2.1e+09 9.3e+09]
}
