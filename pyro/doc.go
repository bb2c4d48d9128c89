// Package pyro holds the quantities and closed forms of radiation thermometry: temperature
// and wavelength as types, the constants of the SI, Planck's law with its derivatives and its
// inverse per wavelength, per wavenumber and per photon, spectral bands, pairs of bands for
// ratio thermometry, and what an error of each setting is worth in kelvin, signed.
//
//	line, err := pyro.Line(650 * pyro.Nanometre)
//	if err != nil {
//		return err
//	}
//	t := line.RadianceTemperature(reading / emissivity) // W m⁻² sr⁻¹ m⁻¹
//	fmt.Printf("%.1f °C\n", t.Celsius())
//
// # What it does not do
//
// It does no fitting: temperature and emissivity from several bands with their uncertainties
// are the job of package fit. It knows no air: wavelengths are those in vacuum, the refractive
// index is 1. It defines no scale: T is thermodynamic, and C2ITS90 serves comparison with T₉₀
// only. An emissivity is taken as given, and a reading that a window, a flame or hot walls
// have changed must be set right first. No reading is a safety interlock.
//
// # Symbols
//
//	λ    wavelength in vacuum, m            Wavelength
//	ν̃    wavenumber 1/λ, m⁻¹                (printed in cm⁻¹)
//	T    thermodynamic temperature, K       Temperature
//	v    1/T, K⁻¹
//	L    spectral radiance, W m⁻² sr⁻¹ m⁻¹  Radiance
//	L_ν̃  the same per wavenumber,           RadiancePerWavenumber
//	     W m⁻² sr⁻¹ (m⁻¹)⁻¹
//	L_q  spectral photon radiance,          PhotonRadiance
//	     s⁻¹ m⁻² sr⁻¹ m⁻¹
//	M    exitance σT⁴, W m⁻²                Exitance
//	F    fraction of M below λ, 1           Fraction
//	R    responsivity of a band per watt    Band
//	S    mean spectral radiance that a      Band.Radiance
//	     band sees, W m⁻² sr⁻¹ m⁻¹
//	Q    S_short/S_long, 1                  Pair.Ratio
//	ε    emissivity, 1
//	ε_r  emissivity ratio ε_short/ε_long, 1
//	Λ    effective wavelength of a ratio    Pair.EffectiveWavelength
//	x    c₂/(λT), 1
//	n    ∂lnL/∂lnT = x/(1 − e⁻ˣ), 1         LogSlope
//	u    standard uncertainty
//	c₁L  2hc², W m² sr⁻¹                    C1L
//	c₂   hc/k, m K                          C2
//	σ    constant of Stefan and Boltzmann,  StefanBoltzmann
//	     W m⁻² K⁻⁴
//	b    λT at the peak of L, m K           WienWavelength
//
// Temperature differences and uncertainties are plain float64 values in kelvin; they are
// never converted with the 273.15 offset.
//
// # Errors and concurrency
//
// Descriptions (bands, pairs, curves, inputs) are checked when they are made and their errors
// wrap a sentinel of this package. The closed forms never panic; for positive finite
// arguments they give a number or the limit 0 or +Inf, never NaN. All functions are pure, and
// all types are immutable once made and safe for concurrent use.
package pyro
