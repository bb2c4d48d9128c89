package sightline

import "candent/pyro"

// GasBand is a stretch of wavelength in which a gas absorbs and emits.
type GasBand struct {
	Gas    string
	Lo, Hi pyro.Wavelength
}

// ColdAir lists the stretches in which water vapour and carbon dioxide of a few metres of
// room air take a noticeable part: the strong bands' cores.
//
// HotGas lists them for metres of hot combustion gas, whose bands are wider and more: the
// bounds are those of the narrow-band model in W. L. Grosshandler, RADCAL: a narrow-band
// model for radiation calculations in a combustion environment, NIST TN 1402 (1993), with
// the weak groups of water below 1.3 µm left out, where its table of mean absorption
// coefficients (after C. B. Ludwig et al., 1973) leaves a window up to 2000 K.
// ColdAir's bounds are common practice, no source.
var (
	ColdAir = []GasBand{
		{"H₂O", 1.34e-6, 1.42e-6}, {"H₂O", 1.80e-6, 1.95e-6}, {"H₂O and CO₂", 2.55e-6, 2.85e-6},
		{"CO₂", 4.17e-6, 4.45e-6}, {"H₂O", 5.0e-6, 7.5e-6}, {"CO₂", 13.5e-6, 17e-6},
	}
	HotGas = []GasBand{
		{"H₂O", 1.30e-6, 1.55e-6}, {"H₂O", 1.70e-6, 2.10e-6}, {"CO₂", 1.90e-6, 2.10e-6},
		{"H₂O", 2.30e-6, 3.57e-6}, {"CO₂", 2.63e-6, 3.28e-6}, {"CO₂", 4.04e-6, 5.06e-6},
		{"H₂O", 4.17e-6, 11.1e-6}, {"CO₂", 9.09e-6, 20e-6}, {"H₂O", 11e-6, 1000e-6},
	}
)

// Disturbing returns the stretches of a set that a band touches.
func Disturbing(set []GasBand, band *pyro.Band) []GasBand {
	lo, hi := band.Edges()
	var list []GasBand
	for _, g := range set {
		if hi >= g.Lo && lo <= g.Hi {
			list = append(list, g)
		}
	}
	return list
}
