// Reread takes what an indicator logged with its own settings and estimates again with
// better assumptions.
//
//	go run ./examples/reread [-in FILE] [-band-nm N|LO-HI] -setting X -emissivity X [-emissivity-std U]
//	    [-window-setting X] [-window X] [-window-std U]
//	    [-background-setting-K T] [-background-K T] [-background-std-K U]
//	go run ./examples/reread [-in FILE] -short-nm N|LO-HI -long-nm N|LO-HI
//	    [-ratio-setting X] -emissivity-ratio X [-emissivity-ratio-std U]
//
// and for both [-range-C LO:HI] [-indicator-std-K U] [-repeats N] [-unit K|C|F] [-json].
//
// The log has temperature_C (or _K, _F), or current_mA of a 4 to 20 mA loop over -range-C,
// and time_s, time or label. Values at the ends of the range are bounds. Without -in it reads
// demo data of an invented plant; -in - reads standard input. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"

	"candent/examples/internal/show"
)

func main() {
	var j job
	flag.StringVar(&j.in, "in", "", "log of the indicator; - is standard input, none is the demo")
	flag.StringVar(&j.band, "band-nm", "", "the indicator's band: a wavelength, or LO-HI of a flat top, in nm")
	flag.Float64Var(&j.setting, "setting", 0, "emissivity that it was set to; 1 where it has no setting")
	flag.Float64Var(&j.emissivity, "emissivity", 0, "emissivity to estimate with")
	flag.Float64Var(&j.emissivityStd, "emissivity-std", 0, "its standard uncertainty; 0 takes it for exact, and says so")
	flag.Float64Var(&j.windowSetting, "window-setting", 1, "window transmittance that it was set to")
	flag.Float64Var(&j.window, "window", 0, "window transmittance to estimate with; 0: as set")
	flag.Float64Var(&j.windowStd, "window-std", 0, "its standard uncertainty")
	flag.Float64Var(&j.backgroundSetting, "background-setting-K", 0, "background temperature that it was set to; 0: it takes the surroundings for dark")
	flag.Float64Var(&j.background, "background-K", -1, "background temperature to estimate with; -1: as set, 0: dark")
	flag.Float64Var(&j.backgroundStd, "background-std-K", 0, "its standard uncertainty")
	flag.StringVar(&j.short, "short-nm", "", "two-colour: the short band")
	flag.StringVar(&j.long, "long-nm", "", "two-colour: the long band")
	flag.Float64Var(&j.ratioSetting, "ratio-setting", 1, "two-colour: emissivity ratio that it was set to")
	flag.Float64Var(&j.ratio, "emissivity-ratio", 0, "two-colour: emissivity ratio (short over long) to estimate with")
	flag.Float64Var(&j.ratioStd, "emissivity-ratio-std", 0, "two-colour: its standard uncertainty; 0 takes it for exact, and says so")
	flag.StringVar(&j.span, "range-C", "", "LO:HI in °C, the ends of what it shows; of the loop, 4 and 20 mA")
	flag.Float64Var(&j.indicatorStd, "indicator-std-K", 0, "standard uncertainty of the indicator itself, from its certificate")
	flag.IntVar(&j.repeats, "repeats", 5, "flag a value that stands this often in a row")
	flag.StringVar(&j.unit, "unit", "K", "temperatures in K, C or F (uncertainties stay in K)")
	flag.BoolVar(&j.json, "json", false, "one JSON object a line")
	flag.Parse()

	failed, err := run(j, os.Stdin, os.Stdout, show.NewProgress(os.Stderr))
	if err != nil {
		fmt.Fprintln(os.Stderr, "reread:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
