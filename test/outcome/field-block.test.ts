import { describe, expect, it } from "vitest";
import type { CandidateFit } from "../../src/field/stack-fit/candidates.ts";
import { CANDIDATES } from "../../src/field/stack-fit/parameters.ts";
import { birgeFactor } from "../../src/numerics/model-choice.ts";
import { fieldBlock } from "../../src/outcome/field-block.ts";
import type { FieldQuantities } from "../../src/outcome/field-quantities.ts";
import { resultSchema } from "../../src/outcome/result.ts";
import type { WholeStack } from "../../src/outcome/whole-stack.ts";
import { recorded } from "./recordings.ts";

/** D = 0.02(1) µm²/ns, τ = 5(1) ns, k·n₀ = 0.3(1) /ns. */
const FIT: CandidateFit = {
  candidate: CANDIDATES.find(({ name }) => name === "annihilation")!,
  names: ["D", "tau", "k_n0"],
  parameters: Float64Array.of(0.02, 5, 0.3),
  covariance: Float64Array.of(1e-4, 0, 0, 0, 1, 0, 0, 0, 1e-2),
  deviance: 0,
  converged: true,
  reason: "a maximum was reached",
  iterations: 3,
  held: [],
  goodness: { chi2: 50, degreesOfFreedom: 50, pValue: 0.5 },
  aicc: 0,
  weight: 1,
};

function blockOf(fit: CandidateFit, density: { value: number; u: number } | null = null) {
  const birge = birgeFactor(fit.goodness.chi2, fit.goodness.degreesOfFreedom);
  const field: FieldQuantities = {
    diffusion: { value: 0.02, u: birge * 0.01 },
    lifetime: { value: 5, u: birge },
    length2: { value: 0.1, u: birge * 0.05 },
    birge,
    ranges: new Map([
      ["D", { ends: [0.0004, 0.0396], profiled: false }],
      ["k_n0", { ends: [null, 0.55], profiled: true }],
    ]),
  };
  const whole = { fits: { fits: [fit], preferred: fit } } as unknown as WholeStack;
  const { acquisition } = recorded({ recording: { frames: 4, width: 8, height: 8 } }).stack;
  const block = fieldBlock(
    whole,
    field,
    { ...acquisition, sample: { ...acquisition.sample, density } },
    false,
  );
  resultSchema.shape.field.parse(block);
  return block!;
}

describe("fieldBlock", () => {
  it("gives D and its interval in cm²/s, and null where the data set no end", () => {
    const { D, k_n0, capture } = blockOf(FIT);
    expect(D.value).toBeCloseTo(0.2, 12);
    expect(D.interval95[0]).toBeCloseTo(0.004, 12);
    expect(D.interval95[1]).toBeCloseTo(0.396, 12);
    expect(D.interval_from).toBe("covariance");
    expect(k_n0).toEqual({ value: 0.3, u: 0.1, interval95: [null, 0.55], interval_from: "profile" });
    expect(capture).toBe(null);
  });

  it("has no uncertainty where the fit has none: null, not zero", () => {
    const { D, tau, diffusion_length, k_n0, candidates } = blockOf({ ...FIT, converged: false });
    for (const each of [D, tau, diffusion_length, k_n0, candidates[0]!.parameters.k_n0]) {
      expect(each?.u).toBe(null);
    }
  });

  it("widens a candidate's uncertainties by its own Birge factor, as the preferred one's", () => {
    // χ²/ν = 4: √4
    const { k_n0, candidates } = blockOf({
      ...FIT,
      goodness: { chi2: 200, degreesOfFreedom: 50, pValue: 1e-19 },
    });
    expect(k_n0?.u).toBeCloseTo(0.2, 12);
    expect(candidates[0]!.parameters.k_n0?.u).toBeCloseTo(0.2, 12);
  });

  it("gives k = k·n₀/n₀ with both uncertainties", () => {
    // 10 per µm² is 10⁹ per cm²: k = 0.3·10⁹ s⁻¹ ÷ 10⁹ cm⁻² = 0.3 cm²/s
    const { k } = blockOf(FIT, { value: 10, u: 1 });
    expect(k?.value).toBeCloseTo(0.3, 12);
    expect(k?.u).toBeCloseTo(Math.hypot(0.1, 0.03), 12);
  });
});
