import { describe, expect, it } from "vitest";
import { normalShare } from "../../src/field/gaussian-light.ts";
import { meanFrames } from "../../src/field/mean-frames.ts";
import { type Medium, peakDensity, plainMedium, type Start, tensorFromAxes } from "../../src/field/medium.ts";
import { DEFAULT_ACCURACY, type Recording } from "../../src/field/recording.ts";
import { spectralLight } from "../../src/field/spectral-light.ts";
import { steppedLight } from "../../src/field/stepped-light.ts";

const START: Start = { amount: 1000, covariance: [0.1, 0, 0.1] };

function map(parts: Partial<Recording> = {}): Recording {
  return {
    columns: 48,
    rows: 40,
    pixelX: 0.12,
    pixelY: 0.12,
    delays: [0, 2, 5],
    gate: 0,
    period: null,
    responseSigma: 0,
    psfVariance: 0,
    centre: [2.9, 2.3],
    drift: [0, 0],
    ...parts,
  };
}

function trace(slit: number, parts: Partial<Recording> = {}): Recording {
  return map({ columns: 80, rows: 1, pixelX: 0.1, pixelY: slit, centre: [4, 0], ...parts });
}

function total(frame: Float64Array): number {
  return frame.reduce((sum, value) => sum + value, 0);
}

function pictureMoments(frame: Float64Array, { columns, pixelX, pixelY }: Recording) {
  let [n, x, y, xx, xy, yy] = [0, 0, 0, 0, 0, 0];
  frame.forEach((value, i) => {
    const [px, py] = [(i % columns) * pixelX, Math.floor(i / columns) * pixelY];
    n += value;
    x += value * px;
    y += value * py;
    xx += value * px * px;
    xy += value * px * py;
    yy += value * py * py;
  });
  const [mx, my] = [x / n, y / n];
  return { centre: [mx, my], covariance: [xx / n - mx * mx, xy / n - mx * my, yy / n - my * my] };
}

function largestDifference(a: readonly Float64Array[], b: readonly Float64Array[]): number {
  let worst = 0;
  a.forEach((frame, f) => {
    const peak = Math.max(...frame);
    frame.forEach((value, i) => {
      worst = Math.max(worst, Math.abs(value - b[f]![i]!) / peak);
    });
  });
  return worst;
}

describe("plain diffusion", () => {
  const medium = plainMedium([0.05, 0, 0.05], 6);

  it("becomes the point source in the plane, N/(4πDt)·exp(−r²/4Dt − t/τ), once the start is forgotten", () => {
    const recording = map({ delays: [4], pixelX: 1e-3, pixelY: 1e-3, centre: [0.02, 0.012] });
    const [frame] = meanFrames(medium, { amount: 1, covariance: [1e-8, 0, 1e-8] }, recording).frames;
    for (const [ix, iy] of [
      [20, 12],
      [47, 39],
      [0, 0],
    ] as const) {
      const r2 = (ix * 1e-3 - 0.02) ** 2 + (iy * 1e-3 - 0.012) ** 2;
      const density = Math.exp(-r2 / (4 * 0.05 * 4) - 4 / 6) / (4 * Math.PI * 0.05 * 4);
      expect(Math.abs(frame![iy * 48 + ix]! / 1e-6 / density - 1)).toBeLessThan(1e-6);
    }
  });

  it("puts light N₀e^(−t/τ) in the picture, with variance Σ₀ + 2Dt + a²/12 about the pulse's place", () => {
    const recording = map({ columns: 120, rows: 120, centre: [7.1, 7.2] });
    const { frames, light } = meanFrames(medium, START, recording);
    recording.delays.forEach((t, f) => {
      const { centre, covariance } = pictureMoments(frames[f]!, recording);
      expect(total(frames[f]!)).toBeCloseTo(1000 * Math.exp(-t / 6), 6);
      expect(centre[0]).toBeCloseTo(7.1, 9);
      expect(centre[1]).toBeCloseTo(7.2, 9);
      expect(covariance[0]).toBeCloseTo(0.1 + 0.1 * t + 0.12 ** 2 / 12, 8);
      expect(light[f]!.covariance[2]).toBeCloseTo(0.1 + 0.1 * t, 12);
    });
  });

  it("turns the ellipse of a tensor at 30° as the tensor says", () => {
    const diffusion = tensorFromAxes(0.06, 0.02, Math.PI / 6);
    const recording = map({ columns: 120, rows: 120, delays: [3], centre: [7.1, 7.2] });
    const [frame] = meanFrames(plainMedium(diffusion, 6), START, recording).frames;
    const { covariance } = pictureMoments(frame!, recording);
    expect(covariance[0]).toBeCloseTo(0.1 + 6 * (0.06 * 0.75 + 0.02 * 0.25) + 0.0012, 6);
    expect(covariance[1]).toBeCloseTo(6 * 0.04 * Math.sqrt(3 / 16), 6);
    expect(covariance[2]).toBeCloseTo(0.1 + 6 * (0.06 * 0.25 + 0.02 * 0.75) + 0.0012, 6);
  });

  it("averages over the gate: light τ(e^(−t/τ) − e^(−(t+g)/τ))/g", () => {
    const { light } = meanFrames(medium, START, map({ gate: 1.5 }));
    for (const [f, t] of [0, 2, 5].entries()) {
      const exact = (1000 * 6 * (Math.exp(-t / 6) - Math.exp(-(t + 1.5) / 6))) / 1.5;
      expect(Math.abs(light[f]!.amount / exact - 1)).toBeLessThan(1e-7);
    }
  });

  it("is dark before the pulse, and lit by the part of a gate that lies behind it", () => {
    const { frames, light } = meanFrames(
      plainMedium([0.05, 0, 0.05], 1e9),
      START,
      map({ delays: [-3, -0.5], gate: 2 }),
    );
    expect(total(frames[0]!)).toBe(0);
    expect(light[1]!.amount).toBeCloseTo(750, 5);
  });

  it("sums earlier pulses: light e^(−t/τ)/(1 − e^(−T/τ)), variance σ₀² + 2D(t + T/(e^(T/τ) − 1))", () => {
    const { light } = meanFrames(medium, START, map({ delays: [-1, 2], period: 7 }));
    for (const [f, t] of [6, 2].entries()) {
      expect(light[f]!.amount).toBeCloseTo((1000 * Math.exp(-t / 6)) / (1 - Math.exp(-7 / 6)), 6);
      expect(light[f]!.covariance[0]).toBeCloseTo(0.1 + 0.1 * (t + 7 / (Math.exp(7 / 6) - 1)), 7);
    }
  });

  it("moves the picture with the drift", () => {
    const recording = map({
      columns: 120,
      rows: 120,
      centre: [7, 7],
      drift: [0.02, -0.01],
      delays: [5],
      gate: 1,
    });
    const [frame] = meanFrames(medium, START, recording).frames;
    const { centre } = pictureMoments(frame!, recording);
    expect(centre[0]).toBeCloseTo(7 + 0.02 * 5.5, 6);
    expect(centre[1]).toBeCloseTo(7 - 0.01 * 5.5, 6);
  });

  it("lets erf(w/(2√2σ_y)) of the light through a slit, σ_y growing as Σ₀ + 2Dt", () => {
    const { frames, light } = meanFrames(medium, START, trace(0.32));
    // erf to ten digits from SciPy: scipy.special.erf(0.32/(2*sqrt(2)*sqrt(0.1 + 0.1*t))) for t = 0, 2, 5
    for (const [f, [t, erf]] of (
      [
        [0, 0.3871183766],
        [2, 0.2298041285],
        [5, 0.1636458044],
      ] as const
    ).entries()) {
      expect(light[f]!.amount / (1000 * Math.exp(-t / 6))).toBeCloseTo(erf, 8);
      expect(total(frames[f]!)).toBeCloseTo(light[f]!.amount, 3);
    }
  });

  it("takes all light of a trace without a slit", () => {
    const { frames } = meanFrames(medium, START, trace(Infinity, { delays: [1] }));
    expect(total(frames[0]!)).toBeCloseTo(1000 * Math.exp(-1 / 6), 6);
  });

  it("has the normal distribution's shares of one, two and three standard deviations (Abramowitz & Stegun, table 26.1)", () => {
    expect(normalShare(-0.5, 0.5, 0.5)).toBeCloseTo(0.6826894921, 10);
    expect(normalShare(-4, 4, 2)).toBeCloseTo(0.9544997361, 10);
    expect(normalShare(-Infinity, 3, 1)).toBeCloseTo(0.998650102, 10);
  });
});

describe("the three ways to the same light", () => {
  const turned: Start = { amount: 1000, covariance: [0.1, 0.03, 0.08] };
  const diffusion = tensorFromAxes(0.03, 0.01, 0.5);
  const recordings = [
    map({ gate: 0.5 }),
    map({ gate: 0.5, period: 9, delays: [-1, 0, 4] }),
    map({ psfVariance: 0.04, drift: [0.01, 0.02] }),
    trace(0.32, { gate: 0.3, psfVariance: 0.03 }),
    trace(Infinity),
    map({ gate: 0.5, responseSigma: 0.3, delays: [-0.5, 0.2, 4] }),
  ];

  it("agree to 2e-7 of each frame's peak for plain diffusion", () => {
    for (const recording of recordings) {
      for (const start of [START, turned]) {
        const plain = meanFrames(plainMedium(diffusion, 6), start, recording);
        const spectral = spectralLight(plainMedium(diffusion, 6), start, recording, DEFAULT_ACCURACY);
        expect(largestDifference(plain.frames, spectral.frames)).toBeLessThan(2e-7);
        plain.light.forEach(({ amount, covariance }, f) => {
          expect(Math.abs(spectral.light[f]!.amount / amount - 1)).toBeLessThan(1e-6);
          expect(spectral.light[f]!.covariance[0]).toBeCloseTo(covariance[0], 5);
        });
      }
    }
  });

  it("agree for capture where annihilation is too weak to matter", () => {
    for (const recording of recordings) {
      const medium: Medium = {
        ...plainMedium(diffusion, 6),
        capture: 0.2,
        trapLight: 0.7,
        trapLifetime: 11,
      };
      const faint = { ...medium, annihilation: 1e-12 / peakDensity(turned) };
      const spectral = spectralLight(medium, turned, recording, DEFAULT_ACCURACY);
      const stepped = steppedLight(faint, turned, recording, DEFAULT_ACCURACY);
      expect(largestDifference(spectral.frames, stepped.frames)).toBeLessThan(1e-6);
      spectral.light.forEach(({ caughtShare }, f) => {
        expect(stepped.light[f]!.caughtShare).toBeCloseTo(caughtShare, 6);
      });
    }
  });
});

describe("capture", () => {
  const medium: Medium = {
    diffusion: [0.05, 0, 0.05],
    lifetime: 6,
    repulsion: 0,
    annihilation: 0,
    capture: 0.3,
    trapLight: 0.5,
    trapLifetime: 15,
  };
  const gamma = 1 / 6 + 0.3;

  it("shares the light as the rate equations do: n = e^(−γt), m = c(e^(−t/τ_m) − e^(−γt))/(γ − 1/τ_m)", () => {
    const { light } = meanFrames(medium, START, map({ delays: [0, 3, 8] }));
    for (const [f, t] of [0, 3, 8].entries()) {
      const n = Math.exp(-gamma * t);
      const m = (0.3 * (Math.exp(-t / 15) - n)) / (gamma - 1 / 15);
      expect(light[f]!.amount).toBeCloseTo(1000 * (n + 0.5 * m), 5);
      expect(light[f]!.caughtShare).toBeCloseTo((0.5 * m) / (n + 0.5 * m), 9);
    }
  });

  it("builds the caught spot from the Gaussians at the times of capture (midpoint sum over births)", () => {
    const t = 8;
    const recording = map({ delays: [t] });
    const [frame] = meanFrames({ ...medium, trapLight: 1 }, START, recording).frames;
    const births = 2000;
    const sum = new Float64Array(frame!.length);
    const add = (amount: number, variance: number) => {
      for (let i = 0; i < sum.length; i++) {
        const x = (i % 48) * 0.12 - 2.9;
        const y = Math.floor(i / 48) * 0.12 - 2.3;
        // the pixel's own variance a²/12 stands for the integral over it, good to a few 1e-5 here
        const wide = variance + 0.0012;
        sum[i] =
          sum[i]! +
          ((1000 * amount * 0.0144) / (2 * Math.PI * wide)) * Math.exp((-0.5 * (x * x + y * y)) / wide);
      }
    };
    add(Math.exp(-gamma * t), 0.1 + 0.1 * t);
    for (let b = 0; b < births; b++) {
      const s = ((b + 0.5) * t) / births;
      add(((0.3 * t) / births) * Math.exp(-gamma * s - (t - s) / 15), 0.1 + 0.1 * s);
    }
    expect(largestDifference([sum], [frame!])).toBeLessThan(1e-4);
  });

  it("leaves caught excitons of all earlier pulses behind: their number is a geometric series", () => {
    const { light } = meanFrames(medium, START, map({ delays: [2], period: 10 }));
    const one = (t: number) => ({
      n: Math.exp(-gamma * t),
      m: (0.3 * (Math.exp(-t / 15) - Math.exp(-gamma * t))) / (gamma - 1 / 15),
    });
    let [n, m] = [0, 0];
    for (let j = 0; j < 60; j++) {
      n += one(2 + 10 * j).n;
      m += one(2 + 10 * j).m;
    }
    expect(light[0]!.amount).toBeCloseTo(1000 * (n + 0.5 * m), 5);
  });

  it("refuses traps that never empty under repeated pulses", () => {
    const endless = { ...medium, trapLifetime: Infinity };
    expect(() => meanFrames(endless, START, map({ period: 10 }))).toThrow(/pile up/);
  });
});

describe("annihilation", () => {
  it("dims an unmoving Gaussian spot to e^(−t/τ) ln(1 + A)/A with A = k n₀ τ (1 − e^(−t/τ))", () => {
    const kN0 = 0.8;
    const medium = { ...plainMedium([0, 0, 0], 6), annihilation: kN0 / peakDensity(START) };
    const { light } = meanFrames(medium, START, map());
    for (const [f, t] of [0, 2, 5].entries()) {
      const a = kN0 * 6 * (1 - Math.exp(-t / 6));
      const exact = a === 0 ? 1 : (Math.exp(-t / 6) * Math.log(1 + a)) / a;
      expect(Math.abs(light[f]!.amount / (1000 * exact) - 1)).toBeLessThan(1e-6);
    }
  });
});
