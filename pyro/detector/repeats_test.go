package detector_test

import (
	"math"
	"slices"
	"testing"

	"candent/pyro/detector"
)

func TestRuns(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		name   string
		values []float64
		n      int
		want   []detector.Run
	}{
		{"none", []float64{1, 2, 1, 2}, 2, nil},
		{"empty", nil, 2, nil},
		{"begin, middle, end", []float64{5, 5, 1, 2, 2, 2, 3, 4, 4}, 2, []detector.Run{{0, 2, 5}, {3, 3, 2}, {7, 2, 4}}},
		{"too short", []float64{5, 5, 1, 2, 2, 2, 3, 4, 4}, 3, []detector.Run{{3, 3, 2}}},
		{"all", []float64{0, 0, 0, 0}, 4, []detector.Run{{0, 4, 0}}},
		{"NaN is no value", []float64{nan, nan, nan, 1, nan, 1}, 2, nil},
		{"n below 2 is 2", []float64{1, 2, 2}, 0, []detector.Run{{1, 2, 2}}},
	} {
		if got := detector.Runs(c.values, c.n); !slices.Equal(got, c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}
