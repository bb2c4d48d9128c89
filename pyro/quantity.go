package pyro

import (
	"fmt"
	"strconv"
)

// Temperature is a thermodynamic temperature in kelvin.
// The zero value is absolute zero; it never means "not set".
type Temperature float64

// Kelvin is the unit of Temperature: 1500*pyro.Kelvin.
const Kelvin Temperature = 1

const zeroCelsius = 273.15 // K, exact

// Celsius returns the temperature t °C. Offset scales are functions, never
// constants: 1227*Celsius would be meaningless.
func Celsius(t float64) Temperature { return Temperature(t + zeroCelsius) }

// Fahrenheit returns the temperature t °F.
func Fahrenheit(t float64) Temperature { return Temperature((t-32)*5/9 + zeroCelsius) }

// Kelvin returns the temperature in K.
func (t Temperature) Kelvin() float64 { return float64(t) }

// Celsius returns the temperature in °C.
func (t Temperature) Celsius() float64 { return float64(t) - zeroCelsius }

// Fahrenheit returns the temperature in °F.
func (t Temperature) Fahrenheit() float64 { return (float64(t)-zeroCelsius)*9/5 + 32 }

// String prints the temperature in kelvin with its unit.
func (t Temperature) String() string { return formatUnit(float64(t), 'g', -1, "K") }

// Format implements fmt.Formatter: every verb prints the unit.
func (t Temperature) Format(s fmt.State, verb rune) { formatQuantity(s, verb, float64(t), "K") }

// Wavelength is a vacuum wavelength in metres.
type Wavelength float64

// Units of wavelength.
const (
	Metre      Wavelength = 1
	Micrometre Wavelength = 1e-6
	Nanometre  Wavelength = 1e-9
)

// Wavenumber returns the wavelength of a vacuum wavenumber in cm⁻¹.
func Wavenumber(perCentimetre float64) Wavelength { return Wavelength(0.01 / perCentimetre) }

// Metres returns the wavelength in m.
func (w Wavelength) Metres() float64 { return float64(w) }

// Micrometres returns the wavelength in µm.
func (w Wavelength) Micrometres() float64 { return float64(w) * 1e6 }

// Nanometres returns the wavelength in nm.
func (w Wavelength) Nanometres() float64 { return float64(w) * 1e9 }

// Wavenumber returns 1/λ in cm⁻¹.
func (w Wavelength) Wavenumber() float64 { return 0.01 / float64(w) }

// String prints the wavelength in micrometres with its unit.
func (w Wavelength) String() string { return formatUnit(w.Micrometres(), 'g', 10, "µm") }

// Format implements fmt.Formatter: every verb prints the unit (µm).
func (w Wavelength) Format(s fmt.State, verb rune) { formatQuantity(s, verb, w.Micrometres(), "µm") }

func formatUnit(v float64, verb byte, prec int, unit string) string {
	return strconv.FormatFloat(v, verb, prec, 64) + " " + unit
}

// formatQuantity prints v with the verb, width and precision asked for, then the unit.
// Verbs that are not for floats print as %v does.
func formatQuantity(s fmt.State, verb rune, v float64, unit string) {
	switch verb {
	case 'e', 'E', 'f', 'F', 'g', 'G':
	default:
		verb = 'g'
		if _, ok := s.Precision(); !ok {
			fmt.Fprintf(s, fmt.FormatString(s, 's'), formatUnit(v, 'g', 10, unit))
			return
		}
	}
	fmt.Fprintf(s, fmt.FormatString(s, verb)+" %s", v, unit)
}
