package fit

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"candent/fit/internal/lsq"
)

// findDeficiency says in words what no reading of these channels can fix, whatever its
// noise: the direction in which temperature and parameters trade off. Empty where every
// direction is fixed. The rank is decided on the scaled Jacobian at three temperatures.
func (e *Estimator) findDeficiency() string {
	if t := e.assume.Temperature; t.Value > 0 && t.StdK == 0 {
		return ""
	}
	words := ""
	for _, f := range []float64{0.25, 0.75, 0.5} {
		β := math.Pow(e.hottest, f) * math.Pow(e.coldest, 1-f)
		ψ := make([]float64, e.p+e.q)
		switch {
		case e.model != nil:
			copy(ψ, e.model.starts[:e.p])
		case e.lower != 0:
			ψ[0] = math.Log(0.5)
		default:
			ψ[0] = 0.5
		}
		for k, fixed := range e.fixed {
			if fixed {
				ψ[k] = e.value[k]
			}
		}
		if words = e.deficiencyAt(β, ψ); words == "" {
			return ""
		}
	}
	return words
}

func (e *Estimator) deficiencyAt(β float64, ψ []float64) string {
	// Columns: ln T and what is free of ψ; rows: ∂ ln m of the channels, then the priors.
	names := []string{"temperature"}
	free := []int{-1}
	for k, name := range e.parameterNames() {
		if !e.fixed[k] {
			names, free = append(names, name), append(free, k)
		}
	}
	for k := range e.q {
		names, free = append(names, e.sight.columns[k].name), append(free, e.p+k)
	}
	w := e.NewWork()
	w.open()
	for j := range w.std {
		w.signal[j], w.std[j] = 1, 1
	}
	w.evaluate(β, ψ, false)
	size := e.size()
	var rows [][]float64
	for j := range e.n {
		row := make([]float64, len(free))
		for c, k := range free {
			row[c] = w.jac[j*size+1+k] / w.model[j]
			if k < 0 {
				row[c] *= -β // d/d ln T
			}
		}
		rows = append(rows, row)
	}
	for _, d := range e.data {
		row := make([]float64, len(free))
		for c, k := range free {
			if k >= 0 && k < e.p {
				row[c] = d.row[k] * d.weight
			}
		}
		rows = append(rows, row)
	}
	for k := range e.q {
		if e.sight.free(k) {
			continue
		}
		row := make([]float64, len(free))
		row[len(free)-e.q+k] = 1
		rows = append(rows, row)
	}
	if e.assume.Temperature.StdK > 0 {
		row := make([]float64, len(free))
		row[0] = 1 / (β * e.assume.Temperature.StdK)
		rows = append(rows, row)
	}
	for len(rows) < len(free) {
		rows = append(rows, make([]float64, len(free)))
	}
	solver, err := lsq.New(len(rows), len(free), lsq.Settings{})
	if err != nil {
		return err.Error()
	}
	solver.SetJacobian(slices.Concat(rows...))
	var rank *lsq.RankError
	if !errors.As(solver.Covariance(make([]float64, len(free)*len(free))), &rank) {
		return ""
	}
	return tradeOff(names, rank.Direction, 1/β)
}

// tradeOff words a direction: what goes with one per cent of temperature.
func tradeOff(names []string, direction []float64, t float64) string {
	scale := 0.0
	for _, v := range direction {
		scale = math.Max(scale, math.Abs(v))
	}
	unit := direction[0]
	if math.Abs(unit) < 1e-6*scale {
		unit = scale * 100 // temperature is not part of it
	}
	var parts []string
	for c, v := range direction {
		if math.Abs(v) < 1e-6*scale {
			continue
		}
		if c == 0 {
			parts = append(parts, fmt.Sprintf("%+.0f K of temperature", 0.01*t))
		} else {
			parts = append(parts, fmt.Sprintf("%+.3g of %s", 0.01*v/unit, names[c]))
		}
	}
	return fmt.Sprintf("near %.0f K the readings would be the same with ", t) + strings.Join(parts, ", ")
}
