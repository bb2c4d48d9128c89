// Package golden compares what the example programs write with files that were read by a
// person.
package golden

import (
	"os"
	"path/filepath"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// Check compares got with testdata/file. With CANDENT_SHOW=DIR it also writes got to DIR, to be
// read and then copied by hand: nothing rewrites testdata.
func Check(t *testing.T, name, file string, got []byte) {
	t.Helper()
	if dir := os.Getenv("CANDENT_SHOW"); dir != "" {
		if err := os.WriteFile(filepath.Join(dir, file), got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(filepath.Join("testdata", file))
	if err != nil {
		t.Error(err)
		return
	}
	if d := cmp.Diff(string(want), string(got)); d != "" {
		t.Errorf("%s (-want +got):\n%s", name, d)
	}
}
