"""Makes fraction.csv: python3 fraction.py > fraction.csv (needs mpmath)."""
import mpmath as mp

mp.mp.dps = 50
c2 = mp.mpf("6.62607015e-34") * 299792458 / mp.mpf("1.380649e-23")
norm = mp.mpf(15) / mp.pi**4


def term(n, x):
    return mp.exp(-n * x) * (x**3 / n + 3 * x**2 / mp.mpf(n) ** 2 + 6 * x / mp.mpf(n) ** 3 + 6 / mp.mpf(n) ** 4)


def fraction(x):
    if x >= 20:
        return norm * sum(term(n, x) for n in range(1, 12))
    if x > 1:
        return norm * mp.nsum(lambda n: term(n, x), [1, mp.inf])
    return 1 - norm * mp.quad(lambda u: u**3 / mp.expm1(u) if u else mp.mpf(0), [0, x])


print("# Fraction of a blackbody's exitance below λ, by 50-digit arithmetic (mpmath), exact c2, temperature 1 K,")
print("# wavelength the float64 nearest to the digits shown; made by fraction.py beside this file.")
print("wavelength_m,fraction")
for i in range(60):
    product = 10 ** (-4.6 + 5.6 * (i + 0.5) / 60)  # λT, m K
    value = fraction(c2 / mp.mpf(product))
    if value >= mp.mpf("1e-300"):
        print(repr(product), mp.nstr(value, 21), sep=",")
