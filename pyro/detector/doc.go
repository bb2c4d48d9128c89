// Package detector describes how a signal stands to the radiation of a band. What is here
// now is the calibration curve of a band, the Sakuma–Hattori equation in Planckian form;
// fitting it to points is fit.Calibrate.
//
//	S   signal, in any unit
//	T   temperature of a blackbody, K
//	A, B, C  parameters of the curve: m, m K, unit of S
//	c₂  hc/k, m K
//
// It needs the standard library and pyro alone; values are safe for concurrent use.
package detector
