package fit

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/pyro"
)

// DiagnoseTo is the step after EstimateTo and IntervalTo for the same reading: the budget
// of u(T), and what the residuals say against the assumptions.
func (e *Estimator) DiagnoseTo(dst *Result, w *Work, r Readings) error {
	if err := w.load(r); err != nil {
		return err
	}
	dst.notes, dst.discrepancy = dst.notes[:0], nil
	if e.process != nil {
		return e.diagnosePosterior(dst, w)
	}
	if e.deficient != "" {
		dst.note("%s", e.deficient)
	}
	if !dst.fitted {
		return nil
	}
	dst.describe(w)
	if dst.hasCov {
		dst.fillShares(w)
	}
	dst.scaleSigma()
	if dst.basins[0].atBound {
		dst.note("a bound of the emissivity is active: the interval is right, a standard uncertainty would not be")
	}
	if n := dst.inside(); n > 1 {
		dst.note("%d temperatures explain the readings; the one with the least χ² need not be the true one", n)
	}
	if dst.basins[0].atEnd {
		dst.note("χ² is least at an end of the temperature range")
	}
	if dst.dof == 0 {
		dst.note("as many parameters as readings: nothing is left to test the %v by", e.assume.Emissivity)
	}
	dst.noteSight(w)
	dst.noteLackOfFit()
	dst.noteStructure()
	if dst.contradicted() {
		dst.carryDiscrepancy(w, r)
	}
	return nil
}

func (r *Result) note(format string, args ...any) {
	r.notes = append(r.notes, fmt.Sprintf(format, args...))
}

// describe fills the model and the σ of the channels at the estimate.
func (r *Result) describe(w *Work) {
	e := r.e
	r.described = true
	w.evaluate(r.beta, r.psi, true)
	copy(r.model, w.model)
	for j, m := range r.model {
		if e.whiten == nil {
			r.sigma[j] = math.Sqrt(w.variance(j, m))
		} else {
			r.sigma[j] = math.Sqrt(e.assume.Noise.cov[e.used[j]*(len(e.bands)+1)])
		}
	}
}

// scaleSigma gives σ the size that the residuals show, where it is unknown beforehand.
func (r *Result) scaleSigma() {
	if !r.e.assume.Noise.unknown || r.dof < 1 {
		return
	}
	f := math.Sqrt(r.chi2 / float64(r.dof))
	for j := range r.sigma {
		r.sigma[j] *= f
	}
}

// lackOfFit is the probability of a larger χ² below which a family counts as contradicted.
const lackOfFit = 0.001

// contradicted reports whether χ² is larger than the assumptions leave likely.
func (r *Result) contradicted() bool {
	if !r.fitted || r.dof < 1 || r.e.assume.Noise.unknown || r.e.assume.Loss.kind != square {
		return false
	}
	return distuv.ChiSquared{K: float64(r.dof)}.Survival(r.chi2) < lackOfFit
}

func (r *Result) noteLackOfFit() {
	if r.contradicted() {
		r.note("the readings contradict the assumptions (%v, %v): χ² = %.3g on %d degrees of freedom; the interval holds only if they are right", r.e.assume.Emissivity, r.e.assume.Noise, r.chi2, r.dof)
	}
}

// noteStructure looks for runs of one sign, for single channels far above the fit, and
// for a fringe, in the residuals in units of their σ.
func (r *Result) noteStructure() {
	e := r.e
	if e.n < 12 || e.whiten != nil || r.dof < 1 {
		return
	}
	if !(r.chi2 > 0) {
		return
	}
	z := make([]float64, e.n)
	λ := make([]float64, e.n)
	for j, i := range e.used {
		z[j] = (r.signal[j] - r.model[j]) / r.sigma[j]
		λ[j] = float64(e.bands[i].Mean())
	}
	r.noteRuns(z)
	r.notePeaks(z, λ)
	r.noteFringe(z, λ)
}

// noteRuns counts runs of one sign along the channels (A. Wald, J. Wolfowitz, On a test
// whether two samples are from the same population, Ann. Math. Stat. 11 (1940) 147).
func (r *Result) noteRuns(z []float64) {
	up, runs := 0.0, 1.0
	for j, v := range z {
		if v > 0 {
			up++
		}
		if j > 0 && (v > 0) != (z[j-1] > 0) {
			runs++
		}
	}
	n := float64(len(z))
	down := n - up
	mean := 1 + 2*up*down/n
	variance := (mean - 1) * (mean - 2) / (n - 1)
	if variance > 0 && (runs-mean)/math.Sqrt(variance) < -3.3 {
		r.note("the residuals keep their sign over long stretches of wavelength: the surface does not follow the %v", r.e.assume.Emissivity)
	}
}

// peakLimit is what a residual in units of σ exceeds by chance in one spectrum of n channels
// out of 2000. Where σ comes from the residuals, the channel looked at is left out of it: with
// ν degrees of freedom, z·√((ν−1)/(ν−z²)) has Student's distribution with ν − 1.
func (r *Result) peakLimit(n int) float64 {
	p := 1 - 0.0005/float64(n)
	if !r.e.assume.Noise.unknown {
		return distuv.UnitNormal.Quantile(p)
	}
	ν := float64(r.dof)
	if ν < 2 {
		return math.Inf(1)
	}
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: ν - 1}.Quantile(p)
	return t * math.Sqrt(ν/(ν-1+t*t))
}

// notePeaks names single channels far above the fit: an emission line.
func (r *Result) notePeaks(z, λ []float64) {
	limit := r.peakLimit(len(z))
	for j, v := range z {
		before, after := 0.0, 0.0
		if j > 0 {
			before = z[j-1]
		}
		if j+1 < len(z) {
			after = z[j+1]
		}
		if v < limit || v < 2*math.Max(before, after) {
			continue
		}
		name := ""
		for _, masks := range [][]Mask{Sodium, Lithium, Potassium, Rubidium} {
			for _, m := range masks {
				if λ[j] >= float64(m.Lo) && λ[j] <= float64(m.Hi) {
					name = ", where " + m.Name + " emits"
				}
			}
		}
		r.note("channel %d (%v) lies %.1f σ above the fit%s: an emission line? Mask it", r.e.used[j], pyro.Wavelength(λ[j]), v, name)
	}
}

// noteFringe looks for a residual periodic in 1/λ by the periodogram whose power, under no
// fringe, is exponentially distributed with mean 1 wherever the channels lie (J. D. Scargle,
// Studies in astronomical time series analysis II, Astrophys. J. 263 (1982) 835, cited from
// memory): with φ counted from the phase at which cosine and sine are orthogonal,
//
//	P = ½ ( (Σ z cos φ)²/Σ cos² φ + (Σ z sin φ)²/Σ sin² φ ) / σ²
func (r *Result) noteFringe(z, λ []float64) {
	n := len(z)
	lo, hi := math.Inf(1), 0.0
	for _, l := range λ {
		lo, hi = math.Min(lo, 1/l), math.Max(hi, 1/l)
	}
	variance := 0.0
	for _, v := range z {
		variance += v * v / float64(n)
	}
	if !(hi > lo) || variance == 0 {
		return
	}
	best, at := 0.0, 0
	trials := n/2 - 2
	for k := 3; k < 3+trials; k++ { // fewer than three periods may be the family's curvature
		ω := 2 * math.Pi * float64(k) / (hi - lo)
		c2, s2 := 0.0, 0.0
		for _, l := range λ {
			sin, cos := math.Sincos(2 * ω * (1/l - lo))
			c2 += cos
			s2 += sin
		}
		phase := math.Atan2(s2, c2) / 2
		var c, s, cc, ss float64
		for j, v := range z {
			sin, cos := math.Sincos(ω*(1/λ[j]-lo) - phase)
			c += v * cos
			s += v * sin
			cc += cos * cos
			ss += sin * sin
		}
		p := c * c / cc   // cc ≥ n/2 ≥ ss by the choice of phase
		if ss > 1e-6*cc { // else the sine is zero at every channel
			p += s * s / ss
		}
		if p /= 2 * variance; p > best {
			best, at = p, k
		}
	}
	if float64(max(trials, 1))*math.Exp(-best) < 0.0005 {
		// 2·n·d·Δ(1/λ) = 1 for a film of optical thickness n·d
		r.note("the residuals show a fringe of %d periods over the spectrum: a film of optical thickness %.2g µm, or an etalon in the path", at, float64(at)/(2*(hi-lo))*1e6)
	}
}
