import { describe, expect, it } from "vitest";
import { annihilationLaw } from "../../src/decay/annihilation.ts";
import { exponentialLaw } from "../../src/decay/exponential.ts";
import { type Decays, fitDecays, type LightData } from "../../src/decay/fit.ts";
import { instrument } from "../../src/decay/instrument.ts";
import type { Law } from "../../src/decay/law.ts";
import { stretchedLaw } from "../../src/decay/stretched.ts";
import { twoExponentialsLaw } from "../../src/decay/two-exponentials.ts";
import { createRandom } from "../../src/numerics/random.ts";

// Light drawn from a law with the noise of a counting camera over a background; the laws themselves are held to SciPy
// in reference.test.ts. Truths are the parameters drawn from.

const delays = Array.from({ length: 40 }, (_, i) => -1 + 0.5 * i);

type Setting = Partial<Pick<LightData, "gate" | "period" | "response" | "emissionOrder" | "delays">>;

function draw(
  law: typeof exponentialLaw,
  parameters: number[],
  count: number,
  setting: Setting = {},
): Decays[] {
  const timing = { delays, gate: 0.5, response: null, period: null, transmission: null, ...setting };
  const emissionOrder = setting.emissionOrder ?? 1;
  const truth: Law = law(instrument(timing), emissionOrder);
  const frames = timing.delays.length;
  const mean = new Float64Array(frames);
  truth.evaluate(
    parameters,
    mean,
    truth.names.map(() => new Float64Array(frames)),
  );
  const sigma = mean.map((light) => Math.sqrt(light + 100));
  return Array.from({ length: count }, (_, k) => {
    const random = createRandom(7100 + k);
    const light = mean.map((x, i) => x + sigma[i]! * random.normal());
    return fitDecays({ ...timing, light, sigma, emissionOrder });
  });
}

const share = (decays: Decays[], law: Decays["preferred"]) =>
  decays.filter(({ preferred }) => preferred === law).length / decays.length;

/** How often truth ± 1.96 u holds, and the mean of (value − truth)/u. */
function coverage(decays: Decays[], truth: number) {
  const pulls = decays.map(({ fits, preferred }) => {
    const { value, u } = fits[preferred]!.lifetime;
    return (value - truth) / u;
  });
  return {
    held: pulls.filter((pull) => Math.abs(pull) < 1.96).length / pulls.length,
    mean: pulls.reduce((sum, pull) => sum + pull, 0) / pulls.length,
  };
}

describe("light of one exponential", () => {
  // Bounds three standard deviations wide: of a coverage of 0.95 √(0.95·0.05/n), of a mean pull 1/√n.
  it.each([
    ["bright", 1e5, 300, {}],
    ["faint", 1e3, 300, {}],
    ["with earlier pulses", 1e4, 100, { period: 25 }],
    ["of density squared", 1e4, 100, { emissionOrder: 2 }],
    ["in eight uneven frames", 1e4, 100, { delays: [0, 1, 2, 4, 6, 9, 12, 16] }],
  ] as const)(
    "%s: kept as one exponential in 49 of 50 draws, and τ lies within 1.96 u as often as it should",
    (_, amplitude, count, setting) => {
      const decays = draw(exponentialLaw, [amplitude, 5], count, setting);
      expect(share(decays, "exponential")).toBeGreaterThanOrEqual(0.98);
      const { held, mean } = coverage(decays, 5);
      expect(Math.abs(held - 0.95)).toBeLessThan(3 * Math.sqrt((0.95 * 0.05) / count));
      expect(Math.abs(mean)).toBeLessThan(3 / Math.sqrt(count));
    },
  );

  it("names no rivals and no spread between laws", () => {
    const [first] = draw(exponentialLaw, [1e4, 5], 1);
    expect(first!.rivals).toEqual([]);
    expect(first!.lawSpread).toBe(0);
  });
});

describe("light of richer laws", () => {
  it("two exponentials a factor of six apart are chosen in every bright draw, ⟨τ⟩ within 1.96 u as often as it should", () => {
    const decays = draw(twoExponentialsLaw, [1e5, 0.5, 1, 6], 60);
    expect(share(decays, "two_exponentials")).toBe(1);
    expect(coverage(decays, 3.5).held).toBeGreaterThan(0.86);
    const { parameters } = decays[0]!.fits.two_exponentials!;
    expect(parameters[2]).toBeCloseTo(1, 1);
    expect(parameters[3]).toBeCloseTo(6, 0);
  });

  it("a stretched exponential is chosen in every bright draw, with ⟨τ⟩ = (τ/β)Γ(1/β)", () => {
    const decays = draw(stretchedLaw, [1e5, 4, 0.5], 40);
    expect(share(decays, "stretched")).toBe(1);
    // Γ(2) = 1
    expect(coverage(decays, 8).held).toBeGreaterThan(0.85);
  });

  it("strong annihilation in bright light is told from two exponentials in every draw", () => {
    const decays = draw(annihilationLaw, [1e5, 5, 1], 40);
    expect(share(decays, "annihilation")).toBe(1);
    expect(coverage(decays, 5).held).toBeGreaterThan(0.85);
  });

  it("weak annihilation is described by another law, but named as its rival", () => {
    const decays = draw(annihilationLaw, [1e4, 5, 0.2], 40);
    const named = decays.filter(
      ({ preferred, rivals }) => preferred === "annihilation" || rivals.includes("annihilation"),
    );
    expect(named.length).toBeGreaterThan(36);
    const unsure = decays.filter(({ rivals }) => rivals.length > 0);
    expect(unsure.every(({ lawSpread }) => lawSpread > 0)).toBe(true);
  });
});

describe("underestimated noise", () => {
  it("three times too small a sigma buys no further exponential", () => {
    const law = exponentialLaw(
      instrument({ delays, gate: 0.5, response: null, period: null, transmission: null }),
      1,
    );
    const mean = new Float64Array(delays.length);
    law.evaluate([1e4, 5], mean, [new Float64Array(delays.length), new Float64Array(delays.length)]);
    const sigma = mean.map((light) => Math.sqrt(light + 100));
    const kept = Array.from({ length: 100 }, (_, k) => {
      const random = createRandom(9000 + k);
      const light = mean.map((x, i) => x + 3 * sigma[i]! * random.normal());
      const data = {
        delays,
        gate: 0.5,
        response: null,
        period: null,
        transmission: null,
        emissionOrder: 1,
      } as const;
      return fitDecays({ ...data, light, sigma }).preferred;
    });
    expect(kept.filter((law) => law === "exponential").length).toBeGreaterThanOrEqual(95);
  });
});
