package pyro_test

import (
	"go/parser"
	"go/token"
	"os"
	"strings"
	"testing"
)

// pyro is the lowest floor of the house: it stands on the standard library alone,
// whose import paths have no dot in their first element.
func TestImportsStandardLibraryOnly(t *testing.T) {
	entries, err := os.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	read := 0
	for _, e := range entries {
		if !strings.HasSuffix(e.Name(), ".go") || strings.HasSuffix(e.Name(), "_test.go") {
			continue
		}
		f, err := parser.ParseFile(token.NewFileSet(), e.Name(), nil, parser.ImportsOnly)
		if err != nil {
			t.Fatal(err)
		}
		read++
		for _, i := range f.Imports {
			first, _, _ := strings.Cut(strings.Trim(i.Path.Value, `"`), "/")
			if first == "candent" || strings.Contains(first, ".") {
				t.Errorf("%s imports %s", e.Name(), i.Path.Value)
			}
		}
	}
	if read == 0 {
		t.Fatal("no source files found")
	}
}
