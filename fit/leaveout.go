package fit

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/emissivity"
)

// ErrLeaveOut is what errors wrap that say why there is no leave-one-out score.
var ErrLeaveOut = errors.New("fit: leave one out")

// LeaveOneOut returns, for each band that isn't masked, ln of the density that its reading has
// given all the other readings (S. Geisser, W. F. Eddy, A predictive approach to model selection,
// J. Am. Stat. Assoc. 74 (1979) 153, cited from memory); NaN for masked bands.
//
// For a family or a model the estimate without the channel predicts it: Gaussian about the model
// there, with the noise's variance and that of the estimate, or Student's where the noise's size
// is estimated. For a process it is the ratio of the evidences with the channel and without.
// Densities are in the readings' unit (behind detectors, in that of the radiance), and compare
// between surfaces by their differences.
//
// There is none (ErrLeaveOut) where the readings without a channel don't determine T, or a bound
// of the emissivity is active; with a covariance of the readings, a loss, or a bound as reading.
func (e *Estimator) LeaveOneOut(r Readings) ([]float64, error) {
	switch {
	case e.whiten != nil:
		return nil, fmt.Errorf("%w: the readings have a covariance", ErrLeaveOut)
	case e.assume.Loss.kind != square:
		return nil, fmt.Errorf("%w: a loss that bounds outliers has no density", ErrLeaveOut)
	case e.n < 2:
		return nil, fmt.Errorf("%w: one channel", ErrLeaveOut)
	}
	score := make([]float64, len(e.bands))
	for i := range score {
		score[i] = math.NaN()
	}
	w := e.NewWork()
	if err := w.load(r); err != nil {
		return nil, err
	}
	for _, side := range w.censored {
		if side != 0 {
			return nil, fmt.Errorf("%w: a reading is a bound", ErrLeaveOut)
		}
	}
	all := 0.0
	if e.process != nil {
		var err error
		if all, err = e.LogEvidence(r); err != nil {
			return nil, fmt.Errorf("%w: %w", ErrLeaveOut, err)
		}
	}
	for j, i := range e.used {
		rest, err := e.without(i)
		if err != nil {
			return nil, fmt.Errorf("%w: without channel %d: %w", ErrLeaveOut, i, err)
		}
		if e.process != nil {
			v, err := rest.LogEvidence(r)
			if err != nil {
				return nil, fmt.Errorf("%w: without channel %d: %w", ErrLeaveOut, i, err)
			}
			score[i] = all - v
			continue
		}
		if score[i], err = w.predict(rest, r, j); err != nil {
			return nil, fmt.Errorf("%w: without channel %d: %w", ErrLeaveOut, i, err)
		}
	}
	return score, nil
}

// without compiles the same assumptions for all channels but band i.
func (e *Estimator) without(i int) (*Estimator, error) {
	a := e.assume
	a.leave = i + 1
	switch {
	case e.process != nil:
		a.Emissivity = e.process.surface.AcceptWide()
	case e.model == nil:
		a.Emissivity = e.family // with its centre, of which its parameters count
	}
	return New(e.bands, a)
}

// predict returns ln of the density of channel j's reading under the estimate of the rest.
func (w *Work) predict(rest *Estimator, r Readings, j int) (float64, error) {
	e := w.e
	rw, res := rest.NewWork(), rest.NewResult()
	if err := rest.EstimateTo(res, rw, r); err != nil {
		return 0, err
	}
	if !res.hasCov {
		return 0, errors.New("the rest leaves a direction unfixed, or a bound of the emissivity is active")
	}
	columns, err := e.columnsIn(rest)
	if err != nil {
		return 0, err
	}
	if err := w.load(r); err != nil {
		return 0, err
	}
	ψ := make([]float64, e.p+e.q)
	copy(ψ, res.psi[:e.p])
	for k, c := range columns {
		if c >= 0 {
			ψ[e.p+k] = res.psi[e.p+c]
		}
	}
	w.evaluate(res.beta, ψ, true)
	size, small := e.size(), rest.size()
	row := w.jac[j*size : (j+1)*size]
	place := make([]int, size) // in the rest's covariance
	for a := range place {
		place[a] = a
		if a > e.p {
			if c := columns[a-e.p-1]; c >= 0 {
				place[a] = 1 + e.p + c
			} else {
				place[a] = -1
			}
		}
	}
	scale := 1.0
	unknown := e.assume.Noise.unknown
	if unknown {
		scale = res.chi2 / float64(res.dof)
	}
	variance := scale * w.variance(j, w.model[j])
	for a, f := range row {
		if place[a] < 0 { // an input of this channel alone: its prior
			variance += f * f
			continue
		}
		for b, g := range row {
			if place[b] >= 0 {
				variance += f * g * res.cov[place[a]*small+place[b]]
			}
		}
	}
	std := math.Sqrt(variance)
	if unknown {
		return distuv.StudentsT{Mu: w.model[j], Sigma: std, Nu: float64(res.dof)}.LogProb(w.signal[j]), nil
	}
	return distuv.Normal{Mu: w.model[j], Sigma: std}.LogProb(w.signal[j]), nil
}

// columnsIn returns for each shared unknown its place among those of the rest, −1 where it has
// none: an input of the channel that was left out.
func (e *Estimator) columnsIn(rest *Estimator) ([]int, error) {
	place := make([]int, e.q)
	at := map[string]int{}
	for k, c := range rest.sight.columns {
		if _, twice := at[c.name]; twice && rest.q != e.q {
			return nil, fmt.Errorf("two inputs are named %q", c.name)
		}
		at[c.name] = k
	}
	for k, c := range e.sight.columns {
		place[k] = k
		if rest.q == e.q {
			continue
		}
		i, ok := at[c.name]
		if !ok {
			i = -1
			if c.free {
				return nil, fmt.Errorf("%s has no prior", c.name)
			}
		}
		place[k] = i
	}
	return place, nil
}

// surfaceName tells surfaces apart in a table: a family with what is known of it.
func surfaceName(s emissivity.Surface) string {
	words := s.String()
	f, ok := s.(emissivity.Family)
	if !ok {
		return words
	}
	if f.IsRelative() {
		words += " of relative level"
	}
	for k, name := range f.Parameters() {
		switch p := f.Prior(k); {
		case p.Set && p.Std == 0:
			words += fmt.Sprintf(", %s %.3g", name, p.Value)
		case p.Set:
			words += fmt.Sprintf(", %s %.3g ± %.2g", name, p.Value, p.Std)
		}
	}
	for _, k := range f.KnownPoints() {
		words += fmt.Sprintf(", ε %.3g ± %.2g at %v", k.Value, k.Std, k.Wavelength)
	}
	return words
}
