package handbook

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// aliases are other names, in lower case.
var aliases = map[string]string{
	"al": "aluminium", "aluminum": "aluminium", "be": "beryllium", "cr": "chromium", "co": "cobalt", "cu": "copper", "er": "erbium",
	"au": "gold", "in": "indium", "ir": "iridium", "fe": "iron", "pb": "lead", "mn": "manganese", "hg": "mercury", "mo": "molybdenum",
	"ni": "nickel", "nb": "niobium", "columbium": "niobium", "pd": "palladium", "pt": "platinum", "rh": "rhodium", "si": "silicon",
	"ag": "silver", "ta": "tantalum", "th": "thorium", "sn": "tin", "ti": "titanium", "w": "tungsten", "wolfram": "tungsten",
	"u": "uranium", "v": "vanadium", "y": "yttrium", "zn": "zinc", "zr": "zirconium", "c": "carbon",
	"al2o3": "alumina", "corundum": "alumina", "sapphire": "alumina", "beo": "beryllia", "ceo2": "ceria", "mgo": "magnesia",
	"sio2": "silica", "fused silica": "silica", "quartz": "silica", "tho2": "thoria", "tio2": "titania", "y2o3": "yttria", "zro2": "zirconia",
	"cr2o3": "chromium oxide", "co3o4": "cobalt oxide", "cuo": "copper oxide", "cu2o": "copper oxide", "fe2o3": "hematite", "fe3o4": "magnetite",
	"nio": "nickel oxide", "v2o3": "vanadium oxide", "u3o8": "uranium oxide", "sic": "silicon carbide", "si3n4": "silicon nitride", "b4c": "boron carbide",
	"aluminium oxide": "alumina", "aluminum oxide": "alumina", "beryllium oxide": "beryllia", "cerium oxide": "ceria", "magnesium oxide": "magnesia",
	"silicon dioxide": "silica", "thorium oxide": "thoria", "titanium dioxide": "titania", "titanium oxide": "titania", "yttrium oxide": "yttria", "zirconium oxide": "zirconia",
	"tic": "titanium carbide", "vc": "vanadium carbide", "stainless": "stainless steel", "glass": "soda-lime glass", "soot": "carbon",
}

// UnknownError is a name that the tables haven't.
type UnknownError struct {
	Name string
	Near []string // names like it, nearest first
	// Other is true where the other kind of value exists under that name: total
	// where spectral was asked for, and the reverse.
	Other bool
	kind  string
}

func (e *UnknownError) Error() string {
	text := fmt.Sprintf("handbook: no %s emissivity of %q", e.kind, e.Name)
	if e.Other {
		if e.kind == "spectral" {
			text += ": only total ones are known, see TotalOf; they are not those of a band"
		} else {
			text += ": only spectral ones are known, see SpectralOf"
		}
	}
	if len(e.Near) > 0 {
		text += "; names like it: " + strings.Join(e.Near, ", ")
	}
	return text
}

// Unwrap returns ErrUnknown.
func (e *UnknownError) Unwrap() error { return ErrUnknown }

// SpectralOf returns the spectral values of a material, data first. Case doesn't matter, and
// chemical symbols and some formulas serve as names. A name that is unknown, or known for
// total values only, is an *UnknownError that lists near ones. The slices are the caller's.
func SpectralOf(name string) ([]Spectral, error) {
	t, err := tables()
	if err != nil {
		return nil, err
	}
	canonical := resolve(name)
	var found []Spectral
	for _, s := range t.spectral {
		if strings.EqualFold(s.Material, canonical) {
			found = append(found, s.clone())
		}
	}
	if found == nil {
		return nil, unknown("spectral", name, t.spectralNames, t.totalNames)
	}
	return found, nil
}

// TotalOf is SpectralOf for total values.
func TotalOf(name string) ([]Total, error) {
	t, err := tables()
	if err != nil {
		return nil, err
	}
	canonical := resolve(name)
	var found []Total
	for _, e := range t.total {
		if strings.EqualFold(e.Material, canonical) {
			found = append(found, e.clone())
		}
	}
	if found == nil {
		return nil, unknown("total", name, t.totalNames, t.spectralNames)
	}
	return found, nil
}

// Materials returns the names that SpectralOf and TotalOf know, sorted.
func Materials() (spectral, total []string, err error) {
	t, err := tables()
	if err != nil {
		return nil, nil, err
	}
	return slices.Clone(t.spectralNames), slices.Clone(t.totalNames), nil
}

func resolve(name string) string {
	name = strings.ToLower(strings.Join(strings.Fields(name), " "))
	if canonical, ok := aliases[name]; ok {
		return canonical
	}
	return name
}

func unknown(kind, name string, names, others []string) error {
	canonical := resolve(name)
	has := func(n string) bool { return strings.EqualFold(n, canonical) }
	return &UnknownError{Name: name, Near: near(canonical, names), Other: slices.ContainsFunc(others, has), kind: kind}
}

// most is how many near names an error lists.
const most = 6

// near returns the names like the given one, nearest first: those within an edit distance of
// a third of its length, or two, and those that hold it or that it holds.
func near(name string, names []string) []string {
	type candidate struct {
		name     string
		distance int
	}
	var all []candidate
	add := func(canonical, other string) {
		d := distance(name, strings.ToLower(other))
		limit := max(2, len([]rune(name))/3)
		held := len(name) >= 3 && (strings.Contains(strings.ToLower(other), name) || len(other) >= 3 && strings.Contains(name, strings.ToLower(other)))
		if !held && (d > limit || d >= len([]rune(name))) {
			return
		}
		if i := slices.IndexFunc(all, func(c candidate) bool { return c.name == canonical }); i >= 0 {
			all[i].distance = min(all[i].distance, d)
			return
		}
		all = append(all, candidate{canonical, d})
	}
	for _, n := range names {
		add(n, n)
		for alias, canonical := range aliases {
			if canonical == n {
				add(n, alias)
			}
		}
	}
	slices.SortFunc(all, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.distance, b.distance), cmp.Compare(a.name, b.name))
	})
	var near []string
	for _, c := range all[:min(len(all), most)] {
		near = append(near, c.name)
	}
	return near
}

// distance is the number of letters to insert, delete, replace or swap with a neighbour that
// leads from a to b (the restricted Damerau–Levenshtein distance).
func distance(a, b string) int {
	p, q := []rune(a), []rune(b)
	d := make([][]int, len(p)+1)
	for i := range d {
		d[i] = make([]int, len(q)+1)
		d[i][0] = i
	}
	for j := range d[0] {
		d[0][j] = j
	}
	for i := 1; i <= len(p); i++ {
		for j := 1; j <= len(q); j++ {
			other := 1
			if p[i-1] == q[j-1] {
				other = 0
			}
			d[i][j] = min(d[i-1][j]+1, d[i][j-1]+1, d[i-1][j-1]+other)
			if i > 1 && j > 1 && p[i-1] == q[j-2] && p[i-2] == q[j-1] {
				d[i][j] = min(d[i][j], d[i-2][j-2]+1)
			}
		}
	}
	return d[len(p)][len(q)]
}
