package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"

	"candent/emissivity"
	"candent/pyro"
)

// Ask says what WhatHelps is to try beside halving each uncertainty. The zero value has no
// band to add, and the figures that stand beside the fields.
type Ask struct {
	// Bands that could be added, each for itself.
	Bands []*pyro.Band
	// ContactStdK is the standard uncertainty of a contact reading, K. 0: 3 K.
	ContactStdK float64
	// EmissivityRel is the relative standard uncertainty to which the emissivity at the middle
	// channel could be measured. 0: 0.05.
	EmissivityRel float64
}

// HelpKind is what would have to be done.
type HelpKind int

const (
	HalveInput HelpKind = iota // half the standard uncertainty of what a Budget lists under Name
	AddBand
	NameKind // of surface
	KnowEmissivity
	ContactReading
)

func (k HelpKind) String() string {
	return [...]string{"halve an uncertainty", "add a band", "name the kind of surface", "measure the emissivity", "one contact reading"}[k]
}

// Outcome is what is known of the temperature, T being 0 and StdK meaning nothing where the
// state says that there is none.
type Outcome struct {
	State    State
	T        pyro.Temperature
	StdK     float64
	HasStd   bool
	Interval Interval
}

// Width is the outcome's size in K, to compare by: the standard uncertainty or, where there is
// none, half the interval over the normal quantile of its probability; +Inf where it is open.
func (o Outcome) Width() float64 {
	switch iv := o.Interval; {
	case o.HasStd:
		return o.StdK
	case iv.LowOpen || iv.HighOpen || o.State == Undetermined:
		return math.Inf(1)
	default:
		return float64(iv.High-iv.Low) / 2 / distuv.UnitNormal.Quantile((1+iv.Probability)/2)
	}
}

// String returns the outcome in a few words.
func (o Outcome) String() string {
	iv := o.Interval
	d := decimals(float64(iv.High - iv.Low))
	switch {
	case o.State == Determined && o.HasStd:
		value, std := WithUncertainty(float64(o.T), o.StdK)
		return value + " K ± " + std + " K"
	case o.State == Undetermined || iv.LowOpen && iv.HighOpen:
		return "undetermined"
	case iv.HighOpen:
		return fmt.Sprintf("at least %.4g K", float64(iv.Low))
	case iv.LowOpen:
		return fmt.Sprintf("at most %.4g K", float64(iv.High))
	}
	return fmt.Sprintf("%.*f to %.*f K", d, float64(iv.Low), d, float64(iv.High))
}

func (r *Result) outcome() Outcome {
	var o Outcome
	o.T, o.State = r.Temperature()
	o.StdK, o.HasStd = r.Uncertainty()
	o.Interval, _ = r.Interval()
	return o
}

// Help is one thing that could be found out, and what would then be known.
type Help struct {
	Kind   HelpKind
	Name   string // of the input as Budget has it, of the band, or of the kind of surface
	Action string // in words
	After  Outcome
	Note   string // what the answer rests on, or ""
}

// Advice is what WhatHelps returns.
type Advice struct {
	Before     Outcome
	Assumption string // that of the result as it stands
	Helps      []Help // what leaves the least uncertainty first
	Notes      []string
}

// WhatHelps estimates a reading again for each thing that could be found out next, and says
// what it would do to u(T):
//
//   - the standard uncertainty of each input, prior and shared effect halved, and the noise,
//     as the mean of four readings halves it; inputs of one name count as one
//   - each of Ask's bands beside those there are, with the reading that it would give at the
//     estimate, without noise: the fitted emissivity carried to it (a process's along straight
//     lines of ln ε over ln λ between the channels and level beyond them), the channels' mean
//     relative noise, and calibration inputs like theirs
//   - for a mixture over kinds (Unknown, AnySurface), and where a family leaves T undetermined:
//     each named kind on the same readings, unless they contradict it
//   - the emissivity at the middle channel known to EmissivityRel, at its estimate
//   - one contact reading of the temperature, at its estimate
//
// A measurement that has yet to be made is taken to confirm the estimate. Where there is none,
// since the readings leave T undetermined, an emissivity of 0.5 at the middle channel stands in
// for it; a Note says so. It compiles an estimator for each question: it is for a desk, not for
// a loop. Its errors are those of Estimate, and ErrAssume for what can't be asked.
func (e *Estimator) WhatHelps(r Readings, ask Ask) (*Advice, error) {
	if ask.ContactStdK == 0 {
		ask.ContactStdK = 3
	}
	if ask.EmissivityRel == 0 {
		ask.EmissivityRel = 0.05
	}
	switch t := e.assume.Temperature; {
	case !(ask.ContactStdK > 0) || math.IsInf(ask.ContactStdK, 0):
		return nil, fmt.Errorf("%w: a contact reading ± %g K: it must be positive and finite", ErrAssume, ask.ContactStdK)
	case !(ask.EmissivityRel > 0 && ask.EmissivityRel <= 0.5):
		return nil, fmt.Errorf("%w: an emissivity known to %g: it is a fraction of the emissivity, above 0 and at most 0.5", ErrAssume, ask.EmissivityRel)
	case t.Value > 0 && t.StdK == 0:
		return nil, fmt.Errorf("%w: the temperature is held at %v: nothing is left to find out", ErrAssume, t.Value)
	}
	for i, b := range ask.Bands {
		if b == nil {
			return nil, fmt.Errorf("%w: band %d to add is nil", ErrAssume, i)
		}
	}
	now, err := e.Estimate(r)
	if err != nil {
		return nil, err
	}
	q := &inquiry{e: e, r: r, ask: ask, now: now, at: now, advice: &Advice{Before: now.outcome(), Assumption: now.Assumption()}}
	q.knowEmissivity()
	q.halve()
	q.kinds()
	q.contact()
	for _, b := range ask.Bands {
		q.add(b)
	}
	slices.SortStableFunc(q.advice.Helps, func(a, b Help) int {
		switch x, y := a.After.Width(), b.After.Width(); {
		case x < y:
			return -1
		case x > y:
			return 1
		}
		return int(b.After.State) - int(a.After.State)
	})
	if e.process == nil {
		q.note("where no kind is named, the %v is taken for that of the surface: what another does to the temperature is in none of these figures", e.assume.Emissivity)
	}
	if now.contradicted() {
		q.note("the readings contradict what is assumed: find out why first; what stands here holds only if it is right")
	}
	return q.advice, nil
}

// inquiry is WhatHelps at work.
type inquiry struct {
	e      *Estimator
	r      Readings
	ask    Ask
	now    *Result
	at     *Result // the estimate that measurements yet to be made confirm; nil where there is none
	stand  string  // what at rests on where it isn't now
	advice *Advice
}

func (q *inquiry) note(format string, args ...any) {
	q.advice.Notes = append(q.advice.Notes, fmt.Sprintf(format, args...))
}

// assume returns a copy of the assumptions to change, a family's centre where it is now.
func (q *inquiry) assume() Assume {
	a := q.e.assume
	if _, ok := a.Emissivity.(emissivity.Family); ok {
		a.Emissivity = q.e.family
	}
	return a
}

// try estimates under changed assumptions and lists the outcome.
func (q *inquiry) try(h Help, bands []*pyro.Band, a Assume, r Readings) *Result {
	res, err := estimateOnce(bands, a, r)
	if err != nil {
		q.note("%s: no answer: %v", h.Action, err)
		return nil
	}
	h.After = res.outcome()
	q.advice.Helps = append(q.advice.Helps, h)
	return res
}

func estimateOnce(bands []*pyro.Band, a Assume, r Readings) (*Result, error) {
	e, err := New(bands, a)
	if err != nil {
		return nil, err
	}
	return e.Estimate(r)
}

// standIn is the emissivity at the middle channel where the readings leave none.
const standIn = 0.5

// knowEmissivity asks for the emissivity at the middle channel, and sets the estimate to go by
// where the readings leave none.
func (q *inquiry) knowEmissivity() {
	e := q.e
	middle := e.used[e.n/2]
	λ := e.bands[middle].Mean()
	ε, _, _, ok := q.now.Emissivity(middle)
	note := ""
	if !ok {
		q.at = nil
		ε, note = standIn, fmt.Sprintf("the readings leave none: if it is %.2g", standIn)
	}
	a := q.assume()
	known := emissivity.Known{Wavelength: λ, Value: min(ε, 1), Std: q.ask.EmissivityRel * min(ε, 1)}
	switch s := a.Emissivity.(type) {
	case emissivity.Family:
		if s.IsRelative() || !slices.Contains(e.fixed, false) {
			return
		}
		a.Emissivity = s.WithKnownPoints(append(s.KnownPoints(), known)...)
	case emissivity.Process:
		if s.IsRelative() {
			return
		}
		a.Emissivity = s.WithKnownPoints(append(s.KnownPoints(), known)...)
	default:
		return // a model has parameters of its own, whose priors are halved
	}
	action := fmt.Sprintf("an emissivity measured at %.4g, %.2f ± %.2g %%", λ, known.Value, 100*q.ask.EmissivityRel)
	res := q.try(Help{Kind: KnowEmissivity, Name: fmt.Sprintf("%.4g", λ), Action: action, Note: note}, e.bands, a, q.r)
	if q.at == nil && res != nil && res.State() == Determined {
		q.at, q.stand = res, fmt.Sprintf("if the emissivity at %.4g is %.2g", λ, standIn)
	}
}

// kinds asks for the kind of surface.
func (q *inquiry) kinds() {
	e := q.e
	relative, known := q.now.Relative(), []emissivity.Known(nil)
	switch s := e.assume.Emissivity.(type) {
	case emissivity.Process:
		if !s.IsMixed() {
			return
		}
		known = s.KnownPoints()
	case emissivity.Family:
		if q.now.State() == Determined {
			return
		}
		known = s.KnownPoints()
	default:
		return
	}
	var contradicted []string
	for _, k := range emissivity.Kinds() {
		a := q.assume()
		p := k.Process.WithKnownPoints(known...)
		if relative {
			p = p.Relative()
		}
		a.Emissivity = p
		kind, err := New(e.bands, a)
		if err != nil {
			q.note("kinds of surface: no answer: %v", err)
			return
		}
		res, err := kind.Estimate(q.r)
		if err != nil && !errors.Is(err, ErrRange) {
			q.note("kinds of surface: no answer: %v", err)
			return
		}
		if err != nil || res.contradicted() { // no temperature in the range gives the kind's ε, or none its curve
			contradicted = append(contradicted, k.Name)
			continue
		}
		h := Help{Kind: NameKind, Name: k.Name, Action: "if the surface is " + article(k.Process.String()), After: res.outcome()}
		if k.Mark == emissivity.Unvalidated {
			h.Note = "a kind " + k.Mark.String()
		}
		q.advice.Helps = append(q.advice.Helps, h)
	}
	if len(contradicted) > 0 {
		q.note("kinds of surface left out, since the readings contradict them: %s", strings.Join(contradicted, ", "))
	}
	q.note("that the readings don't contradict a kind does not make it the right one: look at the surface")
}

// article puts one before the name of a surface that takes it.
func article(name string) string {
	switch {
	case strings.HasPrefix(name, "carbon"), strings.HasPrefix(name, "liquid"), strings.HasPrefix(name, "bare"), strings.HasPrefix(name, "bright"):
		return name
	case strings.ContainsAny(name[:1], "aeiou"):
		return "an " + name
	}
	return "a " + name
}

// contact asks for a contact reading.
func (q *inquiry) contact() {
	a := q.assume()
	if q.at == nil {
		q.note("a contact reading gives the temperature by itself here: ± %.2g K", q.ask.ContactStdK)
		return
	}
	t, _ := q.at.Temperature()
	u := q.ask.ContactStdK
	w := 1 / (u * u)
	prior := TemperaturePrior{Value: t, StdK: u}
	if old := a.Temperature; old.StdK > 0 {
		v := 1 / (old.StdK * old.StdK)
		prior = TemperaturePrior{pyro.Temperature((float64(old.Value)*v + float64(t)*w) / (v + w)), 1 / math.Sqrt(v+w)}
	}
	a.Temperature = prior
	q.try(Help{Kind: ContactReading, Action: fmt.Sprintf("one contact reading of %.0f K ± %.2g K", float64(t), u), Note: q.stand}, q.e.bands, a, q.r)
}
