"""Solves the printed equations behind the reference values in tests and checks.

Independent of the Rust code: needs Python with scipy and statsmodels. Run it and compare:
    python3 assets/reference_values.py
"""

from itertools import product
from math import expm1, log, log1p, sqrt

import numpy as np
import statsmodels.api as sm
from scipy.optimize import brentq, minimize, minimize_scalar
from scipy.special import gamma
from scipy.stats import beta, chi2, norm, rankdata, spearmanr
from statsmodels.duration.survfunc import SurvfuncRight, survdiff

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

# Probabilities three standard errors of 4000 drawings around 2.5 and 97.5 %.
AROUND = (0.0175, 0.0325, 0.9675, 0.9825)


def quantiles(drawn):
    return " ".join(f"{value:.9f}" for value in np.quantile(drawn, AROUND))


print("full factorial of 3 x 2 combinations, packs drawn by number: value and quantiles over all drawings")
table = np.array([
    [10.1, 11.3, 9.6, 10.9, 10.4], [12.0, 13.1, 11.2, 12.9, 12.2], [8.7, 9.9, 8.4, 9.1, 9.2],
    [11.9, 12.6, 11.1, 12.4, 11.8], [6.2, 7.9, 6.0, 6.9, 6.4], [11.0, 12.2, 10.1, 11.7, np.nan],
]).reshape(3, 2, 5)
drawings = np.array(list(product(range(5), repeat=5)))
# One drawing in 3125 takes the missing pack five times and leaves the last combination without packs.
drawings = drawings[~np.all(drawings == 4, axis=1)]
drawn_means = np.nanmean(table[:, :, drawings], axis=-1)
means = np.nanmean(table, axis=-1)


def deviations(m):
    return m - m.mean(axis=1, keepdims=True) - m.mean(axis=0, keepdims=True) + m.mean(axis=(0, 1), keepdims=True)


for factor, level in [(0, 1), (0, 2), (1, 1)]:
    other = 1 - factor
    at, drawn = means.mean(axis=other), drawn_means.mean(axis=other)
    print(f"  factor {factor} level {level}: {at[level]:.9f}  {quantiles(drawn[level])}")
    print(f"    difference {at[level] - at[0]:.9f}  {quantiles(drawn[level] - drawn[0])}")
sizes = np.abs(deviations(means))
place = tuple(map(int, np.argwhere(sizes > sizes.max() - 1e-9)[-1]))
print(f"  deviation at {place}: {deviations(means)[place]:.9f}  {quantiles(deviations(drawn_means)[place])}")

print("least squares and ranks over eight points")
columns = np.array([
    [0.05, 0.91, 0.42, 0.66, 0.18, 0.80, 0.31, 0.55], [0.60, 0.20, 0.95, 0.08, 0.33, 0.74, 0.47, 0.86],
])
response = np.array([71.2, 52.8, 60.1, 58.9, 69.0, 50.7, 66.3, 57.5])
model = sm.OLS(response, sm.add_constant(columns.T)).fit()
print(f"  slopes {model.params[1]:.9f} {model.params[2]:.9f}  explained {model.rsquared:.9f}")
chosen = np.random.default_rng(1).integers(0, 8, (1_000_000, 8))
x, y = columns[:, chosen], response[chosen]
x, y = x - x.mean(axis=-1, keepdims=True), y - y.mean(axis=-1, keepdims=True)
xx, yy, xy = (x[0] ** 2).sum(-1), (x[1] ** 2).sum(-1), (x[0] * x[1]).sum(-1)
xr, yr = (x[0] * y).sum(-1), (x[1] * y).sum(-1)
with np.errstate(invalid="ignore", divide="ignore"):
    determinant = np.where(xx * yy - xy**2 > 1e-9 * xx * yy, xx * yy - xy**2, np.nan)
for name, slope in [("first", (yy * xr - xy * yr) / determinant), ("second", (xx * yr - xy * xr) / determinant)]:
    print(f"  {name} slope  {quantiles(slope[np.isfinite(slope)])}")
print(f"  Spearman {spearmanr(columns[0], response)[0]:.9f} {spearmanr(columns[1], response)[0]:.9f}")
a, b = rankdata(columns[1][chosen[:200_000]], axis=-1), rankdata(response[chosen[:200_000]], axis=-1)
a, b = a - a.mean(axis=-1, keepdims=True), b - b.mean(axis=-1, keepdims=True)
print(f"  of the second  {quantiles((a * b).sum(-1) / np.sqrt((a * a).sum(-1) * (b * b).sum(-1)))}")
print(f"  with ties {spearmanr([1, 2, 2, 3, 5], [2, 1, 3, 3, 4])[0]:.9f}")

print("survival: events and ends of watching of each group")


def lifetimes(events, censored=()):
    return np.array([*events, *censored], float), np.array([1] * len(events) + [0] * len(censored))


def compare(*groups):
    times, ended = (np.concatenate(part) for part in zip(*groups))
    statistic, tail = survdiff(times, ended, np.repeat(range(len(groups)), [len(group[0]) for group in groups]))
    return f"{statistic:.9f}  p {tail:.9g}"


treated = lifetimes([6, 6, 6, 7, 10, 13, 16, 22, 23], [6, 9, 10, 11, 17, 19, 20, 25, 32, 32, 34, 35])
untreated = lifetimes([1, 1, 2, 2, 3, 4, 4, 5, 5, 8, 8, 8, 8, 11, 11, 12, 12, 15, 17, 22, 23])
for name, group in [("treated", treated), ("untreated", untreated)]:
    curve = SurvfuncRight(*group)
    with np.errstate(all="ignore"):
        limits = curve.quantile_ci(0.5, method="cloglog")
    print(f"  {name}: median {curve.quantile(0.5)}  limits {limits[0]} {limits[1]}")
    for time, share, error in zip(curve.surv_times, curve.surv_prob, curve.surv_prob_se):
        spread = np.exp(z * error / (share * abs(log(share)))) if share > 0 else np.nan
        print(f"    {time:g}  {share:.6f}  {error:.6f}  {share**spread:.6f} {share ** (1 / spread):.6f}")
print(f"  log-rank {compare(treated, untreated)}")
three = lifetimes([3, 5, 5, 8, 12], [5, 14]), lifetimes([5, 8, 8, 9], [8, 15, 16, 20]), lifetimes([2, 2, 3, 4, 8, 9], [10])
print(f"  of three groups {compare(*three)}")

print("twelve predictions in three bins")
pairs = np.array(sorted([
    (0.62, 1), (0.05, 0), (0.31, 1), (0.90, 1), (0.12, 0), (0.47, 0),
    (0.08, 1), (0.71, 1), (0.55, 1), (0.24, 0), (0.83, 0), (0.38, 0),
])).reshape(3, 4, 2)
predicted, happened = pairs[..., 0].mean(axis=1), pairs[..., 1].sum(axis=1)
statistic = ((happened - 4 * predicted) ** 2 / (4 * predicted * (1 - predicted))).sum()
print(f"  {statistic:.9f}  p {chi2.sf(statistic, 3):.9f}")

print("strength from bench outcomes under four uniform tensions, V = V0: value and profile limits of scale and modulus")
tensions, beads, torn = np.array([300.0, 400.0, 500.0, 600.0]), 20, np.array([1, 4, 11, 18])
drop = chi2.ppf(0.95, 1) / 2


def lack(ln_scale, ln_modulus):
    risk = np.exp(np.exp(ln_modulus) * (np.log(tensions) - ln_scale))
    return (beads - torn) @ risk - torn @ np.log(-np.expm1(-risk))


def least(function, bounds):
    return minimize_scalar(function, bounds=bounds, method="bounded", options={"xatol": 1e-12}).fun


options = {"xatol": 1e-11, "fatol": 1e-13, "maxiter": 9999}
best = minimize(lambda at: lack(*at), [np.log(480), np.log(5)], method="Nelder-Mead", options=options)
profiles = [
    lambda ln_scale: least(lambda ln_modulus: lack(ln_scale, ln_modulus), (0, log(100))) - best.fun - drop,
    lambda ln_modulus: least(lambda ln_scale: lack(ln_scale, ln_modulus), (5.5, 7)) - best.fun - drop,
]
for value, profile in zip(best.x, profiles):
    limits = np.exp([brentq(profile, value - 1, value), brentq(profile, value, value + 1)])
    print(f"  {np.exp(value):.6f}  {limits[0]:.6f} {limits[1]:.6f}")
p = -np.expm1(-((tensions / np.exp(best.x[0])) ** np.exp(best.x[1])))
statistic = ((torn - beads * p) ** 2 / (beads * p * (1 - p))).sum()
print(f"  chi-squared {statistic:.6f}  p {chi2.sf(statistic, 2):.6f}")


def ratio(p):
    return 5 * log(p / 0.25) + 15 * log((1 - p) / 0.75) + drop


print(f"  one load, 5 of 20: {brentq(ratio, 1e-6, 0.25):.9f} {brentq(ratio, 0.25, 1 - 1e-6):.9f}")
