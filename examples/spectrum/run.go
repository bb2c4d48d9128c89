package main

import (
	"bufio"
	_ "embed"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"strings"

	"candent/emissivity"
	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
)

//go:embed demo.csv
var demo string

type job struct {
	in, family, unit, plot string
	json                   bool
}

var families = map[string]emissivity.Family{
	"grey":        emissivity.Grey(),
	"linear":      emissivity.Polynomial(1),
	"quadratic":   emissivity.Polynomial(2),
	"exponential": emissivity.Exponential(1),
	"powerlaw":    emissivity.PowerLaw(),
}

// run does the job and returns how many spectra could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer, progress *show.Progress) (failed int, err error) {
	family, ok := families[j.family]
	if !ok {
		return 0, fmt.Errorf("-emissivity %s: grey, linear, quadratic, exponential or powerlaw", j.family)
	}
	unit, err := show.ParseUnit(j.unit)
	if err != nil {
		return 0, err
	}
	in, label, err := show.Open(j.in, demo, stdin)
	if err != nil {
		return 0, err
	}
	defer in.Close()
	spectra, err := readings.NewSpectra(in, readings.Settings{Name: label})
	if err != nil {
		return 0, err
	}
	out := bufio.NewWriter(stdout)
	defer func() { err = errors.Join(err, out.Flush()) }()
	cache := estimators{family: family, of: map[string]*fit.Estimator{}}
	drawn := j.plot == ""
	for count := 1; ; count++ {
		progress.Step(count)
		s, err := spectra.Next()
		if errors.Is(err, io.EOF) {
			progress.Done()
			if !drawn {
				return failed, errors.New("nothing to draw: no spectrum could be estimated")
			}
			return failed, nil
		}
		var e estimated
		if err == nil {
			e, err = cache.estimate(s)
		}
		if err != nil {
			failed++
			id := ""
			var row *readings.RowError
			if s != nil {
				id = s.ID
			} else if errors.As(err, &row) {
				id = row.ID
			}
			if err := writeError(out, j.json, id, err); err != nil {
				return failed, err
			}
			continue
		}
		if j.json {
			err = writeJSON(out, e)
		} else {
			err = writeText(out, e, unit)
		}
		if err == nil && !drawn {
			drawn = true
			err = draw(j.plot, e)
		}
		if err != nil {
			return failed, err
		}
	}
}

// estimators keeps one estimator for each wavelength grid.
type estimators struct {
	family emissivity.Family
	of     map[string]*fit.Estimator
	key    strings.Builder
}

// maxEstimators bounds the memory of a log whose every spectrum has a grid of its own.
const maxEstimators = 64

// estimated is a spectrum with its result.
type estimated struct {
	spectrum *readings.Spectrum
	reading  fit.Readings
	noise    string // note on where σ comes from, or ""
	e        *fit.Estimator
	result   *fit.Result
}

func (c *estimators) estimate(s *readings.Spectrum) (estimated, error) {
	out := estimated{spectrum: s, reading: fit.Readings{Signal: s.Signal, Std: s.Std}}
	noise := fit.PerReading()
	if len(s.Std) == 0 {
		std := make([]float64, len(s.Signal))
		if rel, err := readings.NeighbourStd(std, s.Wavelengths, s.Signal); err == nil {
			out.reading.Std = std
			out.noise = fmt.Sprintf("no uncertainty was given: noise of %.2g %% estimated from neighbouring channels; what channels share is not in it", 100*rel)
		} else {
			out.reading.Std = nil
			noise = fit.Relative(0.01).UpToFactor()
			out.noise = "no uncertainty was given: relative noise of one unknown size, estimated from the residuals of the fit"
		}
	}
	c.key.Reset()
	fmt.Fprintf(&c.key, "%v %v %v", s.Relative, noise, s.Wavelengths)
	e, ok := c.of[c.key.String()]
	if !ok {
		family := c.family
		if s.Relative {
			family = family.Relative()
		}
		bands := make([]*pyro.Band, len(s.Wavelengths))
		for i, λ := range s.Wavelengths {
			var err error
			if bands[i], err = pyro.Line(λ); err != nil {
				return out, err
			}
		}
		var err error
		if e, err = fit.New(bands, fit.Assume{Emissivity: family, Noise: noise}); err != nil {
			return out, err
		}
		if len(c.of) >= maxEstimators {
			clear(c.of)
		}
		c.of[c.key.String()] = e
	}
	out.e = e
	var err error
	out.result, err = e.Estimate(out.reading)
	return out, err
}

func (e estimated) notes() []string {
	notes := e.result.Notes()
	if e.noise != "" {
		notes = append([]string{e.noise}, notes...)
	}
	if n := e.spectrum.Missing; n > 0 {
		notes = append(notes, fmt.Sprintf("%d channels left out: no value", n))
	}
	return notes
}

func writeError(out io.Writer, asJSON bool, id string, err error) error {
	if asJSON {
		return json.NewEncoder(out).Encode(struct {
			ID    string `json:"id"`
			Error string `json:"error"`
		}{id, err.Error()})
	}
	_, err = fmt.Fprintf(out, "%s\n  not estimated: %v\n", name(id), err)
	return err
}

func name(id string) string {
	if id == "" {
		return "spectrum"
	}
	return id
}
