package pyro_test

import (
	"encoding/csv"
	"os"
	"strconv"
	"testing"
)

// readCheckValues reads a table of numbers under one header line; it fails where
// there are fewer than atLeast rows.
func readCheckValues(t *testing.T, name string, atLeast int) [][]float64 {
	t.Helper()
	f, err := os.Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	records, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows [][]float64
	for _, record := range records[1:] {
		row := make([]float64, len(record))
		for i, field := range record {
			if row[i], err = strconv.ParseFloat(field, 64); err != nil {
				t.Fatalf("%s: %v", name, err)
			}
		}
		rows = append(rows, row)
	}
	if len(rows) < atLeast {
		t.Fatalf("%s: only %d rows of check values", name, len(rows))
	}
	return rows
}
