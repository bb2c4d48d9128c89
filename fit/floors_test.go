package fit_test

import (
	"go/parser"
	"go/token"
	"io/fs"
	"path/filepath"
	"strings"
	"testing"
)

// floors of the house; imports run downwards only. The longest matching prefix counts.
var floors = map[string]int{
	"candent/examples":            4,
	"candent/fit/readings":        3,
	"candent/fit":                 2,
	"candent/fit/internal":        1,
	"candent/emissivity":          1,
	"candent/emissivity/handbook": 1,
	"candent/pyro/detector":       1,
	"candent/pyro/its90":          1,
	"candent/pyro/sightline":      1,
	"candent/pyro":                0,
}

func floorOf(path string) int {
	best, floor := "", -1
	for prefix, f := range floors {
		if (path == prefix || strings.HasPrefix(path, prefix+"/")) && len(prefix) > len(best) {
			best, floor = prefix, f
		}
	}
	return floor
}

func TestImportsRunDownwards(t *testing.T) {
	files := 0
	err := filepath.WalkDir("..", func(name string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || !strings.HasSuffix(name, ".go") || strings.HasSuffix(name, "_test.go") {
			return err
		}
		f, err := parser.ParseFile(token.NewFileSet(), name, nil, parser.ImportsOnly)
		if err != nil {
			return err
		}
		files++
		rel, err := filepath.Rel("..", filepath.Dir(name))
		if err != nil {
			return err
		}
		from := "candent/" + filepath.ToSlash(rel)
		floor := floorOf(from)
		if floor < 0 {
			t.Errorf("%s stands on no floor", from)
		}
		for _, i := range f.Imports {
			path := strings.Trim(i.Path.Value, `"`)
			same := path == from || strings.HasPrefix(path, "candent/examples/internal/")
			// a package may take the types of the one that it lives in, on the same floor
			same = same || strings.HasPrefix(from, path+"/") && floorOf(path) == floor
			if to := floorOf(path); to >= 0 && to >= floor && !same {
				t.Errorf("%s (floor %d) imports %s (floor %d)", name, floor, path, to)
			}
			if floor < 2 && !strings.Contains(from, "/internal/") && from != "candent/emissivity/cavity" && strings.Contains(path, ".") {
				t.Errorf("%s: %s needs the standard library alone, and imports %s", name, from, path)
			}
			if strings.HasPrefix(path, "gonum.org/v1/plot") && floor != 4 {
				t.Errorf("%s imports %s: pictures belong under examples", name, path)
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if files < 30 {
		t.Fatalf("only %d files found", files)
	}
}
