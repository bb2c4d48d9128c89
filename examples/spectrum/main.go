// Spectrum estimates temperature and emissivity from spectra.
//
//	go run ./examples/spectrum [-in FILE] [-emissivity grey|linear|quadratic|exponential|powerlaw]
//	    [-unit K|C|F] [-json] [-plot FILE.svg|.png]
//
// Without -in it reads demo data of an invented plant; -in - reads standard input. A
// reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	in := flag.String("in", "", "table of spectra; - is standard input, none is the demo")
	family := flag.String("emissivity", "grey", "grey, linear, quadratic, exponential or powerlaw")
	unit := flag.String("unit", "K", "temperatures in K, C or F (uncertainties stay in K)")
	asJSON := flag.Bool("json", false, "one JSON object a line")
	plot := flag.String("plot", "", "draw the first spectrum that could be estimated to FILE.svg or FILE.png")
	flag.Parse()

	failed, err := run(job{in: *in, family: *family, unit: *unit, json: *asJSON, plot: *plot}, os.Stdin, os.Stdout, show.NewProgress(os.Stderr))
	if err != nil {
		fmt.Fprintln(os.Stderr, "spectrum:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
