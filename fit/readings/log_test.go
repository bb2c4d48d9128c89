package readings_test

import (
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"candent/fit/readings"
)

func TestLog(t *testing.T) {
	const text = "# invented\nlabel;reference_C;reference_std_K;indicated_F;signal_mV\na;1000;0,5;1832;2,5\nb;Bad;0,5;1832;2\nc;1000;x;1832;Inf\nd;1000;0,5\ne;900;0,25;32;3\n"
	log, err := readings.NewLog(strings.NewReader(text), readings.Settings{Name: "log.csv"})
	if err != nil {
		t.Fatal(err)
	}
	ref, err := log.RequireTemperature("reference")
	if err != nil || ref.Unit != "C" || ref.Name != "reference_C" {
		t.Fatal(ref, err)
	}
	std, shown, signal, none := log.Column("reference_std"), log.Column("indicated"), log.Column("signal"), log.Column("emissivity_setting")
	if std.Unit != "K" || shown.Unit != "F" || signal.Unit != "mV" || none.Found {
		t.Errorf("%+v %+v %+v %+v", std, shown, signal, none)
	}
	row, err := log.Next()
	if err != nil {
		t.Fatal(err)
	}
	T, err := row.Temperature(ref)
	F, err2 := row.Temperature(shown)
	u, err3 := row.Number(std)
	ε, err4 := row.Optional(none, 0.9)
	if errors.Join(err, err2, err3, err4) != nil || math.Abs(float64(T)-1273.15) > 1e-9 || math.Abs(float64(F)-1273.15) > 1e-9 || u != 0.5 || ε != 0.9 || row.Label != "a" || row.Text(signal) != "2,5" {
		t.Errorf("%v %v %g %g %+v", T, F, u, ε, row)
	}
	// A missing reference, a word, an infinite signal: each names line, column and label.
	var bad *readings.RowError
	if row, err = log.Next(); err != nil {
		t.Fatal(err)
	}
	if _, err := row.Temperature(ref); !errors.As(err, &bad) || bad.Line != 4 || bad.Column != "reference_C" || bad.ID != "b" {
		t.Errorf("missing: %v", err)
	}
	if row, err = log.Next(); err != nil {
		t.Fatal(err)
	}
	if _, err := row.Number(std); !errors.As(err, &bad) || bad.Column != "reference_std_K" || bad.ID != "c" {
		t.Errorf("a word: %v", err)
	}
	if _, err := row.Number(signal); !errors.As(err, &bad) || bad.Column != "signal_mV" {
		t.Errorf("infinite: %v", err)
	}
	if err := row.Error(ref, errors.New("no")); !errors.As(err, &bad) || bad.Line != 5 || bad.ID != "c" {
		t.Errorf("its own: %v", err)
	}
	if _, err = log.Next(); !errors.As(err, &bad) || bad.Line != 6 {
		t.Errorf("short row: %v", err)
	}
	if row, err = log.Next(); err != nil || row.Label != "e" {
		t.Errorf("after the short row: %+v, %v", row, err)
	}
	for range 2 {
		if _, err = log.Next(); !errors.Is(err, io.EOF) {
			t.Errorf("end: %v", err)
		}
	}
	for name, header := range map[string]string{"no unit": "label,reference\n", "another unit": "label,reference_mV\n", "no column": "label,signal\n"} {
		log, err := readings.NewLog(strings.NewReader(header), readings.Settings{})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := log.RequireTemperature("reference"); !errors.Is(err, readings.ErrColumn) {
			t.Errorf("%s: %v", name, err)
		}
	}
	times, err := readings.NewLog(strings.NewReader("time_s,current_mA\n5,12\nlate,12\n"), readings.Settings{})
	if err != nil {
		t.Fatal(err)
	}
	if row, err := times.Next(); err != nil || !row.HasTimeS || row.TimeS != 5 {
		t.Errorf("%+v, %v", row, err)
	}
	if _, err := times.Next(); !errors.As(err, &bad) || bad.Column != "time_s" {
		t.Errorf("no time: %v", err)
	}
}

// FuzzLog: a row is read or its error names the table; reading ends.
func FuzzLog(f *testing.F) {
	f.Add("label,temperature_C,signal_mV\na,700,1\nb,,2\n")
	f.Add("time_s;current_mA\n1;12,5\n2;NaN\n")
	f.Add("\ufefftime\ttemperature_K\r\nx\t\"9\"\r\n#\n1\n")
	f.Fuzz(func(t *testing.T, text string) {
		log, err := readings.NewLog(strings.NewReader(text), readings.Settings{Name: "fuzz"})
		if err != nil {
			return
		}
		c, signal := log.Column("temperature"), log.Column("signal")
		for range strings.Count(text, "\n") + 2 {
			row, err := log.Next()
			if errors.Is(err, io.EOF) {
				return
			}
			var bad *readings.RowError
			if err != nil {
				if !errors.As(err, &bad) {
					t.Fatalf("%v", err)
				}
				continue
			}
			if c.Found {
				if T, err := row.Temperature(c); err != nil && !errors.As(err, &bad) || err == nil && math.IsNaN(float64(T)) {
					t.Fatalf("%v, %v", T, err)
				}
			}
			if v, err := row.Optional(signal, 1); err == nil && (math.IsNaN(v) || math.IsInf(v, 0)) {
				t.Fatalf("%g", v)
			}
		}
		t.Fatal("it does not end")
	})
}
