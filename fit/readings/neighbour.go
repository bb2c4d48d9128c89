package readings

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"candent/pyro"
)

// ErrNoise is what errors of NeighbourStd wrap.
var ErrNoise = errors.New("readings: noise from neighbours")

// minNeighbours is the least number of channels from which a noise is estimated.
const minNeighbours = 8

// NeighbourStd estimates the relative noise of a spectrum from its neighbours and writes
// the standard uncertainties, rel·signal, to dst. It returns rel.
//
// Three neighbours of a smooth spectrum give d = y₂ − interpolation of y₁ and y₃ in ln y
// over wavelength, which is free of the spectrum where ln y is straight over the three and
// has the variance rel²(1 + w₁² + w₃²), w the interpolation's weights. The scale is the
// median of |d| over its expected size, over 0.6745 (the median of |N(0,1)|). It sees the
// noise that is independent between channels, and nothing that they share; curvature of the
// spectrum adds to it. Declare a result that rests on it as such. At least 8 channels, all
// positive.
func NeighbourStd(dst []float64, λ []pyro.Wavelength, signal []float64) (rel float64, err error) {
	n := len(signal)
	if len(dst) != n || len(λ) != n || n < minNeighbours {
		return 0, fmt.Errorf("%w: %d channels: at least %d are needed", ErrNoise, n, minNeighbours)
	}
	size := make([]float64, 0, n-2)
	for i := 1; i+1 < n; i++ {
		if !(signal[i-1] > 0 && signal[i] > 0 && signal[i+1] > 0) {
			return 0, fmt.Errorf("%w: channel %d or a neighbour is not positive", ErrNoise, i)
		}
		span := float64(λ[i+1] - λ[i-1])
		if !(span > 0) {
			return 0, fmt.Errorf("%w: wavelengths do not rise at channel %d", ErrNoise, i)
		}
		w := float64(λ[i]-λ[i-1]) / span // weight of the later neighbour
		d := math.Log(signal[i]) - (1-w)*math.Log(signal[i-1]) - w*math.Log(signal[i+1])
		size = append(size, math.Abs(d)/math.Sqrt(1+w*w+(1-w)*(1-w)))
	}
	slices.Sort(size)
	rel = median(size) / 0.6744897501960817
	if !(rel > 0) {
		return 0, fmt.Errorf("%w: neighbours differ by nothing but a straight line: the readings are smoothed or rounded", ErrNoise)
	}
	for i, y := range signal {
		dst[i] = rel * y
	}
	return rel, nil
}

func median(sorted []float64) float64 {
	n := len(sorted)
	return (sorted[(n-1)/2] + sorted[n/2]) / 2
}
