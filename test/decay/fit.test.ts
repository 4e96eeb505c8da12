import { describe, expect, it } from "vitest";
import { type DecayFit, fitDecays, type LightData } from "../../src/decay/fit.ts";

const base = { gate: 0, response: null, period: null, transmission: null, emissionOrder: 1 } as const;

function fitted(delays: number[], light: number[], more: Partial<LightData> = {}) {
  return fitDecays({ ...base, delays, light, sigma: delays.map(() => 1), ...more });
}

const times = (n: number, step: number) => Array.from({ length: n }, (_, i) => i * step);

function numbersOf(fit: DecayFit): number[] {
  return [
    ...fit.parameters,
    ...fit.covariance,
    ...fit.prediction,
    ...fit.predict([-1, 0, 2]),
    fit.chi2,
    fit.pValue,
    fit.aicc,
    fit.survival(1),
    ...[fit.lifetime, fit.amplitudeAveraged, fit.intensityAveraged].flatMap(({ value, u, gradient }) => [
      value,
      u,
      ...gradient,
    ]),
  ];
}

describe("noiseless light gives its law back", () => {
  it("an exponential with negative faint frames: no logarithm is taken", () => {
    const delays = times(30, 1);
    const light = delays.map((t, i) => 100 * Math.exp(-t / 4) + (i > 20 ? (i % 2 === 0 ? 1 : -1) : 0));
    const { fits, preferred } = fitted(delays, light);
    expect(preferred).toBe("exponential");
    expect(fits.exponential!.parameters[1]).toBeCloseTo(4, 1);
  });

  it("emission order 2: light e^(−t/3) means a density that lives 6 ns", () => {
    const delays = times(30, 0.5);
    const found = fitted(
      delays,
      delays.map((t) => 1e4 * Math.exp(-t / 3)),
      { emissionOrder: 2 },
    ).fits.exponential!;
    expect(found.lifetime.value).toBeCloseTo(6, 8);
    expect(found.survival(6)).toBeCloseTo(Math.exp(-1), 8);
  });

  it("a transmission that falls is not taken for decay, and predict is free of it", () => {
    const delays = times(20, 0.5);
    const transmission = delays.map((t) => 1 / (1 + 0.1 * t));
    const light = delays.map((t, i) => transmission[i]! * 1e3 * Math.exp(-t / 5));
    const found = fitted(delays, light, { transmission }).fits.exponential!;
    expect(found.lifetime.value).toBeCloseTo(5, 8);
    expect(found.predict([5])[0]).toBeCloseTo(1e3 * Math.exp(-1), 6);
    expect(found.prediction[10]).toBeCloseTo(light[10]!, 6);
  });

  it("two exponentials: ⟨τ⟩ = ΣAτ/ΣA and ΣAτ²/ΣAτ, the shorter one first", () => {
    const delays = times(40, 0.25);
    const light = delays.map((t) => 3e4 * Math.exp(-t / 4) + 1e4 * Math.exp(-t / 0.5));
    const { fits, preferred } = fitted(delays, light);
    expect(preferred).toBe("two_exponentials");
    const found = fits.two_exponentials!;
    expect(found.parameters[1]).toBeCloseTo(0.25, 6);
    expect(found.parameters[2]).toBeCloseTo(0.5, 6);
    expect(found.parameters[3]).toBeCloseTo(4, 6);
    expect(found.amplitudeAveraged.value).toBeCloseTo((3 * 4 + 0.5) / 4, 6);
    expect(found.intensityAveraged.value).toBeCloseTo((3 * 16 + 0.25) / (3 * 4 + 0.5), 6);
    expect(found.lifetime.value).toBe(found.amplitudeAveraged.value);
  });

  it("a stretched exponential with β = ½: ⟨τ⟩ = 2τ and 6τ by intensity (Γ(2)/½, Γ(4)/Γ(2))", () => {
    const delays = times(40, 0.25);
    const found = fitted(
      delays,
      delays.map((t) => 1e4 * Math.exp(-Math.sqrt(t / 2))),
    ).fits.stretched!;
    expect(found.parameters[2]).toBeCloseTo(0.5, 6);
    expect(found.amplitudeAveraged.value).toBeCloseTo(4, 5);
    expect(found.intensityAveraged.value).toBeCloseTo(12, 4);
  });

  it("annihilation of a Gaussian spot: e^(−t/τ) ln(1 + a)/a, early rate 1/τ + k n₀/2", () => {
    const delays = times(40, 0.25);
    const light = delays.map((t) => {
      const a = 0.8 * 5 * (1 - Math.exp(-t / 5));
      return 1e4 * Math.exp(-t / 5) * (a > 0 ? Math.log(1 + a) / a : 1);
    });
    const { fits, preferred } = fitted(delays, light);
    expect(preferred).toBe("annihilation");
    const found = fits.annihilation!;
    expect(found.lifetime.value).toBeCloseTo(5, 5);
    expect(found.parameters[2]).toBeCloseTo(0.8, 5);
    expect((1 - found.survival(1e-6)) / 1e-6).toBeCloseTo(1 / 5 + 0.4, 4);
    // The integral of the survival lies between those of its fastest and slowest rates.
    expect(found.amplitudeAveraged.value).toBeGreaterThan(1 / 0.6);
    expect(found.amplitudeAveraged.value).toBeLessThan(5);
  });
});

describe("laws that cannot pay are not fitted", () => {
  // All richer laws are positive mixtures of exponentials; light that falls ever faster is farther from any of them
  // than from one exponential (Lindsay, Ann. Statist. 11 (1983) 86).
  it("light that falls ever faster, or exactly as one exponential", () => {
    const delays = times(30, 0.2);
    for (const f of [(t: number) => Math.exp(-((t / 3) ** 2)), (t: number) => Math.exp(-t / 3)]) {
      const { fits, preferred } = fitted(
        delays,
        delays.map((t) => 1e3 * f(t)),
      );
      expect(preferred).toBe("exponential");
      expect([fits.two_exponentials, fits.stretched, fits.annihilation]).toEqual([null, null, null]);
    }
  });
});

describe("the averages as integrals of the survival", () => {
  it("hold for annihilation by the trapezoidal rule", () => {
    const delays = times(40, 0.25);
    const light = delays.map((t) => {
      const a = 20 * (1 - Math.exp(-t / 5));
      return 1e4 * Math.exp(-t / 5) * (a > 0 ? Math.log(1 + a) / a : 1);
    });
    const found = fitted(delays, light).fits.annihilation!;
    let [zeroth, first] = [0, 0];
    const h = 0.002;
    for (let k = 0; k < 50_000; k++) {
      const s = found.survival(k * h) * (k === 0 ? 0.5 : 1) * h;
      zeroth += s;
      first += s * k * h;
    }
    expect(found.amplitudeAveraged.value / zeroth).toBeCloseTo(1, 5);
    expect(found.intensityAveraged.value / (first / zeroth)).toBeCloseTo(1, 5);
  });
});

describe("light that is no decay", () => {
  it.each([
    ["all zero", () => 0],
    ["constant", () => 50],
    ["rising", (t: number) => 10 * t],
    ["negative", (t: number) => -20 * Math.exp(-t)],
    ["noise about zero", (t: number) => Math.sin(17 * t * t)],
    ["gone after one frame", (t: number) => (t === 0 ? 1000 : 0)],
  ])("%s: every number is finite and the reason says why nothing converged or what did", (_, f) => {
    const delays = times(20, 0.5);
    const { fits, weights } = fitted(delays, delays.map(f));
    for (const found of Object.values(fits)) {
      if (!found) continue;
      expect(numbersOf(found).every(Number.isFinite)).toBe(true);
      expect(found.reason.length).toBeGreaterThan(5);
    }
    expect(Object.values(weights).every((w) => w >= 0 && w <= 1)).toBe(true);
  });

  it("rising or constant light has no converged exponential", () => {
    const delays = times(20, 0.5);
    expect(
      fitted(
        delays,
        delays.map((t) => 10 * t),
      ).fits.exponential!.converged,
    ).toBe(false);
    expect(
      fitted(
        delays,
        delays.map(() => 50),
      ).fits.exponential!.converged,
    ).toBe(false);
  });

  it("frames before the pulse alone give no converged law", () => {
    const delays = [-5, -4, -3, -2];
    const { fits } = fitted(delays, [1, -1, 1, -1]);
    expect(fits.exponential!.converged).toBe(false);
    expect(numbersOf(fits.exponential!).every(Number.isFinite)).toBe(true);
  });

  it("constant light says that no end of the decay is seen", () => {
    const delays = times(20, 0.5);
    const light = delays.map(() => 50);
    expect(fitted(delays, light).fits.exponential!.reason).toMatch(/no end of the decay is seen/);
  });

  it("three frames carry one exponential and no other law; two carry none", () => {
    const three = fitted([0, 1, 2], [100, 60, 36]);
    expect(three.fits.exponential!.lifetime.value).toBeCloseTo(-1 / Math.log(0.6), 3);
    expect(three.fits.stretched).toBeNull();
    expect(three.weights.exponential).toBe(1);
    expect(fitted([0, 1], [100, 60]).fits.exponential).toBeNull();
  });
});
