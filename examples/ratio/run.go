package main

import (
	"bufio"
	_ "embed"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"

	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
)

//go:embed demo.csv
var demo string

type job struct {
	in, short, long, unit, plot string
	ratio, ratioStd             float64
	json                        bool
}

// run does the job and returns how many rows could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer, progress *show.Progress) (failed int, err error) {
	if j.in == "" && j.short == "" && j.long == "" {
		j.short, j.long = "750", "900"
	}
	unit, err := show.ParseUnit(j.unit)
	if err != nil {
		return 0, err
	}
	e := estimator{ratio: j.ratio, ratioStd: j.ratioStd}
	if !(j.ratio > 0) || !(j.ratioStd >= 0) || math.IsInf(j.ratio, 0) || math.IsInf(j.ratioStd, 0) {
		return 0, fmt.Errorf("-emissivity-ratio %g, std %g: the first must be positive, the second not negative", j.ratio, j.ratioStd)
	}
	if e.short, err = show.Band("short-nm", j.short); err != nil {
		return 0, err
	}
	if e.long, err = show.Band("long-nm", j.long); err != nil {
		return 0, err
	}
	if e.pair, err = show.WidestPair(e.short, e.long); err != nil {
		return 0, err
	}
	in, label, err := show.Open(j.in, demo, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	log, err := readings.NewTwoColour(in, readings.Settings{Name: label})
	if err != nil {
		return 0, err
	}
	e.perMicrometre = toMicrometre(log.Unit())
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	if !j.json {
		writeHead(out, j, unit)
	}
	var drawn series
	for count := 1; ; count++ {
		progress.Step(count)
		row, err := log.Next()
		if errors.Is(err, io.EOF) {
			progress.Done()
			if j.plot != "" {
				return failed, drawn.draw(j.plot, unit)
			}
			return failed, nil
		}
		label := ""
		var res estimate
		if err == nil {
			label = row.Label
			res, err = e.estimate(row)
		} else if bad := (*readings.RowError)(nil); errors.As(err, &bad) {
			label = bad.ID
		}
		if err != nil {
			failed++
			err = show.WriteError(out, j.json, label, err)
		} else {
			if j.plot != "" {
				drawn.add(row, count, res, unit)
			}
			if j.json {
				err = writeJSON(out, row, res)
			} else {
				err = writeText(out, label, res, unit)
			}
		}
		if err != nil {
			return failed, err
		}
	}
}

// toMicrometre returns what takes the log's unit to W m⁻² sr⁻¹ µm⁻¹; 1 where it is another.
func toMicrometre(unit string) float64 {
	switch unit {
	case "W_m2_sr_nm":
		return 1e3
	case "W_m2_sr_m":
		return 1e-6
	}
	return 1
}

type estimator struct {
	short, long     *pyro.Band
	pair            *pyro.Pair
	ratio, ratioStd float64
	perMicrometre   float64
}

// estimate is what one row gives. Where std is nil there is no interval.
type estimate struct {
	t         pyro.Temperature
	std       *float64
	lo, hi    *pyro.Temperature // nil where open
	amplitude float64
	ampStd    *float64
	notes     []string
}

// estimate inverts Planck's law for the ratio; u follows from the readings' and from the
// emissivity ratio's, and the interval is that of ln(ratio) carried through the inverse.
func (e *estimator) estimate(row *readings.Row) (estimate, error) {
	if !(row.Short > 0) || !(row.Long > 0) {
		return estimate{}, fmt.Errorf("short %g and long %g must both be positive to have a ratio", row.Short, row.Long)
	}
	ratio := row.Short / row.Long
	t, err := e.pair.Temperature(ratio, e.ratio)
	if err != nil {
		return estimate{}, err
	}
	res := estimate{t: t}
	inLong := e.long.Radiance(t) * 1e-6 / e.perMicrometre // in the log's unit
	res.amplitude = row.Long / inLong
	us, ul, ux := row.ShortStd/row.Short, row.LongStd/row.Long, e.ratioStd/e.ratio
	if !row.HasStd {
		res.notes = append(res.notes, "no uncertainty of the readings was given")
	}
	if e.ratioStd == 0 {
		res.notes = append(res.notes, fmt.Sprintf("holds only if the emissivity ratio is exactly %g", e.ratio))
	}
	if !row.HasStd {
		return res, nil
	}
	rel := math.Sqrt(us*us + ul*ul + ux*ux)
	u := e.pair.Uncertainty(t, rel, 0)
	res.std = &u
	if lo, err := e.pair.Temperature(ratio*math.Exp(-show.Normal95*rel), e.ratio); err == nil {
		res.lo = &lo
	}
	if hi, err := e.pair.Temperature(ratio*math.Exp(show.Normal95*rel), e.ratio); err == nil {
		res.hi = &hi
	}
	if e.pair.LogSlope(t) < 0 {
		res.lo, res.hi = res.hi, res.lo
	}
	// d ln a = d ln long − n_long d lnT, with d lnT = (d ln short − d ln long − d ln X)/n.
	g := e.long.LogSlope(t) / e.pair.LogSlope(t)
	a := res.amplitude * math.Sqrt((1+g)*(1+g)*ul*ul+g*g*(us*us+ux*ux))
	res.ampStd = &a
	return res, nil
}

func writeHead(out io.Writer, j job, unit show.Unit) {
	fmt.Fprintf(out, "Two-colour temperatures, %s and %s nm, emissivity ratio %g", j.short, j.long, j.ratio)
	if j.ratioStd > 0 {
		fmt.Fprintf(out, " ± %g\n", j.ratioStd)
	} else {
		fmt.Fprintf(out, "\nThe intervals hold only if the emissivity ratio is exactly %g.\n", j.ratio)
	}
	fmt.Fprintf(out, "\n%-22s %10s %8s   %-22s %s\n", "row", "T / "+unit.String(), "u / K", "95 % interval / "+unit.String(), "amplitude")
}

func writeText(out io.Writer, label string, r estimate, unit show.Unit) error {
	if r.std == nil {
		_, err := fmt.Fprintf(out, "%-22s %10.1f %8s   %-22s %.4g\n", label, unit.In(r.t), "-", "none: no σ given", r.amplitude)
		return err
	}
	end := func(t *pyro.Temperature) string {
		if t == nil {
			return "open"
		}
		return fmt.Sprintf("%.1f", unit.In(*t))
	}
	v, u := fit.WithUncertainty(unit.In(r.t), *r.std)
	_, err := fmt.Fprintf(out, "%-22s %10s %8s   %-22s %.3g ± %.2g\n", label, v, u, end(r.lo)+" to "+end(r.hi), r.amplitude, *r.ampStd)
	return err
}

func writeJSON(out io.Writer, row *readings.Row, r estimate) error {
	line := struct {
		Time      *float64     `json:"time_s,omitempty"`
		Label     *string      `json:"label,omitempty"`
		T         float64      `json:"temperature_K"`
		Std       *float64     `json:"std_K,omitempty"`
		Interval  *[2]*float64 `json:"interval95_K,omitempty"`
		Amplitude float64      `json:"amplitude"`
		AmpStd    *float64     `json:"amplitude_std,omitempty"`
		Notes     []string     `json:"notes"`
	}{T: show.Round(float64(r.t)), Std: show.Rounded(r.std), Amplitude: show.Round(r.amplitude), AmpStd: show.Rounded(r.ampStd), Notes: r.notes}
	if row.HasTimeS {
		line.Time = &row.TimeS
	} else {
		line.Label = &row.Label
	}
	if r.std != nil {
		line.Interval = &[2]*float64{show.Rounded((*float64)(r.lo)), show.Rounded((*float64)(r.hi))}
	}
	if line.Notes == nil {
		line.Notes = []string{}
	}
	return json.NewEncoder(out).Encode(line)
}
