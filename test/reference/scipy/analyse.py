"""The cross-check's analyses by SciPy: reads data-sets.json beside it, prints the results as JSON with the versions used.

Everything is written from the published formulas with SciPy's own tools (expn, quad, brentq, least_squares, linregress, lstsq, t and F
quantiles); nothing is shared with the project. Energies J/mol, ln A of 1/s.
"""
import json
import pathlib
import sys

import numpy as np
import scipy
from scipy import integrate, optimize, special, stats

R = 8.31446261815324
ALPHA = np.arange(1, 20) / 20
LNLN = np.log(-np.log1p(-ALPHA))
TIGHT = dict(xtol=1e-15, ftol=1e-15, gtol=1e-15, max_nfev=2000)


def line(x, y, w=None):
    """Weighted straight line: slope, intercept, standard error of the slope."""
    x, y = np.asarray(x, float), np.asarray(y, float)
    if w is None:
        fit = stats.linregress(x, y)
        return fit.slope, fit.intercept, fit.stderr
    w = np.asarray(w, float)
    root = np.sqrt(w)
    middle = np.average(x, weights=w)
    design = np.column_stack([np.ones_like(x), x - middle]) * root[:, None]
    (level, slope), rss, _, _ = np.linalg.lstsq(design, y * root, rcond=None)
    error = np.sqrt(rss[0] / (len(x) - 2) / np.sum(w * (x - middle) ** 2))
    return slope, level - slope * middle, error


def h(x):
    """x^2 e^x p(x) by the exponential integral, scaled by hand so that nothing underflows below x = 700."""
    return x * special.expn(2, x) * np.exp(x)


def energy_line(beta, T, power, factor, w):
    slope, intercept, error = line(1 / T, np.log(beta / T**power), w)
    return -R * slope / factor, R * error / factor, intercept


def ozawa_flynn_wall(beta, T, w):
    raw, error, _ = energy_line(beta, T, 0, 1, w)
    inverse = np.average(1 / T, weights=w)
    factor = optimize.brentq(lambda f: f - 1 / h(raw / f / R * inverse), 0.9, 1.6, xtol=1e-14)
    return raw / factor, error / factor


def peaks(s):
    beta, T = np.array(s["ratePerMinute"]) / 60, np.array(s["peakK"])
    w = s.get("weights")
    out = {}
    for name, power, factor in [("kissinger", 2, 1), ("boswell", 1, 1), ("starink", 1.92, 1.0008)]:
        out[name], out[name + "_error"], intercept = energy_line(beta, T, power, factor, w)
        if name == "kissinger":
            out["kissinger_ln_prefactor"] = intercept + np.log(out[name] / R)
            half = stats.t.ppf(0.975, len(T) - 2) * out["kissinger_error"]
            out["kissinger_lower95"] = out[name] - half
    out["ozawa_flynn_wall"], out["ozawa_flynn_wall_error"] = ozawa_flynn_wall(beta, T, w)
    if "startK" in s:
        slope, _, error = line(1 / T, np.log(beta / (T - np.array(s["startK"]))), w)
        out["augis_bennett"], out["augis_bennett_error"] = -R * slope, R * error
    return out


def minimum(J, dJ, w, low, high):
    """E where (sum w J)(sum w/J) is least: root of its derivative. J and dJ give arrays over scans."""

    def slope(E):
        j, d = J(E), dJ(E)
        return np.sum(w * d) * np.sum(w / j) - np.sum(w * j) * np.sum(w * d / j**2)

    return optimize.brentq(slope, low, high, xtol=1e-7, rtol=1e-13)


def linear_vyazovkin(beta, T, w, guess):
    x0 = np.mean(1 / T)

    def J(E):
        x = E / R / T
        return T * special.expn(2, x) * np.exp(E / R * x0) / beta

    def dJ(E):
        x = E / R / T
        return -special.expn(1, x) * np.exp(E / R * x0) / R / beta

    return minimum(J, dJ, w, guess * 0.7, guess * 1.4)


def step_integrals(beta, lower, upper):
    x0 = np.mean(1 / upper)

    def over(E, extra):
        return np.array([
            integrate.quad(lambda t: np.exp(E / R * (x0 - 1 / t)) * extra(t), a, b, epsabs=0, epsrel=1e-12, limit=300)[0] / r
            for a, b, r in zip(lower, upper, beta)
        ])

    return (lambda E: over(E, lambda t: 1.0)), (lambda E: over(E, lambda t: -1 / (R * t)))


def incremental_vyazovkin(rate, T, start, w, k, low, high):
    lower = start if k == 0 else T[:, k - 1]
    J, dJ = step_integrals(rate, lower, T[:, k])
    E = minimum(J, dJ, w, low, high)
    return E, J


def wight(J, E):
    n = len(J(E))

    def variance(e):
        j = J(e)
        ratio = j[:, None] / j[None, :] - 1
        return np.sum(ratio**2) / (n * (n - 1))

    least = optimize.minimize_scalar(variance, bracket=(0.99 * E, E, 1.01 * E), method="brent", options=dict(xtol=1e-9))
    limit = least.fun * stats.f.ppf(0.95, n - 1, n - 1)
    side = lambda far: optimize.brentq(lambda e: variance(e) - limit, least.x, far, xtol=1e-6)
    return side(0.5 * least.x), side(1.6 * least.x)


def ozawa(T, rate, w, temperatures):
    top = bottom = 0.0
    for at in temperatures:
        x, y, v = [], [], []
        for i in range(len(rate)):
            inverse = 1 / T[i]
            order = np.argsort(inverse)
            if inverse.min() <= 1 / at <= inverse.max():
                x.append(np.log(abs(rate[i])))
                y.append(np.interp(1 / at, inverse[order], LNLN[order]))
                v.append(w[i])
        x, y, v = np.array(x), np.array(y), np.array(v)
        mx, my = np.average(x, weights=v), np.average(y, weights=v)
        top += np.sum(v * (x - mx) * (y - my))
        bottom += np.sum(v * (x - mx) ** 2)
    return -top / bottom


CURVE_SIGMA = 0.005


def jmak(beta, T, start, w, sigma):
    """Least squares over E, ln K at x0, n and a temperature shift of each scan that is held by its scatter sigma (K)."""
    x0 = np.mean(1 / T[:, 9])
    scans = len(beta)

    def ln_integral(E):
        part = lambda t: t * special.expn(2, E / R / t) * np.exp(E / R * x0)
        return np.log((part(T) - part(start)[:, None]) / beta[:, None])

    def residual(p):
        E, lnK, n = p[0] * 1e5, p[1], p[2]
        shift = p[3:, None]
        model = 1 - np.exp(-np.exp(n * (lnK + ln_integral(E) - E / R / T**2 * shift)))
        return np.concatenate([(model - ALPHA).ravel(), CURVE_SIGMA / sigma * p[3:]])

    best = None
    for E in [1.0, 1.8, 2.6]:
        lnK = -np.median(ln_integral(E * 1e5))
        first = [E, lnK, 2.0] + [0.0] * scans
        fit = optimize.least_squares(residual, first, jac="3-point", x_scale=[1, 1, 1] + [1.0] * scans, method="lm", **TIGHT)
        if best is None or fit.cost < best.cost:
            best = fit
    E, lnK, n = best.x[:3] * np.array([1e5, 1, 1])
    return {"jmak": E, "jmak_ln_prefactor": lnK + E / R * x0, "jmak_exponent": n}


MODELS = [
    lambda a: 1 - a,
    *[(lambda n: lambda a: n * (1 - a) * (-np.log1p(-a)) ** ((n - 1) / n))(n) for n in (1.5, 2, 2.5, 3, 4)],
    lambda a: 2 * (1 - a) ** (1 / 2),
    lambda a: 3 * (1 - a) ** (2 / 3),
    lambda a: 2 * a ** (1 / 2),
    lambda a: 3 * a ** (2 / 3),
    lambda a: 1 / (2 * a),
    lambda a: 1.5 * (1 - a) ** (2 / 3) / (1 - (1 - a) ** (1 / 3)),
]


def compensation(T, lnr, w, E0):
    values = []
    for i in range(len(T)):
        pairs = []
        for f in MODELS:
            fit = stats.linregress(1 / T[i], lnr[i] - np.log(f(ALPHA)))
            pairs.append((-R * fit.slope, fit.intercept))
        E, lnA = np.array(pairs).T
        fit = stats.linregress(E, lnA)
        values.append(fit.intercept + fit.slope * E0)
    return np.average(values, weights=w)


def ramps(s, cooling=False):
    rate = np.array(s["ratePerMinute"]) / 60
    T, lnr = np.array(s["temperatureK"]), np.array(s["lnRatePerS"])
    start = np.array(s["startK"], float)
    w = np.array(s.get("weights", np.ones(len(rate))), float)
    signed = -rate if cooling else rate
    friedman, error, incremental = [], [], []
    for k in range(19):
        slope, _, e = line(1 / T[:, k], lnr[:, k], w)
        friedman.append(-R * slope)
        error.append(R * e)
        low, high = (-8e5, -5e4) if cooling else (0.5 * friedman[k], 1.6 * friedman[k])
        E, J = incremental_vyazovkin(signed, T, start, w, k, low, high)
        incremental.append(E)
        if k == 9 and not cooling and np.all(w == 1):
            limits = wight(J, E)
    out = {"friedman": friedman, "friedman_error": error, "vyazovkin": incremental}
    if s["ozawaK"]:
        out["ozawa_exponent"] = ozawa(T, rate, w, s["ozawaK"])
    if cooling:
        return out
    if np.all(w == 1):
        out["vyazovkin_wight"] = list(limits)
    for name, power, factor in [("kissinger_akahira_sunose", 2, 1), ("starink", 1.92, 1.0008)]:
        out[name] = [energy_line(rate, T[:, k], power, factor, w)[0] for k in range(19)]
    out["ozawa_flynn_wall"] = [ozawa_flynn_wall(rate, T[:, k], w)[0] for k in range(19)]
    out["vyazovkin_linear"] = [linear_vyazovkin(rate, T[:, k], w, out["starink"][k]) for k in range(19)]
    out.update(jmak(rate, T, start, w, 0.3 / np.sqrt(w)))
    out["compensation_ln_prefactor"] = compensation(T, lnr, w, np.mean(friedman[1:18]))
    # Matusita-Sakka and Sestak-Berggren: one linear least squares over all scans and conversions.
    row = np.repeat(w, 19) ** 0.5
    x = np.repeat(np.log(rate), 19)
    z = 1 / T.ravel()
    solve = lambda columns, y: np.linalg.lstsq(np.column_stack(columns) * row[:, None], y * row, rcond=None)[0]
    one = np.ones_like(x)
    zc = 1e3 * (z - np.mean(1 / T[:, 9]))
    _, b, c = solve([one, x - np.mean(x), zc], np.tile(LNLN, len(rate)))
    out["matusita_sakka_exponent"], out["matusita_sakka_scaled_energy"] = -b, -c * 1e3 * R / 1.052
    a, b, m, n = solve([one, zc, np.tile(np.log(ALPHA), len(rate)), np.tile(np.log1p(-ALPHA), len(rate))], lnr.ravel())
    out["sestak_berggren"] = [-b * 1e3 * R, a - b * 1e3 * np.mean(1 / T[:, 9]), m, n]
    return out


def holds(s):
    lnK, n, t0, covariance, temperature = [], [], [], [], []
    for hold in s["holds"]:
        t, a = np.array(hold["timeS"]), np.array(hold["conversion"])

        def parts(p):
            u = p[0] + np.log(np.maximum(t - p[2], 1e-300))
            return u, np.exp(p[1] * u)

        def residual(p):
            return 1 - np.exp(-parts(p)[1]) - a

        def jacobian(p):
            u, X = parts(p)
            slope = np.exp(-X) * X
            return np.column_stack([slope * p[1], slope * u, -slope * p[1] / (t - p[2])])

        best = None
        for part in (0.0, 0.3, 0.6, 0.9):
            start = hold["reachedS"] + part * (t[0] - hold["reachedS"])
            half = t[9] - start
            fit = optimize.least_squares(residual, [-np.log(half), 2.5, start], jac=jacobian, x_scale=[1, 1, half], method="lm", **TIGHT)
            if best is None or fit.cost < best.cost:
                best = fit
        J = jacobian(best.x)
        cov = np.linalg.inv(J.T @ J) * 2 * best.cost / (len(t) - 3)
        lnK.append(best.x[0])
        n.append(best.x[1])
        t0.append(best.x[2])
        covariance.append([cov[0, 0], cov[1, 1], cov[2, 2], cov[1, 2]])
        temperature.append(hold["temperatureK"])
    fit = stats.linregress(1 / np.array(temperature), lnK)
    return {"ln_rate": lnK, "exponent": n, "start": t0, "covariance": covariance,
            "energy": -R * fit.slope, "energy_error": R * fit.stderr, "ln_prefactor": fit.intercept}


KINDS = {"peaks": peaks, "ramps": ramps, "cooling": lambda s: ramps(s, True), "holds": holds}


def plain(value):
    if isinstance(value, dict):
        return {k: plain(v) for k, v in value.items()}
    if isinstance(value, (list, tuple, np.ndarray)):
        return [plain(v) for v in value]
    return float(f"{value:.12g}")


def main():
    folder = pathlib.Path(__file__).parent
    sets = json.loads((folder / "data-sets.json").read_text(encoding="utf-8"))["sets"]
    results = {s["name"]: plain(KINDS[s["kind"]](s)) for s in sets}
    versions = {"python": sys.version.split()[0], "scipy": scipy.__version__, "numpy": np.__version__}
    json.dump({"versions": versions, "results": results}, sys.stdout, ensure_ascii=False, indent=1)
    print()


main()
