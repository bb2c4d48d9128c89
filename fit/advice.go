package fit

import (
	"fmt"
	"math"
	"strings"
	"unicode/utf8"
)

// worthwhile is the relative gain below which an advice's table lists a help among those that
// bring nothing.
const worthwhile = 0.01

// String returns the advice as a table for a person to read.
func (a *Advice) String() string {
	var b strings.Builder
	p := func(format string, args ...any) {
		b.WriteString(strings.TrimRight(fmt.Sprintf(format, args...), " ") + "\n")
	}
	p("As it stands: %v; %s", a.Before, a.Assumption)
	now := a.Before.Width()
	width := 0
	var little []string
	var rows []Help
	for _, h := range a.Helps {
		if h.gains(now) {
			rows = append(rows, h)
			width = max(width, utf8.RuneCountInString(h.Action))
		} else {
			little = append(little, h.Action)
		}
	}
	if len(rows) > 0 {
		p("")
		p("%-*s  %s", width, "What would help", a.head())
	}
	for _, h := range rows {
		s := fmt.Sprintf("%s%s  %s", h.Action, strings.Repeat(" ", width-utf8.RuneCountInString(h.Action)), a.then(h.After))
		if h.Note != "" {
			s += "; " + h.Note
		}
		p("%s", s)
	}
	if len(little) > 0 {
		p("")
		p("Next to nothing would come of")
		for _, l := range little {
			p("  - %s", l)
		}
	}
	if len(a.Notes) > 0 {
		p("")
		p("Notes")
		for _, n := range a.Notes {
			p("  - %s", n)
		}
	}
	return b.String()
}

// gains reports whether a help is worth a row.
func (h *Help) gains(now float64) bool {
	then := h.After.Width()
	return h.Kind == NameKind || then < (1-worthwhile)*now
}

func (a *Advice) head() string {
	if a.Before.HasStd {
		return "u(T) then"
	}
	return "then"
}

// then words an outcome beside the one that stands.
func (a *Advice) then(o Outcome) string {
	switch now := a.Before; {
	case o.State == Determined && o.HasStd && now.State != Determined:
		return "determined: " + o.String()
	case o.State == Determined && now.State != Determined:
		return "determined, without a standard uncertainty: " + o.String()
	case o.HasStd && now.HasStd:
		_, std := WithUncertainty(float64(o.T), o.StdK)
		s := fmt.Sprintf("%s K", std)
		// A kind moves the temperature too.
		if d := float64(o.T - now.T); math.Abs(d) > 0.05*now.StdK {
			t, _ := WithUncertainty(float64(o.T), o.StdK)
			s += ", T = " + t + " K"
		}
		return s
	}
	return o.String()
}
