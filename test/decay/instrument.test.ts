import { describe, expect, it } from "vitest";
import { erfc, erfcx } from "../../src/decay/erfcx.ts";
import { exponentialLaw } from "../../src/decay/exponential.ts";
import { gaussLegendre } from "../../src/decay/gauss-legendre.ts";
import { instrument } from "../../src/decay/instrument.ts";
import { sampledShape } from "../../src/decay/sampled-response.ts";
import type { Timing } from "../../src/decay/timing.ts";
import { readNonlinear } from "../reference/nist-strd.ts";

const plain: Timing = { delays: [0], gate: 0, response: null, period: null, transmission: null };

function lightOf(timing: Timing, rate: number): Float64Array {
  const frames = timing.delays.length;
  const value = new Float64Array(frames);
  instrument(timing).exponential(rate, value, new Float64Array(frames));
  return value;
}

function photons(timing: Timing, amplitude: number, tau: number): Float64Array {
  const frames = timing.delays.length;
  const value = new Float64Array(frames);
  const jacobian = [new Float64Array(frames), new Float64Array(frames)];
  exponentialLaw(instrument(timing), 1).evaluate([amplitude, tau], value, jacobian);
  return value;
}

describe("erfcx", () => {
  // scipy.special.erfcx and erfc, SciPy 1.10.1
  it.each([
    [0, 1],
    [0.1, 0.8964569799691268],
    [1, 0.427583576155807],
    [3, 0.17900115118138998],
    [100, 0.005641613782989433],
    [1e4, 5.641895807268084e-5],
  ])("erfcx(%d) as SciPy gives it, to 1e-13", (x, expected) => {
    expect(Math.abs(erfcx(x) / expected - 1)).toBeLessThan(1e-13);
  });

  it("erfc keeps its relative accuracy far out: erfc(20) = 5.3958656e-176 (SciPy)", () => {
    expect(erfc(20) / 5.395865611607901e-176).toBeCloseTo(1, 12);
    expect(erfc(-2)).toBeCloseTo(1.9953222650189528, 14);
  });
});

describe("gaussLegendre", () => {
  it("has the tabulated points and weights for n = 5 (Abramowitz and Stegun, table 25.4)", () => {
    const { points, weights } = gaussLegendre(5);
    expect(points.map((x) => 2 * x - 1)[4]).toBeCloseTo(0.906179845938664, 14);
    expect(2 * weights[4]!).toBeCloseTo(0.236926885056189, 14);
    expect(2 * weights[2]!).toBeCloseTo(0.568888888888889, 14);
  });
});

describe("what the instrument makes of an exponential", () => {
  it("nothing before the pulse", () => {
    expect(lightOf({ ...plain, delays: [-3, -0.5] }, 1)).toEqual(new Float64Array(2));
    expect(lightOf({ ...plain, delays: [-3, -0.5], gate: 0.5 }, 1)).toEqual(new Float64Array(2));
  });

  it("a gate that opens before the pulse averages over its whole width: (1 − e^(−1))/2 for [−1, 1], τ = 1", () => {
    expect(lightOf({ ...plain, delays: [-1], gate: 2 }, 1)[0]).toBeCloseTo((1 - Math.exp(-1)) / 2, 14);
  });

  it("a gate much longer than τ holds τ/w of the first light", () => {
    expect(lightOf({ ...plain, delays: [0], gate: 1000 }, 2)[0]).toBeCloseTo(0.5 / 1000, 15);
  });

  it("a short gate's mean light is that at w/2 − w²/24τ (series of (1 − e^(−x))/x)", () => {
    const [w, tau] = [0.1, 1];
    const at = -tau * Math.log(lightOf({ ...plain, gate: w }, 1 / tau)[0]!);
    expect(at).toBeCloseTo(w / 2 - w ** 2 / (24 * tau), 6);
  });

  it("earlier pulses: N₀ e^(−t/τ)/(1 − e^(−T/τ)) at any delay, before the pulse t + T", () => {
    const [period, tau] = [10, 7];
    const steady = (t: number) => (100 * Math.exp(-t / tau)) / (1 - Math.exp(-period / tau));
    const light = photons({ ...plain, delays: [-2, 0, 3], period }, 100, tau);
    expect(light[0]).toBeCloseTo(steady(8), 10);
    expect(light[1]).toBeCloseTo(steady(0), 10);
    expect(light[2]).toBeCloseTo(steady(3), 10);
  });

  it("earlier pulses keep the light that each gives: a gate of one period sees A·τ/T", () => {
    for (const response of [null, { kind: "gaussian", fwhm: 0.8 } as const]) {
      const light = photons({ ...plain, delays: [-3.3], gate: 10, period: 10, response }, 100, 7);
      expect(light[0]).toBeCloseTo((100 * 7) / 10, 9);
    }
  });

  it("long after a Gaussian response the light is e^(s²/2τ²) brighter and nothing else", () => {
    const s = 0.2;
    const response = { kind: "gaussian", fwhm: s * 2 * Math.sqrt(2 * Math.LN2) } as const;
    const light = lightOf({ ...plain, delays: [5], response }, 2)[0]!;
    expect(light / Math.exp(-10 + (s * 2) ** 2 / 2)).toBeCloseTo(1, 12);
  });

  it("does not overflow where the response is fifty times longer than τ", () => {
    const response = { kind: "gaussian", fwhm: 1 } as const;
    const light = lightOf({ ...plain, delays: [-3, 0, 3], gate: 0.1, response }, 120);
    // Then the light is the response itself over the rate.
    expect(light[1]! * 120).toBeCloseTo(2 * Math.sqrt(Math.LN2 / Math.PI), 1);
    expect(light.every((x) => Number.isFinite(x) && x >= 0)).toBe(true);
  });

  it("multiplies by the transmission", () => {
    const light = lightOf({ ...plain, delays: [0, 1], transmission: [0.5, 0.25] }, 1);
    expect(light[0]).toBe(0.5);
    expect(light[1]).toBeCloseTo(0.25 * Math.exp(-1), 15);
  });
});

describe("a sampled response", () => {
  // A triangle from −1 to 1: density (1 − |t|), integral from −1 to t (1 + t)²/2 for t < 0.
  const triangle = { kind: "sampled", delays: [-1, 0, 1], counts: [0, 80, 0] } as const;

  it("is straight between its samples and of unit area", () => {
    const shape = sampledShape(triangle);
    expect(shape.density(-0.25)).toBeCloseTo(0.75, 14);
    expect(shape.share(-5, -0.5)).toBeCloseTo(0.125, 14);
    expect(shape.share(-0.5, 5)).toBeCloseTo(0.875, 14);
    expect(shape.density(1.01)).toBe(0);
  });

  it("gives the closed form of triangle ⊗ exponential: e^(−r·t)·2(cosh r − 1)/r² after it has passed", () => {
    for (const rate of [0.2, 1, 5]) {
      const light = lightOf({ ...plain, delays: [1.5], response: triangle }, rate)[0]!;
      const expected = (Math.exp(-rate * 1.5) * 2 * (Math.cosh(rate) - 1)) / rate ** 2;
      expect(light / expected).toBeCloseTo(1, 7);
    }
  });
});

describe("NIST StRD sums of exponentials", () => {
  it.each([
    ["Lanczos3", [0, 2, 4]],
    ["MGH17", [1, 2]],
  ])(
    "%s: the columns at the certified parameters leave the certified residual sum of squares",
    (name, terms) => {
      const set = readNonlinear(name);
      const b = set.certified;
      const x = set.x[0]!;
      const sum = new Float64Array(x.length).fill(name === "MGH17" ? b[0]! : 0);
      for (const k of terms) {
        const rate = name === "MGH17" ? b[k + 2]! : b[k + 1]!;
        lightOf({ ...plain, delays: x }, rate).forEach((light, i) => {
          sum[i]! += b[k]! * light;
        });
      }
      const residual = set.y.reduce((total, y, i) => total + (y - sum[i]!) ** 2, 0);
      expect(residual / set.residualSumOfSquares).toBeCloseTo(1, 5);
    },
  );
});
