package sightline

import (
	"fmt"
	"math"

	"candent/pyro"
)

// Layer is something that the light passes on its way: a window, its fouling, furnace gas, a
// flame. It takes a radiance L to τL + αL(λ,T), with
//
//	τ(λ) = t·shape(λ)·(λ/λref)^slope·exp(−k(λ)·length)
//
// and α its emittance, 1 − τ where nothing is reflected. What a layer lacks is nil and counts
// as 1, or 0 for the slope and the depth.
type Layer struct {
	Name          string
	Transmittance *pyro.Input   // t, above 0 to 1
	Shape         pyro.Spectrum // above 0 to 1
	Slope         *pyro.Input   // with Reference, λref
	Reference     pyro.Wavelength
	Depth         pyro.Spectrum // k, 1/m; the user's coefficients at the layer's temperature
	Length        *pyro.Input   // m
	Temperature   *pyro.Input   // K, of its own emission; nil: it is cold and emits nothing
	Emittance     *pyro.Input   // of its own emission; nil: 1 − τ, as of a layer that reflects nothing
}

// Window is a pane of known transmittance. What it doesn't transmit it mostly reflects, so
// it emits only where it is given an Emittance and a Temperature.
func Window(transmittance *pyro.Input) Layer {
	return Layer{Name: "window", Transmittance: transmittance}
}

// Measured returns the transmittance that a pair of readings of the same steady target gives,
// behind the pane and without it (or before and after cleaning), with its standard
// uncertainty. Both readings are net of the dark level.
func Measured(behind, behindStd, clear, clearStd float64) (*pyro.Input, error) {
	τ := behind / clear
	if !(behind > 0) || !(clear > 0) || !(τ <= 1) || !(behindStd >= 0) || !(clearStd >= 0) {
		return nil, fmt.Errorf("%w: readings %g ± %g behind the pane and %g ± %g without: both must be positive, the second the larger", ErrSightline, behind, behindStd, clear, clearStd)
	}
	return &pyro.Input{Name: "window transmittance", Value: τ, Std: τ * math.Hypot(behindStd/behind, clearStd/clear)}, nil
}

// Fouling is dust or soot on a pane: transmittance t at λref, ∝ λ^slope from there. Soot and
// fine dust take more at short waves (slope above 0), by an amount that is seldom known: give
// it a standard uncertainty. A ratio does not cancel it. Grey fouling can't be told from
// emissivity without a reference event; give t the uncertainty +Inf and only the product is
// found.
func Fouling(transmittance, slope *pyro.Input, reference pyro.Wavelength) Layer {
	return Layer{Name: "fouling", Transmittance: transmittance, Slope: slope, Reference: reference}
}

// Gas is a path through absorbing gas by the law of Beer and Lambert, at one temperature.
// The law holds for coefficients that are smooth over the band; for band means of line
// spectra it gives too much absorption.
func Gas(coefficient pyro.Spectrum, length, temperature *pyro.Input) Layer {
	return Layer{Name: "gas", Depth: coefficient, Length: length, Temperature: temperature}
}

// Soot is a luminous flame in front of the target: τ = exp(−KL/(λ/µm)^α) (H. C. Hottel,
// F. P. Broughton, Determination of true temperature and total radiation from luminous gas
// flames, Ind. Eng. Chem. Anal. Ed. 4 (1932) 166). kl is KL; α is fixed here: about 1.39 in
// the visible, 0.95 beyond 0.8 µm (the latter from memory).
func Soot(kl *pyro.Input, α float64, temperature *pyro.Input) Layer {
	return Layer{Name: "soot", Depth: sootDepth(α), Length: kl, Temperature: temperature}
}

type sootDepth float64

func (α sootDepth) At(λ pyro.Wavelength) float64 { return math.Pow(λ.Micrometres(), -float64(α)) }

// At returns the layer's transmittance and emittance at λ. The emittance is 0 where the
// layer has no temperature.
func (l *Layer) At(λ pyro.Wavelength, v Value) (transmittance, emittance float64) {
	τ := v.or(l.Transmittance, 1)
	if l.Shape != nil {
		τ *= l.Shape.At(λ)
	}
	if l.Slope != nil {
		τ *= math.Pow(float64(λ/l.Reference), v(l.Slope))
	}
	if l.Depth != nil {
		τ *= math.Exp(-l.Depth.At(λ) * v(l.Length))
	}
	switch {
	case l.Temperature == nil:
		return τ, 0
	case l.Emittance != nil:
		return τ, v(l.Emittance)
	}
	return τ, 1 - τ
}

// Check refuses what can't be a layer over the bands at λ.
func (l *Layer) Check(λ ...pyro.Wavelength) error {
	if l.Transmittance != nil {
		if err := checkFraction("the transmittance of "+l.Name, l.Transmittance, true); err != nil {
			return err
		}
	}
	if l.Slope != nil {
		if err := l.Slope.Check(); err != nil {
			return fmt.Errorf("%w: %s: %w", ErrSightline, l.Name, err)
		}
		if !(l.Reference > 0) {
			return fmt.Errorf("%w: %s: a slope needs the wavelength at which the transmittance is that given", ErrSightline, l.Name)
		}
	}
	if (l.Depth == nil) != (l.Length == nil) {
		return fmt.Errorf("%w: %s: an absorption coefficient goes with a length", ErrSightline, l.Name)
	}
	if l.Length != nil {
		if err := l.Length.Check(); err != nil {
			return fmt.Errorf("%w: %s: %w", ErrSightline, l.Name, err)
		}
		if l.Length.Value < 0 {
			return fmt.Errorf("%w: %s: length %g", ErrSightline, l.Name, l.Length.Value)
		}
	}
	if l.Emittance != nil {
		if l.Temperature == nil {
			return fmt.Errorf("%w: %s: an emittance goes with a temperature", ErrSightline, l.Name)
		}
		if err := checkFraction("the emittance of "+l.Name, l.Emittance, false); err != nil {
			return err
		}
	}
	if l.Temperature != nil {
		if err := checkTemperature(l.Name, l.Temperature); err != nil {
			return err
		}
	}
	for _, λ := range λ {
		if err := checkSpectrum("transmittance", l.Name, l.Shape, λ, 1e-12, 1); err != nil {
			return err
		}
		if err := checkSpectrum("absorption coefficient", l.Name, l.Depth, λ, 0, 1e30); err != nil {
			return err
		}
		τ, α := l.At(λ, Nominal)
		if !(τ > 0) || τ > 1 {
			return fmt.Errorf("%w: %s: transmittance %g at %v is outside (0, 1]", ErrSightline, l.Name, τ, λ)
		}
		if τ+α > 1+1e-12 {
			return fmt.Errorf("%w: %s: transmittance %g and emittance %g at %v exceed 1 together", ErrSightline, l.Name, τ, α, λ)
		}
	}
	return nil
}
