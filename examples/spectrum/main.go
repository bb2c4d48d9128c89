// Spectrum estimates temperature and emissivity from spectra.
//
//	go run ./examples/spectrum [-in FILE]
//	    [-emissivity grey|linear|quadratic|exponential|powerlaw|unknown|any|metal|bright|oxide|ceramic|carbon|liquid]
//	    [-accept-wide] [-compare] [-unit K|C|F] [-json] [-plot FILE.svg|.png]
//
// From unknown on the surface is a random curve, and what comes out a posterior: unknown is
// the surface that nobody characterised, any the same with all named kinds beside it, oxide a
// mixture of a growing film and a dark scale, ceramic one of white and iron-bearing ones. One or
// two bands tell little of a surface: with unknown or any they are refused, unless
// -accept-wide takes the range that is assumed for what it is. -compare puts each spectrum to
// several surfaces and says whether the readings can tell them apart. Without -in it reads demo
// data of an invented plant; -in - reads standard input. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	in := flag.String("in", "", "table of spectra; - is standard input, none is the demo")
	surface := flag.String("emissivity", "grey", show.SurfaceNames())
	compare := flag.Bool("compare", false, "put each spectrum to several surfaces as well")
	acceptWide := flag.Bool("accept-wide", false, "let unknown and any have one or two bands")
	unit := flag.String("unit", "K", "temperatures in K, C or F (uncertainties stay in K)")
	asJSON := flag.Bool("json", false, "one JSON object a line")
	plot := flag.String("plot", "", "draw the first spectrum that could be estimated to FILE.svg or FILE.png")
	flag.Parse()

	failed, err := run(job{in: *in, surface: *surface, acceptWide: *acceptWide, compare: *compare, unit: *unit, json: *asJSON, plot: *plot}, os.Stdin, os.Stdout, show.NewProgress(os.Stderr))
	if err != nil {
		fmt.Fprintln(os.Stderr, "spectrum:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
