package fit

import (
	"candent/emissivity"
	"candent/pyro"
	"candent/pyro/detector"
	"candent/pyro/sightline"
)

// Assume is what is taken for known. Every field's zero value has the meaning that
// stands beside it.
type Assume struct {
	// Emissivity of the surface: a family, a model or a process. nil: emissivity.Unknown(), a
	// surface that nobody characterised, which one or two bands refuse.
	Emissivity emissivity.Surface
	// Noise of the readings. Zero: each reading brings its own standard uncertainty.
	Noise Noise
	// Range of temperature that is searched. Zero: 200 K to 6000 K.
	Range Range
	// Temperature, where it is known from elsewhere. Zero: free.
	Temperature TemperaturePrior
	// Surroundings that the surface reflects. Zero: nothing shines in.
	Surroundings sightline.Surroundings
	// Path from the surface to the detector, in that order. nil: it is clear.
	Path []sightline.Layer
	// Field of view. Zero: a target of one temperature fills it.
	Field sightline.Field
	// Detectors, one for each band. nil: readings are radiances.
	Detectors []detector.Channel
	// Stray light of a spectrometer or a lens, as a fraction of the channels' mean signal that
	// every channel receives. nil: none.
	Stray *pyro.Input
	// Shared inputs act on several channels at once.
	Shared []Shared
	// Loss of a residual. Zero: its square.
	Loss Loss
	// Masks are wavelength intervals whose channels are left out.
	Masks []Mask
	// Probability of the intervals. Zero: 0.95.
	Probability float64

	leave int // 1 + the index of a channel that is left out beside the masks; 0: none
}

// Range is an interval of temperature, both ends included.
type Range struct{ Min, Max pyro.Temperature }

// TemperaturePrior is a temperature known from elsewhere, with its standard
// uncertainty in K; StdK = 0 with a Value fixes it.
type TemperaturePrior struct {
	Value pyro.Temperature
	StdK  float64
}

// Shared is an effect of any shape over the channels that they share, beside the inputs of
// detectors, path and surroundings. It enters as one unknown with a prior, not as a per-channel
// uncertainty, so that averaging over channels doesn't make it vanish. Where the input
// lies one Std above its value, reading i is higher by
//
//	m_i · Relative_i + Additive_i
//
// Relative and Additive have one element for each band, or are nil for 0.
type Shared struct {
	Name     string
	Relative []float64
	Additive []float64 // unit of the reading
}

// SharedScale is a scale factor of all readings with relative standard uncertainty rel.
func SharedScale(name string, rel float64, channels int) Shared {
	r := make([]float64, channels)
	for i := range r {
		r[i] = rel
	}
	return Shared{Name: name, Relative: r}
}

// Mask is a wavelength interval that is left out.
type Mask struct {
	Name   string
	Lo, Hi pyro.Wavelength
}

// Masks of the resonance lines of the alkali metals that flames and furnace
// atmospheres show, ± 1.5 nm. Wavelengths in air from memory: Na 589.0 and 589.6,
// Li 670.8, K 766.5 and 769.9, Rb 780.0 and 794.8 nm.
var (
	Sodium    = []Mask{{"Na 589.0/589.6 nm", 587.5e-9, 591.1e-9}}
	Lithium   = []Mask{{"Li 670.8 nm", 669.3e-9, 672.3e-9}}
	Potassium = []Mask{{"K 766.5 nm", 765.0e-9, 768.0e-9}, {"K 769.9 nm", 768.4e-9, 771.4e-9}}
	Rubidium  = []Mask{{"Rb 780.0 nm", 778.5e-9, 781.5e-9}, {"Rb 794.8 nm", 793.3e-9, 796.3e-9}}
)

// Readings is one reading of all channels, in the order of the bands.
type Readings struct {
	// Signal of each channel: W m⁻² sr⁻¹ m⁻¹, the unit of its detector where one is declared,
	// or any one unit where the level is relative.
	Signal []float64
	Std    []float64 // standard uncertainties, same unit; nil where Noise is declared
	// Inputs holds the values of the inputs that are new with each reading, in the order of
	// Estimator.PerReading. nil: they have the values that they were declared with.
	Inputs []float64
}
