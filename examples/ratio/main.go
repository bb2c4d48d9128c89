// Ratio turns a two-colour log into temperatures.
//
//	go run ./examples/ratio [-in FILE] -short-nm N|LO-HI -long-nm N|LO-HI [-emissivity-ratio X]
//	    [-emissivity-ratio-std U] [-unit K|C|F] [-json] [-plot FILE.svg|.png]
//
// Both columns of the log must stand on one radiance scale: what a calibration makes of the
// detectors' signals. Without -in it reads demo data of an invented plant, taken at 750 and
// 900 nm; -in - reads standard input. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	var j job
	flag.StringVar(&j.in, "in", "", "two-colour log; - is standard input, none is the demo")
	flag.StringVar(&j.short, "short-nm", "", "the short band: a wavelength, or LO-HI of a flat top, in nm")
	flag.StringVar(&j.long, "long-nm", "", "the long band")
	flag.Float64Var(&j.ratio, "emissivity-ratio", 1, "emissivity ratio, short over long")
	flag.Float64Var(&j.ratioStd, "emissivity-ratio-std", 0, "its standard uncertainty; 0 takes it for exact, and says so")
	flag.StringVar(&j.unit, "unit", "K", "temperatures in K, C or F (uncertainties stay in K)")
	flag.BoolVar(&j.json, "json", false, "one JSON object a line")
	flag.StringVar(&j.plot, "plot", "", "draw temperature against time (or row) to FILE.svg or FILE.png")
	flag.Parse()

	failed, err := run(j, os.Stdin, os.Stdout, show.NewProgress(os.Stderr))
	if err != nil {
		fmt.Fprintln(os.Stderr, "ratio:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
