"""Makes inverse.csv: python3 inverse.py > inverse.csv (needs mpmath)."""
import random

import mpmath as mp

mp.mp.dps = 50
h, c, k = mp.mpf("6.62607015e-34"), mp.mpf(299792458), mp.mpf("1.380649e-23")
c1L, c2 = 2 * h * c * c, h * c / k

print("# Radiance temperature by 50-digit arithmetic (mpmath) from the defining constants of the SI (2019),")
print("# wavelength and radiance taken as the float64 nearest to the digits shown; made by inverse.py beside this file.")
print("wavelength_m,radiance_W_m2_sr_m,temperature_K")
random.seed(2)
for i in range(400):
    product = mp.mpf(10) ** (-5 + 6 * (i + 0.5) / 400)  # λT, m K
    lam = 10 ** random.uniform(-6.7, -4)
    radiance = c1L / mp.mpf(lam) ** 5 / mp.expm1(c2 / product)
    if radiance < mp.mpf("3e-308"):  # not a normal float64
        continue
    radiance = float(radiance)
    t = c2 / mp.mpf(lam) / mp.log1p(c1L / mp.mpf(lam) ** 5 / mp.mpf(radiance))
    print(repr(lam), repr(radiance), mp.nstr(t, 21), sep=",")
