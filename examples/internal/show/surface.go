package show

import (
	"fmt"
	"slices"
	"strings"

	"candent/emissivity"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
)

// surfaces are what -emissivity names: families, the unknown surface, and kinds.
var surfaces = []struct {
	name string
	of   emissivity.Surface
}{
	{"grey", emissivity.Grey()},
	{"linear", emissivity.Polynomial(1)},
	{"quadratic", emissivity.Polynomial(2)},
	{"exponential", emissivity.Exponential(1)},
	{"powerlaw", emissivity.PowerLaw()},
	{"unknown", emissivity.Unknown()},
	{"any", emissivity.AnySurface()},
	{"metal", emissivity.BareTransitionMetal()},
	{"bright", emissivity.BrightMetal()},
	{"oxide", either("oxidised metal", emissivity.GrowingOxide(), emissivity.DarkScale())},
	{"ceramic", either("refractory or ceramic", emissivity.WhiteCeramic(), emissivity.IronBearingCeramic())},
	{"carbon", emissivity.Carbon()},
	{"liquid", emissivity.LiquidMetal()},
}

// either is a mixture of two kinds in equal shares, which the readings weigh.
func either(name string, a, b emissivity.Process) emissivity.Process {
	return emissivity.NewProcess(name, slices.Concat(a.Components(), b.Components())...)
}

// SurfaceNames lists what -emissivity takes.
func SurfaceNames() string {
	var names []string
	for _, s := range surfaces {
		names = append(names, s.name)
	}
	last := len(names) - 1
	return strings.Join(names[:last], ", ") + " or " + names[last]
}

// Surface returns the surface of a name, which may also be that of one of emissivity.Kinds.
func Surface(name string) (emissivity.Surface, error) {
	for _, s := range surfaces {
		if s.name == name {
			return s.of, nil
		}
	}
	for _, k := range emissivity.Kinds() {
		if k.Name == name {
			return k.Process, nil
		}
	}
	return nil, fmt.Errorf("-emissivity %s: %s", name, SurfaceNames())
}

// For returns the surface as it is to be put to a spectrum: of relative level where that has a
// common unknown gain.
func For(s emissivity.Surface, spectrum *readings.Spectrum) emissivity.Surface {
	if !spectrum.Relative {
		return s
	}
	switch s := s.(type) {
	case emissivity.Family:
		return s.Relative()
	case emissivity.Process:
		return s.Relative()
	}
	return s
}

// Percent words a share that may be all but the whole.
func Percent(share float64) string {
	if share >= 0.995 {
		return "more than 99 %"
	}
	return fmt.Sprintf("%.0f %%", 100*share)
}

// Noise returns the noise of a spectrum and the readings' standard uncertainties, estimated
// where none is given, which the note then says.
func Noise(s *readings.Spectrum) (noise fit.Noise, std []float64, note string) {
	if len(s.Std) > 0 {
		return fit.PerReading(), s.Std, ""
	}
	std = make([]float64, len(s.Signal))
	if rel, err := readings.NeighbourStd(std, s.Wavelengths, s.Signal); err == nil {
		return fit.PerReading(), std, fmt.Sprintf("no uncertainty was given: noise of %.2g %% estimated from neighbouring channels; what channels share is not in it", 100*rel)
	}
	return fit.Relative(0.01).UpToFactor(), nil, "no uncertainty was given: relative noise of one unknown size, estimated from the residuals of the fit"
}

// Lines returns a band for each wavelength.
func Lines(λ []pyro.Wavelength) ([]*pyro.Band, error) {
	bands := make([]*pyro.Band, len(λ))
	for i, λ := range λ {
		var err error
		if bands[i], err = pyro.Line(λ); err != nil {
			return nil, err
		}
	}
	return bands, nil
}
