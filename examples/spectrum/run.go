package main

import (
	"bufio"
	_ "embed"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"candent/emissivity"
	"candent/examples/internal/show"
	"candent/fit"
	"candent/fit/readings"
)

//go:embed demo.csv
var demo string

type job struct {
	in, surface, unit, plot string
	json, acceptWide        bool
	compare                 bool
}

// run does the job and returns how many spectra could not be estimated.
func run(j job, stdin io.Reader, stdout io.Writer, progress *show.Progress) (failed int, err error) {
	surface, err := show.Surface(j.surface)
	if err != nil {
		return 0, err
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
	cache := estimators{surface: surface, acceptWide: j.acceptWide, of: map[string]*fit.Estimator{}}
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
		if err == nil && j.compare {
			var c *fit.Comparison
			if c, err = cache.compare(e); err == nil && j.json {
				err = writeComparisonJSON(out, s.ID, c)
			} else if err == nil {
				err = writeComparison(out, c)
			}
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
	surface    emissivity.Surface
	acceptWide bool
	of         map[string]*fit.Estimator
	key        strings.Builder
}

// maxEstimators bounds the memory of a log whose every spectrum has a grid of its own.
const maxEstimators = 64

// estimated is a spectrum with its result.
type estimated struct {
	spectrum *readings.Spectrum
	surface  emissivity.Surface
	reading  fit.Readings
	said     []string // notes of this program's own
	e        *fit.Estimator
	result   *fit.Result
}

func (c *estimators) estimate(s *readings.Spectrum) (estimated, error) {
	noise, std, note := show.Noise(s)
	out := estimated{spectrum: s, surface: show.For(c.surface, s), reading: fit.Readings{Signal: s.Signal, Std: std}}
	if note != "" {
		out.said = append(out.said, note)
	}
	if p, ok := out.surface.(emissivity.Process); ok && c.acceptWide && p.IsWide() && len(s.Wavelengths) <= 2 {
		out.surface = p.AcceptWide()
		lo, hi := p.Range(s.Wavelengths[0])
		out.said = append(out.said, fmt.Sprintf("-accept-wide: too few bands to tell surfaces apart, so that ε between %.2g and %.2g was taken at %.4g; the interval is little more than that range", lo, hi, s.Wavelengths[0]))
	}
	c.key.Reset()
	fmt.Fprintf(&c.key, "%v %v %v", s.Relative, noise, s.Wavelengths)
	e, ok := c.of[c.key.String()]
	if !ok {
		bands, err := show.Lines(s.Wavelengths)
		if err != nil {
			return out, err
		}
		if e, err = fit.New(bands, fit.Assume{Emissivity: out.surface, Noise: noise}); err != nil {
			if wide := (*fit.WideError)(nil); errors.As(err, &wide) {
				err = fmt.Errorf("%w. Name one with -emissivity; -accept-wide takes the range as it is", err)
			}
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
	notes := append(slices.Clone(e.said), e.result.Notes()...)
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
