package main

import (
	"errors"
	"fmt"
	"io"

	"candent/fit"
	"candent/fit/readings"
	"candent/pyro"
	"candent/pyro/detector"
)

// table is what -in holds.
type table struct {
	points  []fit.CalibrationPoint
	labels  []string
	lines   []int
	unit    string              // of the signal
	shown   *detector.Indicator // of a certificate: what turns an indication into a signal
	noStd   bool                // no point has an uncertainty
	assumed []string            // what the table doesn't say
}

// wholeRange is where an indicator of unknown range may read.
func wholeRange(band *pyro.Band, ε float64) detector.Indicator {
	return detector.Indicator{Band: band, Emissivity: ε, Window: 1, Low: pyro.BandMin, High: pyro.BandMax}
}

// readTable reads points or a certificate. Any row that can't be used is an error: a curve
// through what is left would not be the one that was asked for.
func readTable(in io.Reader, name string, band *pyro.Band) (*table, error) {
	log, err := readings.NewLog(in, readings.Settings{Name: name})
	if err != nil {
		return nil, err
	}
	t := &table{}
	if log.Column("reference").Found || log.Column("indicated").Found {
		return t, t.readCertificate(log, name, band)
	}
	temperature, err := log.RequireTemperature("temperature")
	if err != nil {
		return nil, err
	}
	signal, err := log.Require("signal")
	if err != nil {
		return nil, err
	}
	t.unit = signal.Unit
	stdK, std := log.Column("temperature_std"), log.Column("signal_std")
	if stdK.Found && stdK.Unit != "K" {
		return nil, fmt.Errorf("%s: column %s: uncertainties of temperature are in K: temperature_std_K", name, stdK.Name)
	}
	if std.Found && std.Unit != signal.Unit {
		return nil, fmt.Errorf("%s: columns %s and %s are not in one unit", name, signal.Name, std.Name)
	}
	t.noStd = !stdK.Found && !std.Found
	return t, each(log, func(row *readings.LogRow) (err error) {
		var p fit.CalibrationPoint
		if p.T, err = row.Temperature(temperature); err != nil {
			return err
		}
		if p.StdK, err = row.Optional(stdK, 0); err != nil {
			return err
		}
		if p.Signal, err = row.Number(signal); err != nil {
			return err
		}
		if p.Std, err = row.Optional(std, 0); err != nil {
			return err
		}
		t.add(row, p)
		return nil
	})
}

func (t *table) add(row *readings.LogRow, p fit.CalibrationPoint) {
	t.points = append(t.points, p)
	t.labels = append(t.labels, row.Label)
	t.lines = append(t.lines, row.Line)
}

// each calls f for every row and stops at the first error.
func each(log *readings.Log, f func(*readings.LogRow) error) error {
	for {
		row, err := log.Next()
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err == nil {
			err = f(row)
		}
		if err != nil {
			return err
		}
	}
}

func (t *table) readCertificate(log *readings.Log, name string, band *pyro.Band) error {
	if band == nil {
		return errors.New("a certificate needs -band-nm, the spectral range that the indicator was made for")
	}
	reference, err1 := log.RequireTemperature("reference")
	indicated, err2 := log.RequireTemperature("indicated")
	expanded, err3 := log.Require("U")
	coverage, err4 := log.Require("k")
	if err := errors.Join(err1, err2, err3, err4); err != nil {
		return err
	}
	if expanded.Unit != "K" {
		return fmt.Errorf("%s: column %s: expanded uncertainties are in K: U_K", name, expanded.Name)
	}
	setting := log.Column("emissivity_setting")
	t.assumed = append(t.assumed, "the rows' uncertainties are taken as independent: what they share is larger on the curve than this")
	if !setting.Found {
		t.assumed = append(t.assumed, "the certificate states no emissivity_setting: taken as 1")
	}
	d := wholeRange(band, 1)
	t.unit, t.shown = "W/(m² sr m) of its nominal band", &d
	c := fit.Certificate{Indicator: d}
	err := each(log, func(row *readings.LogRow) error {
		var r fit.CertificateRow
		var errs [5]error
		r.Reference, errs[0] = row.Temperature(reference)
		r.Indicated, errs[1] = row.Temperature(indicated)
		r.U, errs[2] = row.Number(expanded)
		r.K, errs[3] = row.Number(coverage)
		r.Emissivity, errs[4] = row.Optional(setting, 1)
		if err := errors.Join(errs[:]...); err != nil {
			return err
		}
		c.Rows = append(c.Rows, r)
		t.add(row, fit.CalibrationPoint{})
		return nil
	})
	if err == nil {
		t.points, err = c.Points()
	}
	return t.where(name, err)
}

// where names the line of a row that a calibration refuses.
func (t *table) where(name string, err error) error {
	var bad *fit.CalibrationError
	if errors.As(err, &bad) && bad.Row < len(t.lines) {
		return fmt.Errorf("%s:%d: %w", name, t.lines[bad.Row], bad.Err)
	}
	return err
}
