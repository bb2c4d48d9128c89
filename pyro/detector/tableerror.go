package detector

import "fmt"

// TableError is the error of one point of a table. It wraps the sentinel of what the table
// describes.
type TableError struct {
	Index  int // from 0
	X, Y   float64
	Reason string
	of     error
}

func (e *TableError) Error() string {
	return fmt.Sprintf("%v: point %d (%g, %g): %s", e.of, e.Index, e.X, e.Y, e.Reason)
}

// Unwrap returns the sentinel.
func (e *TableError) Unwrap() error { return e.of }
