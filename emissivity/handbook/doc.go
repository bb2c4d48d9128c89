// Package handbook has emissivities of named materials, each with its surface state, direction,
// temperature, spread and source.
//
// An emissivity belongs to a surface, not to a material: chromium's total emissivity rises
// up to fivefold while it oxidises, titanium's at 0.65 µm is 0.44 or 0.63 depending on whom one
// asks. So every value has a standard uncertainty that says how far nominally the same
// surfaces differ, and the sentence where that figure comes from. A value out of here is a
// prior, a place to begin; a reading of one's own surface replaces it.
//
// # Spectral and total
//
// Spectral is ε at a wavelength, Total the mean over the whole spectrum, and neither
// serves for the other: tungsten at 2000 K has 0.44 at 0.65 µm and 0.26 in total. They are
// different types. A Spectral is a pyro.Spectrum and gives an emissivity.Known for a family;
// of a Total only AssumeGrey makes one, with an uncertainty to match and a note that
// belongs into the report. Values whose band nobody stated are neither and aren't here.
//
// # Marks
//
// Data was read in a text that names the published source, or computed from what was read.
// FromMemory was recalled and never seen: it may stand as a wide prior and is no check
// value. The rule, which a test holds to: the standard uncertainty of a recalled value is no
// less than a quarter of it, and no less than 0.02.
//
// # Symbols
//
//	λ   wavelength, m
//	T   temperature, K; that of the source, on the scale of its time
//	ε   emissivity, 1, of an opaque surface unless the state says otherwise
//
// The tables are the files *.csv of this package. Values are immutable, and functions safe
// for concurrent use.
package handbook
