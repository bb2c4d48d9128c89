// Furnace reads the temperature of a load past walls hotter than the load.
//
//	go run ./examples/furnace [-in FILE] [-band-nm N|LO-HI] [-emissivity X] [-emissivity-std U]
//	    [-gain G] [-gain-rel U] [-window X] [-window-std U] [-wall-std K] [-noise-rel U]
//	    [-unit K|C|F] [-json] [-plot FILE.svg|.png]
//
// The log has the columns label (or time_s), signal, wall_K or wall_C, and may have exposure.
// The signal is G × exposure × W m⁻² sr⁻¹ m⁻¹, net of the dark level. Without -in it reads demo
// data of an invented plant; -in - reads standard input. Beside each temperature stands what
// would be read if the walls were ignored. A reading is no safety interlock.
package main

import (
	"flag"
	"fmt"
	"os"
)

func main() {
	var j job
	flag.StringVar(&j.in, "in", "", "log; - is standard input, none is the demo")
	flag.StringVar(&j.band, "band-nm", "1550-1650", "the instrument's band: a wavelength, or LO-HI of a flat top, in nm")
	flag.Float64Var(&j.ε, "emissivity", 0.80, "emissivity of the load in the band")
	flag.Float64Var(&j.εStd, "emissivity-std", 0.04, "its standard uncertainty")
	flag.Float64Var(&j.gain, "gain", 2.5e-8, "signal per W m⁻² sr⁻¹ m⁻¹ at exposure 1")
	flag.Float64Var(&j.gainRel, "gain-rel", 0.008, "relative standard uncertainty of the gain")
	flag.Float64Var(&j.window, "window", 0.91, "transmittance of the window")
	flag.Float64Var(&j.windowStd, "window-std", 0.02, "its standard uncertainty")
	flag.Float64Var(&j.wallStd, "wall-std", 12, "standard uncertainty of a wall temperature, K, new with each reading")
	flag.Float64Var(&j.noise, "noise-rel", 0.003, "relative noise of a signal")
	flag.StringVar(&j.unit, "unit", "C", "temperatures in K, C or F (uncertainties stay in K)")
	flag.BoolVar(&j.json, "json", false, "one JSON object a line")
	flag.StringVar(&j.plot, "plot", "", "draw load and walls to FILE.svg or FILE.png")
	flag.Parse()

	failed, err := run(j, os.Stdin, os.Stdout)
	if err != nil {
		fmt.Fprintln(os.Stderr, "furnace:", err)
		os.Exit(1)
	}
	if failed > 0 {
		os.Exit(1)
	}
}
