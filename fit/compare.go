package fit

import (
	"errors"
	"fmt"
	"math"
	"strings"
	"text/tabwriter"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/emissivity"
	"candent/pyro"
)

// Score is a number that a surface may not have; Why says so in words.
type Score struct {
	Value float64
	OK    bool
	Why   string
}

func scoreOf(v float64, err error) Score {
	switch {
	case err != nil:
		why := err.Error()
		for _, sentinel := range []error{ErrEvidence, ErrLeaveOut} {
			why = strings.TrimPrefix(why, sentinel.Error()+": ")
		}
		return Score{Why: why}
	case math.IsNaN(v) || math.IsInf(v, 0):
		return Score{Why: "it is beyond all numbers"}
	}
	return Score{Value: v, OK: true}
}

// Compared is one surface on the readings. Where it can't be estimated, Err says why and the
// rest is empty.
type Compared struct {
	Surface emissivity.Surface
	Name    string
	Err     error
	Result  *Result

	ChiSquared float64
	Freedom    int
	Parameters int // fitted: T where it is free, those of the family, the noise's size
	// AICc and BIC, least best, differ between families by
	//
	//	AICc = D + 2k + 2k(k+1)/(n−k−1),  BIC = D + k ln n
	//
	// n channels, k parameters, D = χ² where the size of the noise is known and n ln(χ²/n) where
	// it isn't (C. M. Hurvich, C.-L. Tsai, Biometrika 76 (1989) 297; G. Schwarz, Ann. Stat. 6
	// (1978) 461; both cited from memory). Parameters with priors count in full: then the
	// evidence is the better measure. A process has neither.
	AICc, BIC   Score
	LogEvidence Score // Estimator.LogEvidence, greatest best
	LeaveOneOut Score // sum of Estimator.LeaveOneOut over the channels, greatest best
	Weight      float64

	channels []float64 // of LeaveOneOut
}

// Measure is what a comparison's weights rest on.
type Measure int

const (
	// ByNothing: the surfaces have no measure in common; weights are 0.
	ByNothing Measure = iota
	// ByEvidence: weights are posterior probabilities, the surfaces equally likely beforehand.
	ByEvidence
	// ByAICc: Akaike's weights, ∝ exp(−AICc/2).
	ByAICc
	// ByLeaveOneOut: weights ∝ exp of the leave-one-out score.
	ByLeaveOneOut
)

func (m Measure) String() string {
	return [...]string{"nothing", "evidence", "AICc", "leave-one-out score"}[m]
}

// Comparison is what Compare found, in the order of the surfaces.
type Comparison struct {
	Surfaces []Compared
	Measure  Measure
	p        float64
}

// ErrCompare is what the errors of Compare wrap.
var ErrCompare = errors.New("fit: compare")

// Compare estimates the same readings under each of the surfaces, the other assumptions (those
// of a but for its Emissivity) being the same, and says how well each describes them. Weights
// rest on the evidence where every surface that can be estimated has one, or where a process is
// among them (a family without priors then has no weight: a process is cautious on purpose, and
// every other score counts that against it); else on AICc, else on the leave-one-out score. It is an error where not one can be estimated.
//
// None of these measures is one of the temperature's error: a curve that is free to follow the
// readings follows them at wrong temperatures too.
func Compare(bands []*pyro.Band, a Assume, surfaces []emissivity.Surface, r Readings) (*Comparison, error) {
	if len(surfaces) == 0 {
		return nil, fmt.Errorf("%w: no surfaces", ErrCompare)
	}
	c := &Comparison{p: a.Probability}
	if c.p == 0 {
		c.p = 0.95
	}
	var errs []error
	for i, s := range surfaces {
		if s == nil {
			return nil, fmt.Errorf("%w: surface %d is nil", ErrCompare, i)
		}
		row := Compared{Surface: s, Name: surfaceName(s)}
		a.Emissivity = s
		if row.Err = row.estimate(bands, a, r); row.Err != nil {
			errs = append(errs, fmt.Errorf("%s: %w", row.Name, row.Err))
		}
		c.Surfaces = append(c.Surfaces, row)
	}
	if len(errs) == len(surfaces) {
		return nil, fmt.Errorf("%w: %w", ErrCompare, errors.Join(errs...))
	}
	c.weigh()
	return c, nil
}

func (row *Compared) estimate(bands []*pyro.Band, a Assume, r Readings) error {
	e, err := New(bands, a)
	if err != nil {
		return err
	}
	if row.Result, err = e.Estimate(r); err != nil {
		row.Result = nil
		return err
	}
	row.ChiSquared, row.Freedom = row.Result.ChiSquared()
	row.LogEvidence = scoreOf(e.LogEvidence(r))
	var sum float64
	row.channels, err = e.LeaveOneOut(r)
	for _, i := range e.used {
		if err == nil {
			sum += row.channels[i]
		}
	}
	row.LeaveOneOut = scoreOf(sum, err)
	e.penalise(row)
	return nil
}

// penalise fills AICc and BIC.
func (e *Estimator) penalise(row *Compared) {
	if e.process != nil {
		why := Score{Why: "a process has no count of parameters"}
		row.AICc, row.BIC = why, why
		return
	}
	k := len(e.freeParameters())
	if e.assume.Temperature.Value == 0 || e.assume.Temperature.StdK > 0 {
		k++
	}
	n := float64(e.n)
	deviance := row.ChiSquared
	if e.assume.Noise.unknown {
		k++
		deviance = n * math.Log(row.ChiSquared/n)
	}
	row.Parameters = k
	if e.assume.Loss.kind != square {
		why := Score{Why: "a loss that bounds outliers is no likelihood"}
		row.AICc, row.BIC = why, why
		return
	}
	f := float64(k)
	row.BIC = scoreOf(deviance+f*math.Log(n), nil)
	if n-f-1 <= 0 {
		row.AICc = Score{Why: fmt.Sprintf("%d channels are too few for %d parameters", e.n, k)}
		return
	}
	row.AICc = scoreOf(deviance+2*f+2*f*(f+1)/(n-f-1), nil)
}

// merit returns the surface's measure in units of ln of a likelihood, greatest best.
func (row *Compared) merit(m Measure) (float64, bool) {
	switch m {
	case ByEvidence:
		return row.LogEvidence.Value, row.LogEvidence.OK
	case ByAICc:
		return -row.AICc.Value / 2, row.AICc.OK
	case ByLeaveOneOut:
		return row.LeaveOneOut.Value, row.LeaveOneOut.OK
	}
	return 0, false
}

// weigh picks the measure and fills the weights.
func (c *Comparison) weigh() {
	cautious := false // a process is among them
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		cautious = cautious || row.Err == nil && row.Result.posterior != nil
	}
	for _, m := range []Measure{ByEvidence, ByAICc, ByLeaveOneOut} {
		all, most := true, math.Inf(-1)
		for i := range c.Surfaces {
			if row := &c.Surfaces[i]; row.Err == nil {
				if v, ok := row.merit(m); ok {
					most = max(most, v)
				} else {
					all = false
				}
			}
		}
		if !all && !(m == ByEvidence && cautious) || math.IsInf(most, -1) {
			continue
		}
		c.Measure = m
		total := 0.0
		for i := range c.Surfaces {
			if row := &c.Surfaces[i]; row.Err == nil {
				if v, ok := row.merit(m); ok {
					row.Weight = math.Exp(v - most)
					total += row.Weight
				}
			}
		}
		for i := range c.Surfaces {
			c.Surfaces[i].Weight /= total
		}
		return
	}
}

// Averaged is the temperature over the surfaces by their weights.
type Averaged struct {
	Temperature pyro.Temperature
	StdK        float64 // √(within² + between²)
	WithinK     float64 // what the surfaces' own uncertainties bring
	BetweenK    float64 // what their temperatures' disagreement brings
	Interval    Interval
}

// leastShare is the weight below which a surface doesn't keep the others from being averaged.
const leastShare = 1e-3

// Average returns the temperature averaged over the surfaces,
//
//	T = Σ wT_i,  u² = Σ w u_i² + Σ w (T_i − T)²
//
// and the central interval of the mixture of normals of which these are the moments. A surface
// that the readings contradict enters with its discrepancy, where one was found. ok is false
// where there are no weights, or where a surface of some weight (a thousandth) doesn't determine
// the temperature.
func (c *Comparison) Average() (a Averaged, ok bool) {
	if c.Measure == ByNothing {
		return a, false
	}
	var w, t, u []float64
	total := 0.0
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		if row.Err != nil || row.Weight < leastShare {
			continue
		}
		T, std, ok := row.centre()
		if !ok {
			return a, false
		}
		w, t, u = append(w, row.Weight), append(t, T), append(u, std)
		total += row.Weight
	}
	mean := 0.0
	for i := range w {
		w[i] /= total
		mean += w[i] * t[i]
	}
	within, between := 0.0, 0.0
	for i := range w {
		within += w[i] * u[i] * u[i]
		between += w[i] * (t[i] - mean) * (t[i] - mean)
	}
	a = Averaged{Temperature: pyro.Temperature(mean), StdK: math.Sqrt(within + between), WithinK: math.Sqrt(within), BetweenK: math.Sqrt(between)}
	quantile := func(p float64) pyro.Temperature {
		lo, hi := math.Inf(1), math.Inf(-1)
		for i := range w {
			lo, hi = min(lo, t[i]-40*u[i]), max(hi, t[i]+40*u[i])
		}
		for range 100 {
			m := (lo + hi) / 2
			below := 0.0
			for i := range w {
				below += w[i] * math.Erfc((t[i]-m)/u[i]/math.Sqrt2) / 2
			}
			if below < p {
				lo = m
			} else {
				hi = m
			}
		}
		return pyro.Temperature((lo + hi) / 2)
	}
	a.Interval = Interval{Probability: c.p, Low: quantile((1 - c.p) / 2), High: quantile((1 + c.p) / 2)}
	return a, true
}

// centre returns a temperature and a standard uncertainty: the result's, with its discrepancy
// where it has one, or those of the interval.
func (row *Compared) centre() (t, u float64, ok bool) {
	T, state := row.Result.Temperature()
	if state != Determined {
		return 0, 0, false
	}
	u, has := row.Result.Uncertainty()
	iv, _ := row.Result.Interval()
	if d, ok := row.Result.Discrepancy(); ok {
		if d.Interval.LowOpen || d.Interval.HighOpen {
			return 0, 0, false
		}
		T, u, has, iv = d.Temperature, d.StdK, d.StdK > 0, d.Interval
	}
	if has && u > 0 {
		return float64(T), u, true
	}
	u = float64(iv.High-iv.Low) / 2 / distuv.UnitNormal.Quantile((1+iv.Probability)/2)
	return float64(iv.Low+iv.High) / 2, u, u > 0
}

// decisive is the difference of ln likelihoods from which surfaces count as told apart: odds of
// twenty to one (R. E. Kass, A. E. Raftery, Bayes factors, J. Am. Stat. Assoc. 90 (1995) 773,
// who call that strong; cited from memory). By the leave-one-out score, besides, two standard
// errors of the difference, from its scatter over the channels.
const decisive = 3

// apart reports whether the measure tells surface b from the better one a, or the readings
// contradict b alone.
func (c *Comparison) apart(a, b *Compared) bool {
	if b.Result.contradicted() && !a.Result.contradicted() {
		return true
	}
	va, _ := a.merit(c.Measure)
	vb, _ := b.merit(c.Measure)
	if va-vb < decisive {
		return false
	}
	if c.Measure != ByLeaveOneOut {
		return true
	}
	n, sum, squares := 0.0, 0.0, 0.0
	for i, v := range a.channels {
		if d := v - b.channels[i]; !math.IsNaN(d) {
			n, sum, squares = n+1, sum+d, squares+d*d
		}
	}
	return sum > 2*math.Sqrt(n*(squares-sum*sum/n)/(n-1))
}

// Verdict says in one sentence whether the readings can tell the surfaces apart.
func (c *Comparison) Verdict() string {
	var best *Compared
	contradicted := 0
	count := 0
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		if row.Err != nil {
			continue
		}
		count++
		if row.Result.contradicted() {
			contradicted++
		}
		if v, ok := row.merit(c.Measure); ok {
			if best == nil {
				best = row
			} else if w, _ := best.merit(c.Measure); v > w {
				best = row
			}
		}
	}
	end := "."
	switch {
	case contradicted == count && count == 1:
		end = ", and the readings contradict it."
	case contradicted == count:
		end = ", and the readings contradict every one."
	case best != nil && best.Result.contradicted():
		end = ", though the readings contradict even that one."
	}
	switch {
	case count == 1:
		return "One surface alone could be estimated" + end
	case best == nil:
		return "The surfaces have no measure in common by which the readings could tell them apart" + end
	}
	var same, other, without []string
	low, high := math.Inf(1), math.Inf(-1)
	gap := math.Inf(1)
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		if row.Err != nil {
			continue
		}
		if _, ok := row.merit(c.Measure); !ok {
			without = append(without, row.Name)
			continue
		}
		if row != best && c.apart(best, row) {
			other = append(other, row.Name)
			vb, _ := best.merit(c.Measure)
			v, _ := row.merit(c.Measure)
			gap = min(gap, vb-v)
			continue
		}
		same = append(same, row.Name)
		if t, _, ok := row.centre(); ok {
			low, high = min(low, t), max(high, t)
		}
	}
	if len(without) > 0 {
		end += fmt.Sprintf(" Beside them %s can't be weighed, for want of priors; what the readings say against a family is its χ².", listed(without))
	}
	by := fmt.Sprintf("by the %v", c.Measure)
	if c.Measure == ByAICc {
		by = "by AICc"
	}
	if len(same) == 1 && len(other) == 0 {
		return fmt.Sprintf("%s alone has the measure to be weighed by (%s)%s", same[0], by, end)
	}
	if len(same) == 1 {
		return fmt.Sprintf("The readings tell the surfaces apart: %s describes them better than %s (%s, with %.3g in the ln of a likelihood, where %d are odds of twenty to one)%s", same[0], listed(other), by, gap, decisive, end)
	}
	differ := ""
	if high > low {
		differ = fmt.Sprintf(", whose temperatures differ by up to %.3g K", high-low)
	}
	s := fmt.Sprintf("The readings can't tell apart %s%s", listed(same), differ)
	if len(other) > 0 {
		s += fmt.Sprintf("; they speak against %s", listed(other))
	}
	return s + " (" + by + ")" + end
}

func listed(names []string) string {
	if len(names) == 1 {
		return names[0]
	}
	return strings.Join(names[:len(names)-1], "; ") + " and " + names[len(names)-1]
}

// String prints a table for a person.
func (c *Comparison) String() string {
	var b strings.Builder
	t := tabwriter.NewWriter(&b, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "surface\tT/K\t%.4g %% interval/K\tχ² (dof)\tAICc\tBIC\tln evidence\tleave-one-out\tweight\n", 100*c.p)
	reasons := map[string][]string{}
	var order []string
	show := func(row *Compared, what string, s Score) string {
		if s.OK {
			return fmt.Sprintf("%.2f", s.Value)
		}
		words := what + ": " + s.Why
		if reasons[words] == nil {
			order = append(order, words)
		}
		reasons[words] = append(reasons[words], row.Name)
		return "–"
	}
	for i := range c.Surfaces {
		row := &c.Surfaces[i]
		if row.Err != nil {
			fmt.Fprintf(t, "%s\t–\tnot estimated\t–\t–\t–\t–\t–\t–\n", row.Name)
			continue
		}
		T, interval := "–", "open"
		if v, state := row.Result.Temperature(); state == Determined {
			T = fmt.Sprintf("%.1f", float64(v))
		}
		if iv, ok := row.Result.Interval(); ok {
			lo, hi := fmt.Sprintf("%.1f", float64(iv.Low)), fmt.Sprintf("%.1f", float64(iv.High))
			if iv.LowOpen {
				lo = "open"
			}
			if iv.HighOpen {
				hi = "open"
			}
			interval = lo + " to " + hi
		}
		mark := ""
		if row.Result.contradicted() {
			mark = " *"
		}
		weight := "–"
		if c.Measure != ByNothing {
			if weight = "–"; row.Weight > 0 {
				weight = fmt.Sprintf("%.3f", row.Weight)
			}
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%.4g (%d)%s\t%s\t%s\t%s\t%s\t%s\n", row.Name, T, interval, row.ChiSquared, row.Freedom, mark,
			show(row, "AICc", row.AICc), show(row, "BIC", row.BIC), show(row, "evidence", row.LogEvidence), show(row, "leave-one-out", row.LeaveOneOut), weight)
	}
	t.Flush()
	fmt.Fprintf(&b, "\n%s\n", c.Verdict())
	if a, ok := c.Average(); ok {
		T, std := WithUncertainty(float64(a.Temperature), a.StdK)
		fmt.Fprintf(&b, "Averaged by the %v: %s K ± %s K (%.4g %%: %.1f to %.1f K); the surfaces' own part %.2g K, the part between them %.2g K.\n",
			c.Measure, T, std, 100*c.p, float64(a.Interval.Low), float64(a.Interval.High), a.WithinK, a.BetweenK)
	} else {
		b.WriteString("No averaged temperature: a surface of some weight leaves it open, or they have no measure in common.\n")
	}
	b.WriteString("A smaller χ² is not a smaller error of the temperature: a curve that is free to follow the readings follows them at wrong temperatures too.\n")
	for i := range c.Surfaces {
		if row := &c.Surfaces[i]; row.Err == nil && row.Result.contradicted() {
			b.WriteString("* contradicted by the readings: the probability of a larger χ² is below 0.001, and the interval holds only if the surface is right; averaged with its discrepancy, where one was found.\n")
			break
		}
	}
	for i := range c.Surfaces {
		if row := &c.Surfaces[i]; row.Err != nil {
			fmt.Fprintf(&b, "  %s: not estimated: %v\n", row.Name, row.Err)
		}
	}
	for _, words := range order {
		fmt.Fprintf(&b, "  – %s (%s)\n", words, strings.Join(reasons[words], "; "))
	}
	return b.String()
}
