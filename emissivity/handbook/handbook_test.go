package handbook_test

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"candent/emissivity"
	"candent/emissivity/handbook"
	"candent/pyro"
)

const µm = pyro.Micrometre

// all returns every entry of the tables, and fails if one can't be reached by its name.
func all(t testing.TB) ([]handbook.Spectral, []handbook.Total) {
	t.Helper()
	var spectral []handbook.Spectral
	var total []handbook.Total
	spectralNames, totalNames, err := handbook.Materials()
	if err != nil {
		t.Fatal(err)
	}
	for _, n := range spectralNames {
		s, err := handbook.SpectralOf(n)
		if err != nil {
			t.Fatal(err)
		}
		spectral = append(spectral, s...)
	}
	for _, n := range totalNames {
		e, err := handbook.TotalOf(n)
		if err != nil {
			t.Fatal(err)
		}
		total = append(total, e...)
	}
	return spectral, total
}

func checkEntry(t *testing.T, e handbook.Entry, ε, std []float64) {
	t.Helper()
	if e.Material == "" || e.State == "" || len(e.Source) < 10 || len(e.Spread) < 10 {
		t.Errorf("%v: material, state, source or spread is missing", e)
	}
	recalled := strings.HasSuffix(e.Source, "from memory") || strings.HasSuffix(e.Source, "from memory in part")
	if e.Mark == handbook.Data && recalled || e.Mark == handbook.FromMemory && !recalled && e.Note == "" {
		t.Errorf("%v: marked %v, from %q", e, e.Mark, e.Source)
	}
	if len(ε) == 0 || len(ε) != len(std) {
		t.Errorf("%v: %d values, %d standard uncertainties", e, len(ε), len(std))
		return
	}
	for i := range ε {
		if !(ε[i] > 0 && ε[i] <= 1) || !(std[i] > 0 && std[i] < 1) {
			t.Errorf("%v: %g ± %g", e, ε[i], std[i])
		}
		if !(std[i] >= 0.0099*ε[i]) {
			t.Errorf("%v: %g ± %g is better than any table", e, ε[i], std[i])
		}
		if e.Mark == handbook.FromMemory && !(std[i] >= 0.25*ε[i] && std[i] >= 0.02) {
			t.Errorf("%v, from memory: %g ± %g", e, ε[i], std[i])
		}
	}
}

func TestEveryEntryIsInRangeAndSourced(t *testing.T) {
	spectral, total := all(t)
	if len(spectral) < 250 || len(total) < 90 {
		t.Errorf("only %d spectral and %d total entries", len(spectral), len(total))
	}
	for _, s := range spectral {
		checkEntry(t, s.Entry, s.Emissivities, s.Std)
		if len(s.Wavelengths) != len(s.Emissivities) {
			t.Errorf("%v: %d wavelengths, %d values", s.Entry, len(s.Wavelengths), len(s.Emissivities))
		}
		for i, λ := range s.Wavelengths {
			if λ < 0.25*µm || λ > 25*µm || i > 0 && λ <= s.Wavelengths[i-1] {
				t.Errorf("%v: wavelengths %v", s.Entry, s.Wavelengths)
			}
		}
		if s.Coldest > s.Hottest || s.Coldest < 0 || s.Hottest > 4000 || s.Coldest == 0 && s.Hottest != 0 {
			t.Errorf("%v: %v to %v", s.Entry, s.Coldest, s.Hottest)
		}
		if s.Direction != handbook.Normal {
			t.Errorf("%v: spectral and %v", s.Entry, s.Direction)
		}
	}
	for _, e := range total {
		checkEntry(t, e.Entry, e.Emissivities, e.Std)
		if n := len(e.Temperatures); n != len(e.Emissivities) && !(n == 0 && len(e.Emissivities) == 1) {
			t.Errorf("%v: %d temperatures, %d values", e.Entry, n, len(e.Emissivities))
		}
		for i, k := range e.Temperatures {
			if k < 77 || k > 4000 || i > 0 && k <= e.Temperatures[i-1] {
				t.Errorf("%v: temperatures %v", e.Entry, e.Temperatures)
			}
		}
	}
}

// find returns the one entry of a material whose state holds the words, at the temperature
// (0: any).
func find(t *testing.T, name, state string, kelvin pyro.Temperature, um float64) handbook.Spectral {
	t.Helper()
	list, err := handbook.SpectralOf(name)
	if err != nil {
		t.Fatal(err)
	}
	var found []handbook.Spectral
	for _, s := range list {
		if strings.Contains(s.State, state) && (kelvin == 0 || s.Coldest <= kelvin && kelvin <= s.Hottest) && !math.IsNaN(s.At(pyro.Wavelength(um)*µm)) {
			found = append(found, s)
		}
	}
	if len(found) != 1 {
		t.Fatalf("%d entries of %s, %s, %v, %g µm", len(found), name, state, kelvin, um)
	}
	return found[0]
}

func TestSpotValues(t *testing.T) {
	for _, row := range []struct {
		name, state string
		kelvin      pyro.Temperature
		um, ε, std  float64
		mark        handbook.Mark
		sourceHolds string
	}{
		{"tungsten", "ribbon, annealed", 2000, 0.65, (0.448 + 0.438) / 2, 0.05 * 0.443, handbook.Data, "E-381"},
		{"tungsten", "ribbon, annealed", 2800, 3.5, 0.160, 0.016, handbook.Data, "E-381"},
		{"tungsten", "ribbon, annealed", 1600, 0.25, 0.448, 0.05 * 0.448, handbook.Data, "E-381"},
		{"iron", "clean, liquid", 1820, 0.65, 0.358, 0.05 * 0.358, handbook.Data, "Burgess"},
		{"iron", "clean, solid, in hydrogen", 1333, 0.65, 0.378, 0.0378, handbook.Data, "Burgess"},
		{"nickel oxide", "matte", 1273, 0.65, 0.91, 0.091, handbook.Data, "224"},
		{"nickel oxide", "smooth", 1723, 0.65, 0.69, 0.069, handbook.Data, "Burgess"},
		{"steel", "clean, liquid", 1815, 0.65, 0.373, 0.05 * 0.373, handbook.Data, "Burgess"},
		{"gold", "bulk", 294, 1.0, 0.017, 0.03, handbook.Data, "D-5353"},
		{"stainless steel 304", "bulk", 294, 2.16, 0.230, 0.3 * 0.230, handbook.Data, "D-5353"},
		{"zirconium", "film", 300, 0.65, 0.541, 0.172, handbook.Data, "database"},
		{"iridium", "film", 300, 0.65, 0.254, 0.0254, handbook.Data, "database"},
		{"vanadium", "film", 300, 1.6, 0.337, 0.185, handbook.Data, "database"},
		{"chromium oxide", "curve 8", 1273, 3.9, 0.851, 0.12 * 0.851, handbook.Data, "Thermophysical"},
		{"chromium oxide", "mean", 1273, 1.0, 0.721, 0.041, handbook.Data, "Thermophysical"},
		{"graphite", "dense", 300, 0.9, 0.773, 0.05 * 0.773, handbook.Data, "Querry"},
		{"silica", "fused", 573, 9, 0.480, 0.12, handbook.Data, "Franta"},
		{"silicon", "bulk", 500, 0.9, 0.673, 0.02 * 0.673, handbook.Data, "Franta"},
		{"titanium", "clean, solid", 1944, 0.65, 0.44, 0.02, handbook.Data, "Kostanovskiy"},
		{"molybdenum", "clean, solid", 1300, 0.467, 0.395, 0.0395, handbook.Data, "Worthing"},
		{"stainless steel 18-8", "oxidised", 0, 0.65, 0.85, 0.25 * 0.85, handbook.FromMemory, "Roeser"},
		{"slag", "liquid", 1700, 0.8, 0.75, 0.25 * 0.75, handbook.FromMemory, "no source"},
	} {
		s := find(t, row.name, row.state, row.kelvin, row.um)
		λ := pyro.Wavelength(row.um) * µm
		if got := s.At(λ); math.Abs(got-row.ε) > 1e-12 {
			t.Errorf("%v at %v: %.6g, want %.6g", s, λ, got, row.ε)
		}
		if got := s.StdAt(λ); math.Abs(got-row.std) > 1e-12 {
			t.Errorf("%v at %v: standard uncertainty %.6g, want %.6g", s, λ, got, row.std)
		}
		if s.Mark != row.mark || !strings.Contains(s.Source, row.sourceHolds) {
			t.Errorf("%v: %v, %s", s, s.Mark, s.Source)
		}
	}
}

// A range of the source becomes its middle, with half of it over √3.
func TestRangesBecomeUncertainties(t *testing.T) {
	lime, err := handbook.TotalOf("quicklime")
	if err != nil {
		t.Fatal(err)
	}
	ε, std := lime[0].Emissivity(1400)
	// 0.35 to 0.70 gives 0.101, 20 % of the middle 0.105: the larger
	if math.Abs(ε-0.525) > 1e-12 || math.Abs(std-0.105) > 1e-12 {
		t.Errorf("quicklime %g ± %g", ε, std)
	}
	ceria, err := handbook.TotalOf("CeO2")
	if err != nil {
		t.Fatal(err)
	}
	i := slices.IndexFunc(ceria, func(e handbook.Total) bool { return slices.Contains(e.Temperatures, 1130) })
	ε, std = ceria[i].Emissivity(1130)
	// 0.42 to 0.57 gives 0.0433, 10 % of the middle 0.0495
	if math.Abs(ε-0.495) > 1e-12 || math.Abs(std-0.0495) > 1e-12 || !strings.Contains(ceria[i].Spread, "half of it over √3") {
		t.Errorf("ceria %g ± %g, %s", ε, std, ceria[i].Spread)
	}
	si, err := handbook.TotalOf("Si")
	if err != nil {
		t.Fatal(err)
	}
	i = slices.IndexFunc(si, func(e handbook.Total) bool { return e.Direction == handbook.Unstated })
	ε, std = si[i].Emissivity(1200)
	if math.Abs(ε-0.60) > 1e-12 || math.Abs(std-0.36/(2*math.Sqrt(3))) > 1e-12 {
		t.Errorf("silicon %g ± %g", ε, std)
	}
}

func TestKnownAt(t *testing.T) {
	s := find(t, "tungsten", "ribbon, annealed", 2000, 0.9)
	k, err := s.Known(900 * pyro.Nanometre)
	if err != nil || k.Wavelength != 900*pyro.Nanometre || math.Abs(k.Value-0.404) > 1e-12 || math.Abs(k.Std-0.05*0.404) > 1e-12 {
		t.Errorf("%+v, %v", k, err)
	}
	if f := emissivity.Polynomial(1).KnownAt(k.Wavelength, k.Value, k.Std); f.Err() != nil {
		t.Errorf("a family refused it: %v", f.Err())
	}
	for _, λ := range []pyro.Wavelength{0.24 * µm, 3.6 * µm, pyro.Wavelength(math.NaN())} {
		if _, err := s.Known(λ); !errors.Is(err, handbook.ErrOutside) {
			t.Errorf("at %v: %v", λ, err)
		}
		if v := s.At(λ); !math.IsNaN(v) {
			t.Errorf("at %v: %g", λ, v)
		}
	}
	// an end serves within 2 %, a single wavelength too
	fe := find(t, "iron", "clean, liquid", 1820, 0.65)
	for λ, want := range map[pyro.Wavelength]bool{0.65 * µm: true, 0.655 * µm: true, 0.645 * µm: true, 0.67 * µm: false, 0.63 * µm: false} {
		if k, err := fe.Known(λ); (err == nil) != want || want && k.Value != 0.358 {
			t.Errorf("liquid iron at %v: %+v, %v", λ, k, err)
		}
	}
	gold := find(t, "gold", "bulk", 294, 1.6) // 0.006 ± 0.03
	if _, err := gold.Known(1.6 * µm); !errors.Is(err, handbook.ErrSpread) {
		t.Errorf("gold at 1.6 µm: %v", err)
	}
	if _, err := (handbook.Spectral{}).Known(1 * µm); !errors.Is(err, handbook.ErrOutside) {
		t.Errorf("nothing at all: %v", err)
	}
}

// Two per cent of λ move the steepest tabulated curves by less than their spread.
func TestAnEndServesWithinItsSpread(t *testing.T) {
	for _, name := range []string{"gold", "copper"} {
		s := find(t, name, "bulk", 294, 0.6)
		a, b := s.At(0.6*µm), s.At(0.612*µm)
		if math.Abs(a-b) > s.StdAt(0.6*µm) {
			t.Errorf("%s: %g at 0.6 µm, %g at 0.612 µm, ± %g", name, a, b, s.StdAt(0.6*µm))
		}
	}
}

// An entry is a pyro.Spectrum, a total value is none.
func TestATotalValueIsNoSpectrum(t *testing.T) {
	var spectral any = handbook.Spectral{}
	if _, ok := spectral.(pyro.Spectrum); !ok {
		t.Error("a spectral entry is no Spectrum")
	}
	var total any = handbook.Total{}
	if _, ok := total.(pyro.Spectrum); ok {
		t.Error("a total entry is a Spectrum")
	}
}

func totalTungsten(t *testing.T) handbook.Total {
	t.Helper()
	list, err := handbook.TotalOf("W")
	if err != nil {
		t.Fatal(err)
	}
	if list[0].Mark != handbook.Data || len(list[0].Temperatures) != 14 {
		t.Fatalf("first: %+v", list[0])
	}
	return list[0]
}

func TestTotalOverTemperature(t *testing.T) {
	w := totalTungsten(t)
	for _, row := range []struct {
		kelvin pyro.Temperature
		ε      float64
	}{{300, 0.032}, {2000, 0.260}, {2100, 0.2695}, {3000, 0.334}, {3140, 0.334}, {290, 0.032}} {
		ε, std := w.Emissivity(row.kelvin)
		if math.Abs(ε-row.ε) > 1e-12 || math.Abs(std-0.1*row.ε) > 1e-12 {
			t.Errorf("%v: %g ± %g, want %g", row.kelvin, ε, std, row.ε)
		}
	}
	for _, k := range []pyro.Temperature{280, 3200, pyro.Temperature(math.NaN())} {
		if ε, std := w.Emissivity(k); !math.IsNaN(ε) || !math.IsNaN(std) {
			t.Errorf("%v: %g ± %g", k, ε, std)
		}
	}
}

func TestATotalValueTakenAsGreyIsWideAndSaysSo(t *testing.T) {
	k, note, err := totalTungsten(t).AssumeGrey(0.65*µm, 2000)
	if err != nil {
		t.Fatal(err)
	}
	if k.Wavelength != 0.65*µm || k.Value != 0.260 || math.Abs(k.Std-math.Hypot(0.026, 0.26*0.74)) > 1e-12 {
		t.Errorf("%+v", k)
	}
	for _, word := range []string{"tungsten", "0.65 µm", "2000 K", "total", "not known", "grey, which it is not"} {
		if !strings.Contains(note, word) {
			t.Errorf("the note lacks %q: %s", word, note)
		}
	}
	// what the handbook knows of that band lies within two of these standard uncertainties
	for _, kelvin := range []pyro.Temperature{1600, 2000, 2400, 2800} {
		s := find(t, "tungsten", "ribbon, annealed", kelvin, 0.65)
		for _, λ := range []pyro.Wavelength{0.65 * µm, 1 * µm, 3 * µm} {
			k, _, err := totalTungsten(t).AssumeGrey(λ, kelvin)
			if err != nil || math.Abs(k.Value-s.At(λ)) > 2*k.Std {
				t.Errorf("%v, %v: %g ± %g taken for %g, %v", kelvin, λ, k.Value, k.Std, s.At(λ), err)
			}
		}
	}
	if _, _, err := totalTungsten(t).AssumeGrey(0.65*µm, 4000); !errors.Is(err, handbook.ErrOutside) {
		t.Errorf("at 4000 K: %v", err)
	}
	if _, _, err := totalTungsten(t).AssumeGrey(-1, 2000); !errors.Is(err, handbook.ErrOutside) {
		t.Errorf("at a negative wavelength: %v", err)
	}
	if _, _, err := (handbook.Total{}).AssumeGrey(1*µm, 2000); !errors.Is(err, handbook.ErrOutside) {
		t.Errorf("nothing at all: %v", err)
	}
	silver, err := handbook.TotalOf("silver") // 0.03 ± 0.02, recalled
	if err != nil {
		t.Fatal(err)
	}
	if _, _, err := silver[0].AssumeGrey(10*µm, 600); !errors.Is(err, handbook.ErrSpread) {
		t.Errorf("silver: %v", err)
	}
}

func TestJoin(t *testing.T) {
	list, err := handbook.SpectralOf("tungsten")
	if err != nil {
		t.Fatal(err)
	}
	var ribbon []handbook.Spectral
	for _, s := range list {
		if strings.HasPrefix(s.State, "ribbon, annealed") {
			ribbon = append([]handbook.Spectral{s}, ribbon...) // hottest first: Join sorts
		}
	}
	table, err := handbook.Join(ribbon...)
	if err != nil {
		t.Fatal(err)
	}
	if lo, hi, cold, hot := table.Range(); lo != 0.25*µm || hi != 3.5*µm || cold != 1600 || hot != 2800 {
		t.Errorf("%v to %v, %v to %v", lo, hi, cold, hot)
	}
	ε, dT := table.Emissivity(nil, []float64{1}, 1.6*µm, 2200)
	if math.Abs(ε-0.280) > 1e-12 || math.Abs(dT-0.010/400) > 1e-15 {
		t.Errorf("tungsten at 1.6 µm, 2200 K: %g, %g/K", ε, dT)
	}
	if p := table.Parameters()[0].Prior; math.Abs(p.Std-0.10) > 1e-12 {
		t.Errorf("scale: %+v", p)
	}
	iron := find(t, "iron", "clean, liquid", 1820, 0.65)
	for name, entries := range map[string][]handbook.Spectral{
		"one":                 ribbon[:1],
		"a temperature twice": {ribbon[0], ribbon[0]},
		"a range":             {ribbon[0], iron},
		"two materials":       {ribbon[0], find(t, "chromium oxide", "curve 8", 1273, 1)},
		"other wavelengths":   {ribbon[0], find(t, "tungsten", "in hydrogen", 2023, 0.65)},
	} {
		if _, err := handbook.Join(entries...); !errors.Is(err, handbook.ErrJoin) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestNamesAndTheirLikes(t *testing.T) {
	for alias, want := range map[string]string{"W": "tungsten", " Tungsten ": "tungsten", "aluminum": "aluminium", "Fe3O4": "magnetite", "ti-6al-4v": "Ti-6Al-4V", "Stainless  Steel 304": "stainless steel 304"} {
		s, err := handbook.SpectralOf(alias)
		if err != nil || s[0].Material != want {
			t.Errorf("%q: %v", alias, err)
		}
	}
	for name, want := range map[string]string{
		"tungsen": "tungsten", "nikel": "nickel", "moylbdenum": "molybdenum", "platnium": "platinum", "alumnium": "aluminium", "inconel": "",
		"304": "stainless steel 304", "chromium oxid": "chromium oxide", "titanium dioxid": "titania", "grafite": "graphite", "hastalloy": "", "": "", "xyzzy": "",
	} {
		_, err := handbook.SpectralOf(name)
		var unknown *handbook.UnknownError
		if !errors.As(err, &unknown) || !errors.Is(err, handbook.ErrUnknown) {
			t.Errorf("%q: %v", name, err)
			continue
		}
		if unknown.Name != name || len(unknown.Near) > 6 || unknown.Other {
			t.Errorf("%q: %+v", name, unknown)
		}
		if want == "" && len(unknown.Near) > 0 || want != "" && (len(unknown.Near) == 0 || unknown.Near[0] != want) {
			t.Errorf("%q: near %v, want %q first", name, unknown.Near, want)
		}
		if want != "" && !strings.Contains(err.Error(), want) {
			t.Errorf("%q: the text names no %q: %v", name, want, err)
		}
	}
}

func TestAKindThatIsNotThereIsSaid(t *testing.T) {
	var unknown *handbook.UnknownError
	_, err := handbook.SpectralOf("alumina brick")
	if !errors.As(err, &unknown) || !unknown.Other || !strings.Contains(err.Error(), "TotalOf") {
		t.Errorf("%v", err)
	}
	_, err = handbook.TotalOf("rhodium")
	if !errors.As(err, &unknown) || !unknown.Other || !strings.Contains(err.Error(), "SpectralOf") {
		t.Errorf("%v", err)
	}
}

func TestEntriesAreTheCallers(t *testing.T) {
	a, err := handbook.SpectralOf("tungsten")
	if err != nil {
		t.Fatal(err)
	}
	b, err := handbook.TotalOf("tungsten")
	if err != nil {
		t.Fatal(err)
	}
	a[0].Emissivities[0], a[0].Wavelengths[0], a[0].Std[0], b[0].Emissivities[0], b[0].Temperatures[0] = 9, 9, 9, 9, 9
	c, _ := handbook.SpectralOf("tungsten")
	d, _ := handbook.TotalOf("tungsten")
	if c[0].Emissivities[0] == 9 || c[0].Wavelengths[0] == 9 || c[0].Std[0] == 9 || d[0].Emissivities[0] == 9 || d[0].Temperatures[0] == 9 {
		t.Error("the table changed with a caller's slice")
	}
}

func FuzzSpectralOf(f *testing.F) {
	for _, s := range []string{"", "tungsten", "wolfrma", "µ", "\xff", "steel"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, name string) {
		s, err := handbook.SpectralOf(name)
		if (err == nil) != (len(s) > 0) {
			t.Errorf("%q: %d entries, %v", name, len(s), err)
		}
		if err != nil && !errors.Is(err, handbook.ErrUnknown) {
			t.Errorf("%q: %v", name, err)
		}
	})
}

// The mean and deviation of the six chromium oxide bodies at 1273 K are those of their own
// entries, to the rounding of three digits.
func TestMeansAreThoseOfTheirBodies(t *testing.T) {
	list, err := handbook.SpectralOf("Cr2O3")
	if err != nil {
		t.Fatal(err)
	}
	mean := find(t, "chromium oxide", "mean of the six", 1273, 1)
	for i, λ := range mean.Wavelengths {
		n, sum, squares := 0.0, 0.0, 0.0
		for _, s := range list {
			if strings.Contains(s.State, "curve") && s.Coldest == 1273 {
				v := s.At(λ)
				n, sum, squares = n+1, sum+v, squares+v*v
			}
		}
		m := sum / n
		sd := math.Sqrt((squares - n*m*m) / (n - 1))
		if n != 6 || math.Abs(m-mean.Emissivities[i]) > 0.00101 || math.Abs(sd-mean.Std[i]) > 0.00101 {
			t.Errorf("%v: %g bodies, %.4f ± %.4f, entry %g ± %g", λ, n, m, sd, mean.Emissivities[i], mean.Std[i])
		}
	}
}
