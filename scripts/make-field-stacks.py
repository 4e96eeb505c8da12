"""Noise-free stacks of annihilation, capture, earlier pulses, a turned tensor and a slit, by a solver of their own.

    python3 scripts/make-field-stacks.py [--check] [--only NAME,...] [FOLDER]

dn/dt = div(D grad n) - n/tau - k n^2 - c n and dm/dt = c n - m/tau_m on a square grid: space by central differences of
eighth order (Fornberg, Math. Comput. 51 (1988) 699, table 1), time by the classical Runge-Kutta steps of fourth order.
The light n + m is summed over the gate along with the steps; blur, pixels and slit are exact factors of its Fourier
transform. --check halves the grid, quarters the step and prints the largest change of any pixel, as a part of the brightest.

Writes NAME.f32.gz (little-endian float32: frame, y, x; light per pixel for one pulse's excitons) and stacks.json with
the truth: lengths in um, times in ns. L is the root of D <t>, <t> the mean time from pulse to end of a free exciton:
a random walk stopped at any time t covers <x^2> = 2 D <t> per axis.
"""

import argparse
import gzip
import json
from pathlib import Path

import numpy as np
from scipy.integrate import simpson
from scipy.ndimage import correlate1d

SECOND = np.array([-1 / 560, 8 / 315, -1 / 5, 8 / 5, -205 / 72, 8 / 5, -1 / 5, 8 / 315, -1 / 560])
FIRST = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 0, 4 / 5, -1 / 5, 4 / 105, -1 / 280])

# pixel and gate; the picture is 40 x 40 pixels; centres off the middle of a pixel
COMMON = {
    "kind": "map",
    "size": 40,
    "pixel": 0.2,
    "frames": 24,
    "step": 0.5,
    "gate": 0.25,
    "psf_fwhm": None,
    "slit": None,
    "period": None,
    "x": 3.93,
    "y": 3.86,
    "s": 0.16,
    "tau": 5.0,
    "k_n0": 0.0,
    "capture": 0.0,
    "trap_lifetime": None,
}

TURN = np.deg2rad(30)
MAJOR, MINOR = 0.05, 0.02

STACKS = {
    "plain": {"D": 0.04},
    # k n0 tau = 0.3, 3 and 10
    "annihilation-weak": {"D": 0.03, "k_n0": 0.06, "psf_fwhm": 0.4},
    "annihilation": {"D": 0.03, "k_n0": 0.6, "psf_fwhm": 0.4},
    "annihilation-strong": {"D": 0.03, "k_n0": 2.0, "psf_fwhm": 0.4},
    # c tau = 0.1, 0.6 and 2
    "capture-weak": {"D": 0.06, "capture": 0.02, "trap_lifetime": 15.0},
    "capture": {"D": 0.06, "capture": 0.12, "trap_lifetime": 15.0},
    "capture-strong": {"D": 0.06, "capture": 0.4, "trap_lifetime": 15.0},
    "both": {"D": 0.05, "k_n0": 0.6, "capture": 0.12, "trap_lifetime": 15.0},
    # period / tau = 0.8, 1.5 and 3
    "earlier-pulses-dense": {"D": 0.03, "k_n0": 0.4, "period": 4.0, "step": 0.15, "gate": 0.1},
    "earlier-pulses": {"D": 0.03, "k_n0": 0.4, "period": 7.5, "step": 0.3},
    "earlier-pulses-rare": {"D": 0.03, "k_n0": 0.4, "period": 15.0, "step": 0.6},
    "turned-tensor": {
        "D_xx": MAJOR * np.cos(TURN) ** 2 + MINOR * np.sin(TURN) ** 2,
        "D_xy": (MAJOR - MINOR) * np.cos(TURN) * np.sin(TURN),
        "D_yy": MAJOR * np.sin(TURN) ** 2 + MINOR * np.cos(TURN) ** 2,
        "k_n0": 0.6,
    },
    "slit": {"D": 0.03, "k_n0": 0.6, "kind": "trace", "slit": 0.8},
}

# a train of pulses stands when what the first has left is forgotten
FORGOTTEN = 1e-8
HALF = 8.0


def solve(case, refine):
    """Light per pixel of every frame, and the mean time from pulse to end."""
    p = {**COMMON, **case}
    h = p["pixel"] / 2 / refine
    count = 2 * round(HALF / h)
    axis = (np.arange(count) - count // 2) * h
    dxx, dxy, dyy = (p[key] if "D" not in p else value for key, value in
                     zip(("D_xx", "D_xy", "D_yy"), (p.get("D"), 0.0, p.get("D"))))
    dt = 0.025 / refine**2

    def rate(state):
        n, m, _ = state
        spread = (dxx * correlate1d(n, SECOND, 1, mode="constant") + dyy * correlate1d(n, SECOND, 0, mode="constant")) / h**2
        if dxy != 0:
            across = correlate1d(correlate1d(n, FIRST, 1, mode="constant"), FIRST, 0, mode="constant")
            spread += 2 * dxy * across / h**2
        caught = p["capture"] * n
        kept = 0.0 if p["trap_lifetime"] is None else m / p["trap_lifetime"]
        # n is in units of the density at the centre right after the pulse
        return np.array([spread - n / p["tau"] - p["k_n0"] * n * n - caught, caught - kept, n + m])

    def advance(state):
        a = rate(state)
        b = rate(state + dt / 2 * a)
        c = rate(state + dt / 2 * b)
        d = rate(state + dt * c)
        return state + dt / 6 * (a + 2 * b + 2 * c + d)

    # the pulse lies at the origin of the grid; the pixels' centres are laid around it by a phase
    pulse = np.exp(-(axis[None, :] ** 2 + axis[:, None] ** 2) / (2 * p["s"]))
    excitons = pulse.sum() * h * h
    state = np.array([pulse, np.zeros_like(pulse), np.zeros_like(pulse)])
    steps_of = lambda time: round(time / dt)
    if p["period"] is not None:
        for _ in range(int(np.ceil(-np.log(FORGOTTEN) * p["tau"] / p["period"]))):
            for _ in range(steps_of(p["period"])):
                state = advance(state)
            state[0] += pulse
        state[2] = 0

    opening = {steps_of(i * p["step"]): i for i in range(p["frames"])}
    closing = {steps_of(i * p["step"] + p["gate"]): i for i in range(p["frames"])}
    before, frames = {}, {}
    left = []
    # free excitons have ended, or the next pulse comes
    last = steps_of(p["period"] if p["period"] is not None else 14 * p["tau"])
    until = max(closing)
    rest_of_time = 0.0
    for step in range(max(last, until) + 1):
        if step in opening:
            before[opening[step]] = state[2].copy()
        if step in closing:
            i = closing[step]
            frames[i] = (state[2] - before.pop(i)) / p["gate"]
        if step <= last:
            left.append(state[0].sum() * h * h / excitons)
        if step == until and p["period"] is None:
            # what is left outgrows the grid but hardly annihilates any more; its number needs no grid
            rest_of_time = rest(state[0], p, h, excitons)
            break
        state = advance(state)
    light = np.array([seen(frames[i], p, axis, h) for i in range(p["frames"])])
    return light / excitons, simpson(left, dx=dt) + rest_of_time


def rest(n, p, h, excitons):
    """Mean time still to come of the free excitons, on the same equations over a wider grid of twice the spacing."""
    count = n.shape[0]
    wide = np.zeros((count, count))
    at = count // 2 - count // 4
    wide[at : at + count // 2, at : at + count // 2] = n[::2, ::2]
    dxx, dxy, dyy = (p.get("D_xx", p.get("D")), p.get("D_xy", 0.0), p.get("D_yy", p.get("D")))
    spacing = 2 * h
    k = 2 * np.pi * np.fft.fftfreq(count, spacing)
    decay = dxx * k[None, :] ** 2 + 2 * dxy * k[None, :] * k[:, None] + dyy * k[:, None] ** 2
    dt = 0.05
    factor = np.exp(-decay * dt / 2)
    removal = 1 / p["tau"] + p["capture"]
    left = [wide.sum()]
    for _ in range(round(60 / dt)):
        wide = np.fft.ifft2(np.fft.fft2(wide) * factor).real
        # n' = -removal n - k n^2 in closed form
        fall = np.exp(-removal * dt)
        wide = wide * fall / (1 + p["k_n0"] * wide * (1 - fall) / removal)
        wide = np.fft.ifft2(np.fft.fft2(wide) * factor).real
        left.append(wide.sum())
    return simpson(left, dx=dt) * spacing**2 / excitons


def seen(light, p, axis, h):
    """Through blur and pixels (or slit) onto the pixels' centres, by the Fourier transform."""
    count = len(axis)
    k = 2 * np.pi * np.fft.fftfreq(count, h)
    along = lambda width: np.sinc(k * width / (2 * np.pi)) * width
    blur = np.exp(-(k**2) * (0 if p["psf_fwhm"] is None else p["psf_fwhm"] ** 2 / (8 * np.log(2))) / 2)
    transform = np.fft.fft2(np.fft.ifftshift(light))
    pixels = np.arange(p["size"]) * p["pixel"]
    # values at the pixels' centres: the transform's sum at those points
    at_x = np.exp(1j * np.outer(pixels - p["x"], k)) * (along(p["pixel"]) * blur) / count
    if p["kind"] == "trace":
        at_y = (along(p["slit"]) * blur / count)[None, :].astype(complex)
    else:
        at_y = np.exp(1j * np.outer(pixels - p["y"], k)) * (along(p["pixel"]) * blur) / count
    return (at_y @ transform @ at_x.T).real


def main():
    options = argparse.ArgumentParser()
    options.add_argument("folder", nargs="?", default=Path(__file__).parent.parent / "test" / "data" / "field-stacks", type=Path)
    options.add_argument("--check", action="store_true")
    options.add_argument("--only", type=lambda text: text.split(","), default=list(STACKS))
    asked = options.parse_args()
    asked.folder.mkdir(parents=True, exist_ok=True)
    listed = asked.folder / "stacks.json"
    truths = json.loads(listed.read_text()) if listed.exists() else {}
    for name in asked.only:
        light, alive = solve(STACKS[name], 1)
        if asked.check:
            finer, finer_alive = solve(STACKS[name], 2)
            change = np.abs(finer - light).max() / light.max()
            print(f"{name}: pixels change by {change:.1e} of the brightest, mean time by {finer_alive / alive - 1:.1e}")
            continue
        p = {**COMMON, **STACKS[name]}
        d = p["D"] if "D" in p else (p["D_xx"] + p["D_yy"]) / 2
        truths[name] = {**p, "mean_time": alive, "L": float(np.sqrt(d * alive)), "shape": list(light.shape)}
        data = gzip.compress(light.astype("<f4").tobytes(), 9, mtime=0)
        (asked.folder / f"{name}.f32.gz").write_bytes(data)
        listed.write_text(json.dumps({each: truths[each] for each in STACKS if each in truths}, indent=2) + "\n")
        print(name, truths[name]["mean_time"])


main()
