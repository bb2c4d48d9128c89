// Calibrate makes a calibration curve from points, or from an indicator's certificate, and
// reads a log with it.
//
//	go run ./examples/calibrate [-in FILE] [-log FILE] [-band-nm LO-HI] [-gain-only]
//	    [-unit K|C|F] [-json] [-plot FILE.svg|.png]
//
// Points have the columns temperature_C (or _K, _F), temperature_std_K, signal_mV (or any
// unit) and signal_std_mV; the log has signal_mV, signal_std_mV, and time_s, time or label.
// A certificate has reference_C, indicated_C, U_K, k and emissivity_setting and needs the
// band; its log has indicated_C, and what comes out holds for the emissivity that the
// indicator was set to (to change that afterwards is examples/reread's job). Columns of
// standard uncertainties are optional. Without -in it shows demo data of an invented laboratory;
// -in - reads standard input. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	var j job
	flag.StringVar(&j.in, "in", "", "points or certificate; - is standard input, none is the demo")
	flag.StringVar(&j.log, "log", "", "log to be read with the curve")
	flag.StringVar(&j.band, "band-nm", "", "the band: a wavelength, or LO-HI of a flat top, in nm; needed for certificates, for fewer than three points and for -gain-only")
	flag.BoolVar(&j.gainOnly, "gain-only", false, "the band is known well enough that only a gain is fitted")
	flag.StringVar(&j.unit, "unit", "K", "temperatures in K, C or F (uncertainties stay in K)")
	flag.BoolVar(&j.json, "json", false, "one JSON object a line, the curve first")
	flag.StringVar(&j.plot, "plot", "", "draw curve and log to FILE.svg or FILE.png")
	flag.Parse()

	failed, err := run(j, os.Stdin, os.Stdout, show.NewProgress(os.Stderr))
	if err != nil {
		fmt.Fprintln(os.Stderr, "calibrate:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
