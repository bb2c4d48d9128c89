package pyro_test

import (
	"math"
	"testing"

	"candent/pyro"
)

func TestPhotonRadianceAgainstPublishedPeak(t *testing.T) {
	// The photon radiance per wavelength peaks at λT = 3.6697028650500742665e-3 m K
	// (50-digit arithmetic): it is lower by the same amount at both sides of it.
	const peak = 3.6697028650500742665e-3
	λ := func(f float64) pyro.Wavelength { return pyro.Wavelength(peak / 2000 * f) }
	at := pyro.PhotonRadiance(λ(1), 2000)
	lo, hi := pyro.PhotonRadiance(λ(1-1e-4), 2000), pyro.PhotonRadiance(λ(1+1e-4), 2000)
	if !(lo < at && hi < at) || math.Abs(lo-hi) > 1e-3*(at-lo) {
		t.Errorf("photon radiance %.12g at its peak, %.12g and %.12g beside it", at, lo, hi)
	}
}

func TestPhotonExitance(t *testing.T) {
	// Integrated over all wavelengths, π times the photon radiance is 1.5204608593931362113e15·T³
	// s⁻¹ m⁻² (4πζ(3)k³/(h³c²), 50-digit arithmetic). Substituting λ = eᵘ makes the
	// trapezoidal rule converge exponentially.
	const T = 1500.0
	sum, step := 0.0, 0.02
	for u := math.Log(1e-7); u < math.Log(1e-1); u += step {
		l := math.Exp(u)
		sum += pyro.PhotonRadiance(pyro.Wavelength(l), T) * l * step
	}
	near(t, "photon exitance", math.Pi*sum, 1.5204608593931362113e15*T*T*T, 1e-8)
}

func TestRadiancePerWavenumberIntegratesToExitance(t *testing.T) {
	const T = 1500.0
	sum, step := 0.0, 0.02
	for u := math.Log(1e-7); u < 0; u += step {
		l := math.Exp(u)
		sum += pyro.RadiancePerWavenumber(pyro.Wavelength(l), T) / l * step // dν̃ = ν̃ du
	}
	near(t, "exitance", math.Pi*sum, 5.670374419184429454e-8*T*T*T*T, 1e-10)
}

func TestWien(t *testing.T) {
	λ, T := 650*pyro.Nanometre, 2000*pyro.Kelvin
	// c₁Lλ⁻⁵ exp(−c₂/λT) written out.
	want := pyro.C1L / math.Pow(650e-9, 5) * math.Exp(-0.014387768775039338/(650e-9*2000))
	near(t, "Wien", pyro.WienRadiance(λ, T), want, 1e-14)
	near(t, "its error", pyro.WienError(λ, T), pyro.WienRadiance(λ, T)/pyro.Radiance(λ, T)-1, 1e-9)
}
