// Package readings reads what instruments and historians deliver: tables of spectra and
// two-colour logs as text, one row at a time, so that a log of any length needs the memory
// of one spectrum.
//
// # Spectra, long
//
// One row a channel. Consecutive rows of one id are one spectrum; without the column id the
// whole table is one. An id that returns later begins a spectrum of its own.
//
//	id                      any text
//	wavelength_nm           or wavelength_um, or wavenumber_cm-1
//	radiance_W_m2_sr_um     or …_nm, …_m, …_cm-1; or signal, in any unit: a common unknown gain
//	std_radiance_W_m2_sr_um its standard uncertainty in the same unit (std_signal), or
//	std_percent             in per cent of the reading's size
//
// # Spectra, wide
//
// One row a spectrum, wavelengths in the header: columns are named by a quantity of the long
// form, an @ and a wavelength, such as signal@650nm or radiance_W_m2_sr_um@1.6um. With
// std_percent as a further column; an id column is optional.
//
// # Two-colour logs
//
//	time_s, or time (RFC 3339), or label
//	short, long             with any unit suffix, the same for both: short_mV, long_mV
//	short_std, long_std     optional, the suffix last: short_std_mV
//
// # Other logs
//
// Calibration points, certificates and what indicators wrote have columns that the caller
// looks up by name (NewLog), with units as suffixes: temperature_C, temperature_std_K,
// signal_mV, current_mA; beside them time_s, time or label.
//
// # Common to all
//
// The separator is a comma, a semicolon or a tab, found in the header; the decimal mark a
// point, or a comma where the separator is another. A byte-order mark and CR LF are
// accepted, lines that start with # are passed over, and columns of other names too. What
// counts as missing can be set. A row that can't be read is that row's *RowError; reading
// goes on behind it.
package readings
