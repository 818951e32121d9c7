"""Independent integrations for test/forecast (SciPy 1.17.1): adaptive quadrature stretch by stretch, roots by Brent.

Laws and programmes are written out here; nothing is shared with the project's code. Run: python3 forecast_profiles.py
"""

import math

import numpy as np
from scipy.integrate import quad
from scipy.optimize import brentq
from scipy.special import expn

R = 8.31446261815324

# Bent law: E0 exp(q u), u = (1/T - x0)/dx, held at its value below the frozen temperature; JMAK exponent n.
LAW = dict(lnk=-6.5, e0=280e3, q=0.35, x0=1 / 640.0, dx=1.2e-4, n=2.6, frozen=600.0)


def ln_rate(T, law):
    x, xf = 1 / T, 1 / law["frozen"]

    def bent(x):
        u = (x - law["x0"]) / law["dx"]
        q = law["q"]
        return law["lnk"] - law["e0"] * law["dx"] / R * ((math.exp(q * u) - 1) / q if q else u)

    if x <= xf:
        return bent(x)
    ef = law["e0"] * math.exp(law["q"] * (xf - law["x0"]) / law["dx"])
    return bent(xf) - ef / R * (x - xf)


# Reflow soldering profile, s and degrees Celsius (invented for this test).
REFLOW = [(0, 25), (90, 150), (180, 200), (210, 217), (240, 260), (270, 260), (300, 217), (420, 60)]
REFLOW_LAW = dict(lnk=-5.0, e0=180e3, q=0.2, x0=1 / 530.0, dx=1.5e-4, n=3.0, frozen=480.0)


def seasonal():
    """One year, a row every six hours: a yearly and a daily sine, s and K."""
    rows = []
    for i in range(4 * 365 + 1):
        d = i / 4
        c = 11 + 13 * math.sin(2 * math.pi * (d - 110) / 365) + 6 * math.sin(2 * math.pi * d)
        # The daily sine has zeros at 0, 12 h: rows at 6 h and 18 h are its top and bottom.
        rows.append((d * 86400, 273.15 + c))
    return rows


SEASONAL_LAW = dict(lnk=-9.0, e0=140e3, q=0.25, x0=1 / 330.0, dx=1.0e-4, n=1.7, frozen=300.0)


def stretches(rows):
    for (t1, T1), (t2, T2) in zip(rows, rows[1:]):
        yield t1, T1, t2, T2


def pieces(t1, T1, t2, T2, breaks):
    """A stretch cut where the law changes its form."""
    cuts = sorted((b for b in breaks if min(T1, T2) < b < max(T1, T2)), reverse=T2 < T1)
    points = [(t1, T1)] + [(t1 + (b - T1) / (T2 - T1) * (t2 - t1), b) for b in cuts] + [(t2, T2)]
    return stretches(points)


def part(t1, T1, t2, T2, f):
    return quad(lambda t: f(T1 + (T2 - T1) * (t - t1) / (t2 - t1)), t1, t2, epsabs=0, epsrel=1e-13, limit=400)[0]


def integral(rows, f, breaks=()):
    return math.fsum(part(*p, f) for s in stretches(rows) for p in pieces(*s, breaks))


def time_of(rows, f, target, breaks=()):
    done = 0.0
    for s in stretches(rows):
        for t1, T1, t2, T2 in pieces(*s, breaks):
            step = part(t1, T1, t2, T2, f)
            if done + step >= target:
                at = lambda t: T1 + (T2 - T1) * (t - t1) / (t2 - t1)
                return brentq(lambda t: done + part(t1, T1, t, at(t), f) - target if t > t1 else done - target, t1, t2, xtol=1e-10)
            done += step
    raise ValueError("not reached")


def shared(name, rows, law):
    f = lambda T: math.exp(ln_rate(T, law))
    theta = integral(rows, f, (law["frozen"],))
    alpha = -math.expm1(-(theta ** law["n"]))
    print(f"{name}: integral {theta:.12e} conversion {alpha:.12e}")
    return f


def model_free(name, rows, x0, energies, ln_steps, edges):
    """Segments in turn, each with its own energy: times at which each ends."""
    times = []
    t0, i = rows[0][0], 0
    rest = list(rows)
    for e, ln_step in zip(energies, ln_steps):
        f = lambda T, e=e: math.exp(-e / R * (1 / T - x0) - ln_step)
        try:
            t = time_of(rest, f, 1.0)
        except ValueError:
            break
        times.append(t)
        after = [r for r in rest if r[0] > t]
        T = float(np.interp(t, [r[0] for r in rest], [r[1] for r in rest]))
        rest = [(t, T)] + after
    print(f"{name}: times of {edges[: len(times)]}: " + " ".join(f"{t:.10f}" for t in times))


if __name__ == "__main__":
    kelvin = [(t, T + 273.15) for t, T in REFLOW]
    f = shared("reflow", kelvin, REFLOW_LAW)
    for a in (0.001, 0.05):
        g = (-math.log1p(-a)) ** (1 / REFLOW_LAW["n"])
        print(f"reflow time to {a}: {time_of(kelvin, f, g, (REFLOW_LAW['frozen'],)):.10f}")
    shared("seasonal", seasonal(), SEASONAL_LAW)
    edges = [round(0.05 * k, 2) for k in range(1, 20)]
    energies = [150e3 + 4e3 * k for k in range(19)]
    ln_steps = [2.2 - 0.12 * k + 0.006 * k * k for k in range(19)]
    model_free("model-free reflow", kelvin, 1 / 530.0, energies, ln_steps, edges)
    # One ramp of an Arrhenius law in closed form: T E2(E/RT) - ... at both ends.
    E, lnA, b, T1, T2 = 210e3, 35.0, 0.25, 450.0, 640.0
    exact = math.exp(lnA) / b * (T2 * expn(2, E / (R * T2)) - T1 * expn(2, E / (R * T1)))
    by_quad = integral([(0, T1), ((T2 - T1) / b, T2)], lambda T: math.exp(lnA - E / (R * T)))
    print(f"ramp: E2 {exact:.14e} quad {by_quad:.14e}")
    # Bent law at constant temperature and along a ramp through the frozen point.
    f = lambda T: math.exp(ln_rate(T, LAW))
    print(f"bent: ln K(560) {ln_rate(560.0, LAW):.12f} ln K(680) {ln_rate(680.0, LAW):.12f}")
    print(f"bent ramp 550-690 K at 0.5 K/s: {integral([(0, 550.0), (280.0, 690.0)], f, (600.0,)):.12e}")
    # Critical rate and nose of an exact synthetic: Arrhenius, driving force (Turnbull) above 700 K up to melting at 1000 K, n = 3, X = 0.01.
    E, lnA, H, Tm, Th = 250e3, 36.0, 20e3, 1000.0, 700.0
    drive = lambda T: -math.expm1(-H / R * (1 / T - 1 / Tm))
    K = lambda T: math.exp(lnA - E / (R * T)) * (drive(T) / drive(Th) if T > Th else 1)
    whole = quad(K, 150, Th, epsabs=0, epsrel=1e-13, limit=400)[0] + quad(K, Th, Tm, epsabs=0, epsrel=1e-13, limit=400)[0]
    g = (-math.log1p(-0.01)) ** (1 / 3)
    # d ln K/dT = 0: E = H/(e^g - 1)
    nose = brentq(lambda T: E - H / math.expm1(H / R * (1 / T - 1 / Tm)), 800, 999.9, xtol=1e-11)
    print(f"critical rate {whole / g:.12e} nose {nose:.9f} time there {g / K(nose):.12e}")
    ramp = lambda T: quad(K, 150, T, epsabs=0, epsrel=1e-13, limit=400)[0] / 2.0
    print(f"temperature of 0.5 at 2 K/s: {brentq(lambda T: ramp(T) - math.log(2) ** (1 / 3), 600, 900, xtol=1e-11):.9f}")
