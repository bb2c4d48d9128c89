package pyro_test

import (
	"fmt"
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

func TestFormsOfRadianceHaveSlopeAndInverse(t *testing.T) {
	// Slope: T·∂lnL/∂T is the same in every unit, n = x/(1 − e⁻ˣ), four decimals from the
	// formula. Inverse: u(lnL) of 4 ULP is worth 4 ULP/n ≤ 4 ULP of T; 8 for both ways.
	for _, r := range []struct{ t, um, n float64 }{
		{300, 0.65, 73.7834}, {300, 10, 4.8359}, {1000, 1, 14.3878}, {1000, 10, 1.8862}, {3000, 1, 4.8359},
	} {
		λ, T := pyro.Wavelength(r.um)*pyro.Micrometre, pyro.Temperature(r.t)
		for name, f := range map[string]struct {
			radiance, slope func(pyro.Wavelength, pyro.Temperature) float64
			inverse         func(pyro.Wavelength, float64) pyro.Temperature
		}{
			"per wavelength": {pyro.Radiance, pyro.RadianceSlope, pyro.RadianceTemperature},
			"per wavenumber": {pyro.RadiancePerWavenumber, pyro.RadiancePerWavenumberSlope, pyro.RadiancePerWavenumberTemperature},
			"photons":        {pyro.PhotonRadiance, pyro.PhotonRadianceSlope, pyro.PhotonRadianceTemperature},
		} {
			s := f.radiance(λ, T)
			if n := f.slope(λ, T) * r.t / s; math.Abs(n-r.n) > 0.5e-4 {
				t.Errorf("%s, %v, %v: n = %.6f, want %.4f", name, λ, T, n, r.n)
			}
			near(t, fmt.Sprintf("%s, %v: inverse at %v", name, λ, T), f.inverse(λ, s).Kelvin(), r.t, 8*0x1p-52)
			if f.inverse(λ, 0) != 0 || !math.IsNaN(float64(f.inverse(λ, -1))) {
				t.Errorf("%s: no radiance is not 0 K, or a negative one is a temperature", name)
			}
		}
	}
}

func TestWien(t *testing.T) {
	λ, T := 650*pyro.Nanometre, 2000*pyro.Kelvin
	// c₁Lλ⁻⁵ exp(−c₂/λT) written out.
	want := pyro.C1L / math.Pow(650e-9, 5) * math.Exp(-0.014387768775039338/(650e-9*2000))
	near(t, "Wien", pyro.WienRadiance(λ, T), want, 1e-14)
	near(t, "its error", pyro.WienError(λ, T), pyro.WienRadiance(λ, T)/pyro.Radiance(λ, T)-1, 1e-9)
}
