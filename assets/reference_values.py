"""Solves the printed equations behind the reference values in tests and checks.

Independent of the Rust code: needs Python with scipy only. Run it and compare:
    python3 assets/reference_values.py
"""

from math import expm1, log, log1p, sqrt

from scipy.optimize import brentq
from scipy.special import gamma
from scipy.stats import beta, norm

KT_OVER_OMEGA = 8.314462618 * 298.15 / 18.0e-6  # Pa


def pressure(j, n, chi, alpha=0.0, salt=0.0):
    """Confining pressure over kT/Omega of an isotropically swollen gel.

    Hong, Zhao, Zhou & Suo 2008 with ideal Donnan ions (Ricka & Tanaka 1984), both from memory.
    """
    s = 0.018 * salt
    ions = sqrt((alpha / j) ** 2 + 4 * s * s) - 2 * s
    return -(n * (j ** (-1 / 3) - 1 / j) + log1p(-1 / j) + 1 / j + chi / j**2 - ions)


def volume_ratio(n, chi, alpha=0.0, salt=0.0, load=0.0):
    """Volume ratio to dry under a load (over kT/Omega)."""
    return 1 + 10 ** brentq(lambda x: pressure(1 + 10**x, n, chi, alpha, salt) - load, -8, 6, xtol=1e-14)


print("free stretch of neutral gels")
for n, chi in [(1e-5, 0.0), (1e-5, 0.5), (1e-4, 0.2), (1e-4, 0.45), (1e-3, 0.1), (1e-3, 0.6), (1e-2, 0.3), (1e-1, 0.6)]:
    print(f"  n {n:g}  chi {chi}  {volume_ratio(n, chi) ** (1 / 3):.8f}")

print("free stretch of charged gels")
for n, chi, alpha, salt in [(1e-3, 0.45, 0.1, 1e-3), (1e-3, 0.45, 0.1, 0.154), (1e-4, 0.45, 0.1, 1e-2), (1e-3, 0.3, 0.05, 0.1)]:
    print(f"  n {n:g}  chi {chi}  charges {alpha}  salt {salt}  {volume_ratio(n, chi, alpha, salt) ** (1 / 3):.8f}")

print("rigid cavity, n 1e-3, chi 0.1: pressure over kT/Omega")
free = volume_ratio(1e-3, 0.1)
for share in (0.9, 0.7, 0.5):
    print(f"  {share}  {pressure(share * free, 1e-3, 0.1):.8e}")

print("volume ratio under a piston")
psi = 6894.757
for load, n, alpha, salt in [(0.3 * psi, 1e-4, 0.0, 0.0), (0.7 * psi, 1e-3, 0.1, 1e-3), (22e3, 1e-4, 0.05, 1e-2)]:
    print(f"  {load:.1f} Pa  {volume_ratio(n, 0.45, alpha, salt, load / KT_OVER_OMEGA):.6f}")

print("binomial 95 % limits: Wilson, Clopper-Pearson")
z = norm.ppf(0.975)
for x, n in [(81, 263), (15, 148), (0, 20), (1, 29), (3, 200)]:
    centre, half = (x + z * z / 2) / (n + z * z), z * sqrt(x * (n - x) / n + z * z / 4) / (n + z * z)
    low = 0.0 if x == 0 else beta.ppf(0.025, x, n - x + 1)
    high = 1.0 if x == n else beta.ppf(0.975, x + 1, n - x)
    print(f"  {x}/{n}  {centre - half:.8f} {centre + half:.8f}  {low:.8f} {high:.8f}")

print("weakest link")
risk = sum(v * s**5 for v, s in [(1, 0.5), (2, 0.8), (0.5, 1.1)])
print(f"  three parts, m 5: {-expm1(-risk):.10f}")
for m in (2, 3, 5, 8, 10, 15, 20):
    print(f"  m {m}: mean {gamma(1 + 1 / m):.6f}  median {log(2) ** (1 / m):.6f}  at 8 volumes {8 ** (-1 / m):.6f}  at 1000 {1000 ** (-1 / m):.6f}")
