"""Fits spectra read as JSON on standard input by scipy.optimize.least_squares, started at the truth.

In:  [{"family", "wavelength_um": [...], "signal": [...], "std": [...], "start": [T, coefficients...]}, ...]
Out: the same order, [{"x": [T, coefficients...], "covariance": [[...]]}, ...]; covariance (J'J)^-1.

T and signal are scaled to order one inside; coefficients are those of candent's families with
wavelengths centred on 0.85 um.
"""
import json
import sys

import numpy as np
from scipy.optimize import least_squares

C1L, C2 = 2 * 6.62607015e-34 * 299792458.0**2, 6.62607015e-34 * 299792458.0 / 1.380649e-23
CENTRE = 0.85


def curve(family, c, um):
    d = um - CENTRE
    if family == "exponential":
        return np.exp(c[0] + c[1] * d)
    if family == "power":
        return np.exp(c[0]) * (um / CENTRE) ** c[1]
    return sum(v * d**k for k, v in enumerate(c))


def fit(p):
    um, s, u = (np.array(p[k]) for k in ("wavelength_um", "signal", "std"))
    lam = um * 1e-6

    def residuals(x):
        planck = C1L / lam**5 / np.expm1(C2 / (lam * x[0] * 1000.0))
        return (curve(p["family"], x[1:], um) * planck - s) / u

    start = np.array(p["start"], float)
    start[0] /= 1000.0

    def jacobian(x):  # complex step
        cols = []
        for k in range(len(x)):
            z = x.astype(complex)
            z[k] += 1e-30j
            cols.append(np.imag(residuals(z)) / 1e-30)
        return np.array(cols).T

    r = least_squares(residuals, start, jac=jacobian, xtol=1e-15, ftol=1e-15, gtol=1e-15, x_scale="jac", method="lm", max_nfev=2000)
    # least_squares stops where the sum of squares no longer changes, half-way through the digits
    # of x: a few Gauss-Newton steps by QR take it to the end.
    for _ in range(6):
        r.x = r.x - np.linalg.lstsq(jacobian(r.x), residuals(r.x), rcond=None)[0]
    scale = np.ones(len(start))
    scale[0] = 1000.0
    j = jacobian(r.x) / scale
    q, t = np.linalg.qr(j)
    inverse = np.linalg.inv(t)
    return {"x": list(r.x * scale), "covariance": (inverse @ inverse.T).tolist()}


json.dump([fit(p) for p in json.load(sys.stdin)], sys.stdout)
