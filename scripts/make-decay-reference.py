"""Writes test/decay/reference.json: decay laws and fits computed with NumPy and SciPy, by their definitions.

Run: python3 scripts/make-decay-reference.py
Nothing here uses a closed form of the code under test: annihilation is integrated over the radius of the spot and,
with repeated pulses, iterated pulse by pulse until it repeats; earlier pulses are added one by one; gates and responses
are integrated numerically.
"""

import json
import sys

import numpy as np
import scipy
import scipy.special
from scipy.optimize import curve_fit

X, W = np.polynomial.legendre.leggauss(24)


def integrate(f, cuts):
    """Composite Gauss-Legendre over consecutive cuts, each panel split in eight."""
    total = 0.0
    for a, b in zip(cuts[:-1], cuts[1:]):
        edges = np.linspace(a, b, 9)
        for lo, hi in zip(edges[:-1], edges[1:]):
            x = lo + (hi - lo) * (X + 1) / 2
            total += (hi - lo) / 2 * np.sum(W * f(x))
    return total


def density(law, p, u):
    """n/n0 after one pulse at ages u >= 0."""
    if law == "exponential":
        return np.exp(-u / p[1])
    if law == "two_exponentials":
        return p[1] * np.exp(-u / p[2]) + (1 - p[1]) * np.exp(-u / p[3])
    if law == "stretched":
        return np.exp(-((u / p[1]) ** p[2]))
    raise ValueError(law)


# Places of a Gaussian spot, by radius in units of its standard deviation.
EDGES = np.linspace(0, 9, 13)
R = np.concatenate([lo + (hi - lo) * (X + 1) / 2 for lo, hi in zip(EDGES[:-1], EDGES[1:])])
AREA = np.concatenate([(hi - lo) / 2 * W for lo, hi in zip(EDGES[:-1], EDGES[1:])]) * R


def uniform(n, tau, k, u):
    e = np.exp(-u / tau)
    return n * e / (1 + k * n * tau * (1 - e))


def light(law, p, order, period):
    """A function of the age u (array) since the last pulse."""
    if law == "annihilation":
        added = np.exp(-R * R / 2)
        start = added.copy()
        if period:
            for _ in range(20000):
                new = added + uniform(start, p[1], p[2], period)
                if np.max(np.abs(new - start)) < 1e-15:
                    break
                start = new
        one = np.sum(AREA * added**order)
        return lambda u: p[0] * np.array(
            [np.sum(AREA * uniform(start, p[1], p[2], v) ** order) / one for v in np.atleast_1d(u)]
        )
    if not period:
        return lambda u: p[0] * density(law, p, u) ** order
    count = 20000 if law == "stretched" else 3000
    m = np.arange(count)
    return lambda u: p[0] * np.array(
        [np.sum(density(law, p, v + m * period)) ** order for v in np.atleast_1d(u)]
    )


def observe(law, p, order, delays, gate, fwhm, period):
    shape = light(law, p, order, period)

    def bright(t):
        t = np.atleast_1d(t)
        if period:
            return shape(np.mod(t, period))
        return np.where(t >= 0, shape(np.maximum(t, 0)), 0.0)

    def gated(f, t):
        if gate == 0:
            return float(f(np.array([t]))[0])
        return integrate(f, cuts(t, t + gate)) / gate

    def cuts(a, b):
        """Ends at pulses, and shrinking towards them."""
        pulses = [0.0] if not period else [q * period for q in range(-3, 4)]
        inside = {a, b}
        for q in pulses:
            for step in [0] + [2.0**-j for j in range(0, 40, 2)]:
                for at in (q + step, q - step):
                    if a < at < b:
                        inside.add(at)
        return sorted(inside)

    if not fwhm:
        return [gated(bright, t) for t in delays]
    s = fwhm / (2 * np.sqrt(2 * np.log(2)))

    def kernel(u, t):
        """Share of the light of time u that reaches the frame opened at t."""
        if gate == 0:
            return np.exp(-((t - u) ** 2) / (2 * s * s)) / (s * np.sqrt(2 * np.pi))
        erf = scipy.special.erf
        return (erf((t + gate - u) / (s * np.sqrt(2))) - erf((t - u) / (s * np.sqrt(2)))) / (2 * gate)

    out = []
    for t in delays:
        ends = cuts(t - 9 * s, t + gate + 9 * s)
        out.append(integrate(lambda u: bright(u) * kernel(u, t), ends))
    return out


PARAMETERS = {
    "exponential": [1000, 2.5],
    "two_exponentials": [1000, 0.6, 0.8, 5.0],
    "stretched": [1000, 1.7, 0.6],
    "annihilation": [1000, 4.0, 1.3],
}
TIMINGS = [
    {"gate": 0, "fwhm": None, "period": None},
    {"gate": 0.7, "fwhm": None, "period": None},
    {"gate": 0.7, "fwhm": None, "period": 6.0},
    {"gate": 0, "fwhm": 0.3, "period": None},
    {"gate": 0.7, "fwhm": 0.3, "period": None},
    {"gate": 0.7, "fwhm": 0.3, "period": 6.0},
    {"gate": 0, "fwhm": 0.3, "period": 6.0},
]
DELAYS = [-1.2, -0.4, 0.0, 0.3, 1.0, 2.5, 5.1]


def observations():
    cases = []
    for law, p in PARAMETERS.items():
        for order in (1, 2):
            for timing in TIMINGS:
                values = observe(law, p, order, DELAYS, **timing)
                cases.append({"law": law, "parameters": p, "order": order, "delays": DELAYS, **timing, "light": values})
    return cases


def gated_model(law, delays, gate):
    """The plain gate average, on a fixed fine rule, for curve_fit."""
    ages = [lo + (gate / 4) * (X + 1) / 2 + j * gate / 4 for lo in delays for j in range(4)]
    ages = np.array(ages).reshape(len(delays), 4 * len(X))
    weights = np.tile(W, 4) / 8

    def model(_, *p):
        if law == "annihilation":
            a = p[2] * p[1] * -np.expm1(-ages / p[1])
            values = np.exp(-ages / p[1]) * np.log1p(a) / a
        else:
            values = density(law, p, ages)
        return p[0] * values @ weights

    return model


def fits():
    rng = np.random.default_rng(20240)
    delays = np.array([0.1, 0.6, 1.1, 1.6, 2.1, 2.6, 3.1, 4.1, 5.1, 6.1, 7.1, 9.1, 11.1, 13.1, 16.1, 19.1])
    gate = 0.5
    cases = []
    for law, truth in PARAMETERS.items():
        truth = [2e4, *truth[1:]]
        model = gated_model(law, delays, gate)
        clean = model(delays, *truth)
        sigma = np.sqrt(clean + 50)
        data = np.round(clean + sigma * rng.standard_normal(len(delays)), 2)
        p, c = curve_fit(model, delays, data, p0=truth, sigma=sigma, absolute_sigma=True, xtol=1e-14, ftol=1e-14, gtol=1e-14)
        chi2 = float(np.sum(((data - model(delays, *p)) / sigma) ** 2))
        cases.append(
            {
                "law": law,
                "delays": delays.tolist(),
                "gate": gate,
                "light": data.tolist(),
                "sigma": sigma.tolist(),
                "parameters": p.tolist(),
                "u": np.sqrt(np.diag(c)).tolist(),
                "chi2": chi2,
            }
        )
    return cases


def main():
    reference = {
        "made_by": f"scripts/make-decay-reference.py, NumPy {np.__version__}, SciPy {scipy.__version__}",
        "observations": observations(),
        "fits": fits(),
    }
    path = sys.argv[1] if len(sys.argv) > 1 else "test/decay/reference.json"
    with open(path, "w", encoding="utf-8") as file:
        json.dump(reference, file)
    print(path, len(reference["observations"]), len(reference["fits"]))


if __name__ == "__main__":
    main()
