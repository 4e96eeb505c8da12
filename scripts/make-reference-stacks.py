#!/usr/bin/env python3
"""Reference data from NumPy and SciPy, independent of the library's own code.

    python3 scripts/make-reference-stacks.py

writes test/data/scipy/spot-fits.json (Poisson maximum-likelihood fits of small frames) and
test/data/scipy/reaction-diffusion.json (densities with annihilation and capture) and test/data/scipy/repulsion.json
(densities with repulsion). Seeded; run once, kept as data.
"""

import json
from pathlib import Path

import numpy as np
import scipy
from scipy.integrate import solve_ivp
from scipy.optimize import minimize, root

OUT = Path(__file__).resolve().parent.parent / "test" / "data" / "scipy"
VERSIONS = {"numpy": np.__version__, "scipy": scipy.__version__}


# ---- spots: m(r) = N a²/(2π√|Σ|) exp(−½ (r−c)ᵀ Σ⁻¹ (r−c)) + B, counts Poisson ------------------------------------


def map_model(p, x, y, a):
    """Mean counts and their derivatives; p = N, cx, cy, Σxx, Σxy, Σyy, B."""
    n, cx, cy, sxx, sxy, syy, b = p
    det = sxx * syy - sxy**2
    dx, dy = x - cx, y - cy
    ixx, ixy, iyy = syy / det, -sxy / det, sxx / det
    ux, uy = ixx * dx + ixy * dy, ixy * dx + iyy * dy
    g = a * a / (2 * np.pi * np.sqrt(det)) * np.exp(-0.5 * (dx * ux + dy * uy))
    s = n * g
    derivatives = np.stack(
        [g, s * ux, s * uy, s * 0.5 * (ux**2 - ixx), s * (ux * uy - ixy), s * 0.5 * (uy**2 - iyy), np.ones_like(g)]
    )
    return s + b, derivatives


def trace_model(p, x, a):
    """Mean counts and their derivatives; p = N, cx, Σxx, B."""
    n, cx, sxx, b = p
    dx = x - cx
    g = a / np.sqrt(2 * np.pi * sxx) * np.exp(-0.5 * dx**2 / sxx)
    s = n * g
    return s + b, np.stack([g, s * dx / sxx, s * 0.5 * (dx**2 / sxx**2 - 1 / sxx), np.ones_like(g)])


def fit(counts, model, start):
    """Poisson maximum likelihood: a minimiser first, then the score equations solved to the last digits."""
    scale = np.where(np.abs(start) > 0, np.abs(start), 0.1)

    def cost(q):
        mean, d = model(q * scale)
        if np.any(mean <= 0):
            return np.inf, np.zeros_like(q)
        return np.sum(mean - counts * np.log(mean)), (d @ (1 - counts / mean)) * scale

    def score(q):
        mean, d = model(q * scale)
        return (d @ (counts / mean - 1)) * scale

    rough = minimize(cost, start / scale, jac=True, method="BFGS", options={"gtol": 1e-7})
    exact = root(score, rough.x, method="hybr", options={"xtol": 1e-14})
    p = exact.x * scale
    mean, d = model(p)
    fisher = (d / mean) @ d.T
    step = np.linalg.solve(fisher, d @ (counts / mean - 1))
    u = np.sqrt(np.diag(np.linalg.inv(fisher)))
    # what a further scoring step would still change, in standard uncertainties
    assert np.max(np.abs(step) / u) < 1e-9, (step, u)
    assert np.allclose(cost(exact.x)[0], rough.fun, rtol=1e-9)
    return p, u


def tensor(major, minor, degrees):
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    return major * c * c + minor * s * s, (major - minor) * c * s, major * s * s + minor * c * c


def spot_cases():
    rng = np.random.default_rng(20240611)
    maps = [
        # name, pixels, pixel size, photons, principal variances and angle, growth of both per frame, background
        ("round", 24, 0.1, (2e4, 1.5e4, 1.1e4), (0.09, 0.09, 0), 0.02, 0.5),
        ("turned", 24, 0.1, (3e4, 2e4, 1.3e4), (0.14, 0.06, 35), 0.015, 1.0),
        ("low-light", 24, 0.1, (400, 300, 250), (0.08, 0.08, 0), 0.01, 0.1),
        ("high-background", 24, 0.1, (2e4, 1.2e4, 7e3), (0.1, 0.07, -60), 0.02, 40.0),
    ]
    cases = []
    for name, size, a, photons, (major, minor, angle), growth, b in maps:
        y, x = np.mgrid[0:size, 0:size] * a
        x, y = x.ravel(), y.ravel()
        model = lambda p: map_model(p, x, y, a)  # noqa: E731
        frames = []
        for i, n in enumerate(photons):
            sigma = tensor(major + i * growth, minor + i * growth, angle)
            truth = np.array([n, 1.13, 1.21, *sigma, b])
            counts = rng.poisson(model(truth)[0])
            p, u = fit(counts, model, np.where(truth == 0, 1e-3, truth))
            frames.append({"counts": counts.tolist(), "truth": truth.tolist(), "parameters": p.tolist(), "u": u.tolist()})
        cases.append({"name": name, "kind": "map", "height": size, "width": size, "pixel_um": a, "frames": frames})
    size, a = 64, 0.08
    x = np.arange(size) * a
    model = lambda p: trace_model(p, x, a)  # noqa: E731
    frames = []
    for i, n in enumerate((8e3, 5e3, 3e3, 1e3)):
        truth = np.array([n, 2.47, 0.09 + 0.03 * i, 2.0])
        counts = rng.poisson(model(truth)[0])
        p, u = fit(counts, model, truth)
        frames.append({"counts": counts.tolist(), "truth": truth.tolist(), "parameters": p.tolist(), "u": u.tolist()})
    cases.append({"name": "trace", "kind": "trace", "height": 1, "width": size, "pixel_um": a, "frames": frames})
    return {
        "made_by": "scripts/make-reference-stacks.py: scipy.optimize on the Poisson likelihood, u from the inverse expected Fisher matrix",
        "versions": VERSIONS,
        "order": {"map": "N, cx, cy, Sxx, Sxy, Syy, B", "trace": "N, cx, Sxx, B"},
        "cases": cases,
    }


# ---- densities: round spots by finite volumes on rings, a turned tensor by finite differences on a square -----------


def ring_solution(case, times, cells):
    """∂n/∂t = D∇²n − n/τ − k n² − c n, ∂m/∂t = c n − m/τm on rings of equal width; second order in the width."""
    sigma2, d, tau, k, c, tau_m = (case[key] for key in ("sigma2", "d", "tau", "k", "c", "tau_m"))
    reach = 7.5 * np.sqrt(sigma2 + 2 * d * times[-1])
    h = reach / cells
    edge = h * np.arange(cells + 1)
    area = np.pi * (edge[1:] ** 2 - edge[:-1] ** 2)
    # mean of the start over each ring
    ring = np.exp(-0.5 * edge**2 / sigma2)
    n0 = (ring[:-1] - ring[1:]) / area

    def slope(_, state):
        n, m = state[:cells], state[cells:]
        flux = np.zeros(cells + 1)
        flux[1:-1] = -d * (n[1:] - n[:-1]) / h * 2 * np.pi * edge[1:-1]
        return np.concatenate(
            [(flux[:-1] - flux[1:]) / area - n / tau - k * n * n - c * n, c * n - m / tau_m]
        )

    start = np.concatenate([n0, 0 * n0])
    s = solve_ivp(slope, (0, times[-1]), start, "DOP853", times, rtol=1e-11, atol=1e-15)
    middle2 = 0.5 * (edge[1:] ** 2 + edge[:-1] ** 2)
    rows = []
    for j in range(len(times)):
        n, m = s.y[:cells, j], s.y[cells:, j]
        row = {"free": np.sum(n * area), "free_variance": 0.5 * np.sum(n * area * middle2) / np.sum(n * area)}
        row["free_centre"] = (5 * n[0] - n[1]) / 4
        if c > 0:
            row["caught"] = np.sum(m * area)
            row["caught_variance"] = 0.5 * np.sum(m * area * middle2) / np.sum(m * area)
        rows.append(row)
    return rows


def pushed_rings(case, times, cells):
    """∂n/∂t = ∇·D(1 + b n)∇n − n/τ − k n² on rings of equal width: the flux is −D times the slope of n + ½b n²."""
    sigma2, d, tau, k, b = (case[key] for key in ("sigma2", "d", "tau", "k", "b"))
    # a round Gaussian's variance grows at most by 2D(1 + b n₀/4) per time
    reach = 7.5 * np.sqrt(sigma2 + 2 * d * (1 + b / (8 * np.pi * sigma2)) * times[-1])
    h = reach / cells
    edge = h * np.arange(cells + 1)
    area = np.pi * (edge[1:] ** 2 - edge[:-1] ** 2)
    ring = np.exp(-0.5 * edge**2 / sigma2)

    def slope(_, n):
        pressure = n + 0.5 * b * n * n
        flux = np.zeros(cells + 1)
        flux[1:-1] = -d * (pressure[1:] - pressure[:-1]) / h * 2 * np.pi * edge[1:-1]
        return (flux[:-1] - flux[1:]) / area - n / tau - k * n * n

    s = solve_ivp(slope, (0, times[-1]), (ring[:-1] - ring[1:]) / area, "LSODA", times, rtol=1e-11, atol=1e-14, lband=1, uband=1)
    middle2 = 0.5 * (edge[1:] ** 2 + edge[:-1] ** 2)
    return [
        {"free": np.sum(n * area), "free_variance": 0.5 * np.sum(n * area * middle2) / np.sum(n * area), "free_centre": (5 * n[0] - n[1]) / 4}
        for n in s.y.T
    ]


def rings(case, times, solution=ring_solution):
    coarse, fine = solution(case, times, 240), solution(case, times, 480)
    finest = solution(case, times, 960)
    out = []
    for a, b, c in zip(coarse, fine, finest):
        first = {key: (4 * b[key] - a[key]) / 3 for key in a}
        second = {key: (4 * c[key] - b[key]) / 3 for key in a}
        for key in a:
            assert abs(second[key] - first[key]) < 2e-6 * abs(second[key]), (case, key, first[key], second[key])
        out.append({key: float(second[key]) for key in second})
    return out


COEFFICIENTS = {1: [4 / 5, -1 / 5, 4 / 105, -1 / 280], 2: [8 / 5, -1 / 5, 8 / 315, -1 / 560]}


def first_derivative(f, axis, h):
    return sum(w * (np.roll(f, -j, axis) - np.roll(f, j, axis)) for j, w in enumerate(COEFFICIENTS[1], 1)) / h


def second_derivative(f, axis, h):
    sides = sum(w * (np.roll(f, -j, axis) + np.roll(f, j, axis)) for j, w in enumerate(COEFFICIENTS[2], 1))
    return (sides - 205 / 72 * f) / h**2


def square_solution(case, times, size):
    """Turned tensor with annihilation; eighth-order central differences on a square."""
    sxx, sxy, syy = case["sigma"]
    dxx, dxy, dyy = case["tensor"]
    side = 14 * np.sqrt(max(sxx + 2 * dxx * times[-1], syy + 2 * dyy * times[-1]))
    h = side / size
    line = (np.arange(size) - size // 2) * h
    y, x = np.meshgrid(line, line, indexing="ij")
    det = sxx * syy - sxy**2
    n0 = np.exp(-0.5 * (syy * x * x - 2 * sxy * x * y + sxx * y * y) / det) / (2 * np.pi * np.sqrt(det))

    def slope(_, state):
        n = state.reshape(size, size)
        mixed = first_derivative(first_derivative(n, 0, h), 1, h)
        spread = dxx * second_derivative(n, 1, h) + 2 * dxy * mixed + dyy * second_derivative(n, 0, h)
        return (spread - n / case["tau"] - case["k"] * n * n).ravel()

    s = solve_ivp(slope, (0, times[-1]), n0.ravel(), "DOP853", times, rtol=1e-10, atol=1e-13)
    rows = []
    for j in range(len(times)):
        n = s.y[:, j].reshape(size, size)
        total = n.sum()
        moment = lambda w: float((n * w).sum() / total)  # noqa: E731
        rows.append(
            {"free": float(total * h * h), "covariance": [moment(x * x), moment(x * y), moment(y * y)],
             "free_centre": float(n[size // 2, size // 2])}
        )
    return rows


def square(case, times):
    coarse, fine = square_solution(case, times, 112), square_solution(case, times, 160)
    for a, b in zip(coarse, fine):
        assert abs(a["free"] - b["free"]) < 1e-6 * b["free"], (a, b)
        assert abs(a["free_centre"] - b["free_centre"]) < 3e-6 * b["free_centre"], (a, b)
    return fine


def densities():
    times = [0.5, 2.0, 6.0, 12.0]
    peak = 1 / (2 * np.pi * 0.1)
    round_cases = [
        {"name": "annihilation k n0 tau = 1", "sigma2": 0.1, "d": 0.01, "tau": 6.0, "k": 1 / 6 / peak, "c": 0.0, "tau_m": 1e9},
        {"name": "annihilation k n0 tau = 10", "sigma2": 0.1, "d": 0.02, "tau": 6.0, "k": 10 / 6 / peak, "c": 0.0, "tau_m": 1e9},
        {"name": "capture c tau = 1", "sigma2": 0.1, "d": 0.02, "tau": 6.0, "k": 0.0, "c": 1 / 6, "tau_m": 15.0},
        {"name": "both", "sigma2": 0.1, "d": 0.015, "tau": 6.0, "k": 3 / 6 / peak, "c": 0.1, "tau_m": 9.0},
    ]
    turned = {"name": "turned tensor, k n0 tau = 3", "sigma": [0.1, 0.02, 0.08], "tensor": list(tensor(0.02, 0.008, 30)), "tau": 6.0}
    turned["k"] = 3 / 6 * 2 * np.pi * np.sqrt(0.1 * 0.08 - 0.02**2)
    return {
        "made_by": "scripts/make-reference-stacks.py: finite volumes on rings (Richardson) and eighth-order differences on a square, scipy.integrate.solve_ivp",
        "versions": VERSIONS,
        "units": "um, ns; one exciton at the start",
        "times": times,
        "round": [{**case, "rows": rings(case, times)} for case in round_cases],
        "turned": {**turned, "rows": square(turned, times[:3])},
    }


def pushed_densities():
    times = [0.5, 2.0, 6.0]
    peak = 1 / (2 * np.pi * 0.1)
    cases = [
        {"name": "b n0 = 0.3", "sigma2": 0.1, "d": 0.02, "tau": 6.0, "k": 0.0, "b": 0.3 / peak},
        {"name": "b n0 = 2", "sigma2": 0.1, "d": 0.02, "tau": 6.0, "k": 0.0, "b": 2 / peak},
        {"name": "b n0 = 8", "sigma2": 0.1, "d": 0.01, "tau": 6.0, "k": 0.0, "b": 8 / peak},
        {"name": "b n0 = 1, k n0 tau = 3", "sigma2": 0.1, "d": 0.02, "tau": 6.0, "k": 3 / 6 / peak, "b": 1 / peak},
    ]
    return {
        "made_by": "scripts/make-reference-stacks.py: finite volumes on rings (Richardson), scipy.integrate.solve_ivp",
        "versions": VERSIONS,
        "units": "um, ns; one exciton at the start",
        "times": times,
        "round": [{**case, "rows": rings(case, times, pushed_rings)} for case in cases],
    }


if __name__ == "__main__":
    OUT.mkdir(parents=True, exist_ok=True)
    (OUT / "spot-fits.json").write_text(json.dumps(spot_cases(), separators=(",", ":")) + "\n")
    (OUT / "reaction-diffusion.json").write_text(json.dumps(densities(), indent=1) + "\n")
    (OUT / "repulsion.json").write_text(json.dumps(pushed_densities(), indent=1) + "\n")
