package pyro

import "math"

// Defining constants of the SI (2019), exact.
const (
	PlanckConstant    = 6.62607015e-34 // h, J s
	SpeedOfLight      = 299792458.0    // c, m/s
	BoltzmannConstant = 1.380649e-23   // k, J/K
)

// Radiation constants, computed exactly by the compiler from the defining
// constants and rounded once.
const (
	// C1 = 2πhc², the first radiation constant, W m².
	C1 = 2 * math.Pi * PlanckConstant * SpeedOfLight * SpeedOfLight
	// C1L = 2hc², the first radiation constant for radiance, W m² sr⁻¹.
	C1L = 2 * PlanckConstant * SpeedOfLight * SpeedOfLight
	// C2 = hc/k, the second radiation constant, m K.
	C2 = PlanckConstant * SpeedOfLight / BoltzmannConstant
	// StefanBoltzmann σ = 2π⁵k⁴/(15h³c²), W m⁻² K⁻⁴.
	StefanBoltzmann = 2 * math.Pi * math.Pi * math.Pi * math.Pi * math.Pi *
		BoltzmannConstant * BoltzmannConstant * BoltzmannConstant * BoltzmannConstant /
		(15 * PlanckConstant * PlanckConstant * PlanckConstant * SpeedOfLight * SpeedOfLight)
	// WienWavelength b is λ_peak·T of spectral radiance per wavelength, m K:
	// c₂/x with x the root of x = 5(1 − e⁻ˣ).
	WienWavelength = C2 / 4.965114231744276303698759131322893944
	// WienFrequency b′ is ν_peak/T of spectral radiance per frequency, Hz/K:
	// x·k/h with x the root of x = 3(1 − e⁻ˣ).
	WienFrequency = 2.821439372122078893403191330294485195 * BoltzmannConstant / PlanckConstant
	// C2ITS90 is the second radiation constant that ITS-90 prescribes, m K
	// (Preston-Thomas, Metrologia 27 (1990) 3). It defines T₉₀ above the silver
	// point and is used for nothing else.
	C2ITS90 = 0.014388
)
