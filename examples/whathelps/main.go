// Whathelps says what would have to be found out next, for a temperature to be known better.
//
//	go run ./examples/whathelps [-in FILE] [-emissivity NAME] [-scale-percent U] [-add-nm N,N,…]
//	    [-contact-K U] [-emissivity-percent U] [-accept-wide] [-json]
//
// It estimates each spectrum of a table (as examples/spectrum reads) again for each thing that
// could be known better. NAME is one of examples/spectrum. Without -in it reads demo data of an
// invented plant; -in - reads standard input. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	var j job
	flag.StringVar(&j.in, "in", "", "table of spectra; - is standard input, none is the demo")
	flag.StringVar(&j.surface, "emissivity", "unknown", show.SurfaceNames())
	flag.Float64Var(&j.scale, "scale-percent", 1, "standard uncertainty of the calibration's scale, which all bands share")
	flag.StringVar(&j.add, "add-nm", "1600,2200", "bands that could be added: wavelengths or LO-HI, in nm, with commas between")
	flag.Float64Var(&j.contact, "contact-K", 3, "standard uncertainty of a contact reading, K")
	flag.Float64Var(&j.emissivity, "emissivity-percent", 5, "standard uncertainty to which an emissivity could be measured")
	flag.BoolVar(&j.acceptWide, "accept-wide", false, "let unknown and any have one or two bands")
	flag.BoolVar(&j.json, "json", false, "one JSON object a line")
	flag.Parse()

	failed, err := run(j, os.Stdin, os.Stdout)
	if err != nil {
		fmt.Fprintln(os.Stderr, "whathelps:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
