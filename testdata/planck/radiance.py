"""Makes radiance.csv: python3 radiance.py > radiance.csv (needs mpmath)."""
import random

import mpmath as mp

mp.mp.dps = 50
h, c, k = mp.mpf("6.62607015e-34"), mp.mpf(299792458), mp.mpf("1.380649e-23")
c1L, c2 = 2 * h * c * c, h * c / k

print("# Spectral radiance and its derivative by 50-digit arithmetic (mpmath) from the defining constants of the SI (2019),")
print("# wavelength and temperature taken as the float64 nearest to the digits shown; made by radiance.py beside this file.")
print("wavelength_m,temperature_K,radiance_W_m2_sr_m,slope_W_m2_sr_m_K")
random.seed(1)
for i in range(400):
    product = 10 ** (-5 + 6 * (i + 0.5) / 400)  # λT, m K
    lam = 10 ** random.uniform(-6.7, -4)
    t = product / lam
    x = c2 / (mp.mpf(lam) * mp.mpf(t))
    radiance = c1L / mp.mpf(lam) ** 5 / mp.expm1(x)
    slope = radiance / mp.mpf(t) * x / -mp.expm1(-x)
    if min(radiance, slope) < mp.mpf("1e-300"):  # not a normal float64 with room to spare
        continue
    print(repr(lam), repr(t), mp.nstr(radiance, 21), mp.nstr(slope, 21), sep=",")
