package detector

// Run is a stretch of a log that holds one value.
type Run struct {
	Start, Length int
	Value         float64
}

// Runs returns the stretches of at least n identical values, n ≥ 2: a held output, a lost
// connection, a sensor at the end of its range, or a resolution coarser than what changes.
// NaN is identical to nothing.
func Runs(values []float64, n int) []Run {
	var runs []Run
	var r Repeats
	for i, v := range values {
		switch length := r.Next(v); {
		case length < max(n, 2):
		case length == max(n, 2):
			runs = append(runs, Run{Start: i - length + 1, Length: length, Value: v})
		default:
			runs[len(runs)-1].Length = length
		}
	}
	return runs
}

// Repeats counts identical values one by one, for logs that don't fit the memory. The zero
// value is ready.
type Repeats struct {
	last   float64
	length int
}

// Next takes the next value and returns how many in a row, this one included, are equal.
func (r *Repeats) Next(v float64) int {
	if v != r.last || r.length == 0 {
		r.last, r.length = v, 0
	}
	r.length++
	return r.length
}
