import { describe, expect, it } from "vitest";
import { steadyCourse } from "../../src/frame/steady.ts";
import { chiSquareUpperTail } from "../../src/numerics/distributions.ts";
import { fitLine } from "../../src/numerics/linear-fit.ts";
import { createRandom } from "../../src/numerics/random.ts";

const fits = (chi2: number, dof: number): boolean => chiSquareUpperTail(chi2, dof) > 0.01;
const times = Float64Array.from({ length: 40 }, (_, i) => 3 + 0.25 * i);
const variances = times.map((_, i) => 0.01 * (1 + i / 10));

function course(shape: (t: number, i: number) => number, seed: number) {
  const random = createRandom(seed);
  const values = times.map((t, i) => shape(t, i) + Math.sqrt(variances[i]!) * random.normal());
  return { values, steady: steadyCourse(times, values, variances, fits) };
}

describe("the steady course through a quantity", () => {
  it("is the weighted mean of a constant", () => {
    const { values, steady } = course(() => 5, 1);
    const weights = variances.map((v) => 1 / v);
    const mean =
      values.reduce((sum, v, i) => sum + v * weights[i]!, 0) / weights.reduce((sum, w) => sum + w, 0);
    expect(steady.kind).toBe("constant");
    expect(steady.at(0)).toBeCloseTo(mean, 12);
    expect(steady.at(39)).toBeCloseTo(mean, 12);
  });

  it("is the weighted line of a drift, the same as by QR", () => {
    const { values, steady } = course((t) => 5 + 0.3 * t, 2);
    const line = fitLine(times, values, variances.map(Math.sqrt));
    expect(steady.kind).toBe("line");
    expect(steady.slope).toBeCloseTo(line.parameters[1]!, 10);
    expect(steady.slopeU).toBeCloseTo(line.standardErrors[1]!, 10);
    expect(steady.at(7)).toBeCloseTo(line.prediction[7]!, 10);
  });

  it("is the values themselves where neither fits", () => {
    const { values, steady } = course((t) => 5 + Math.sin(3 * t), 3);
    expect(steady.kind).toBe("own");
    expect(steady.at(11)).toBe(values[11]);
  });

  it("keeps the constant in 97 % of steady recordings and more", () => {
    let constant = 0;
    for (let seed = 100; seed < 400; seed++) if (course(() => 5, seed).steady.kind === "constant") constant++;
    // 1 % significance: 297 of 300 expected, three standard deviations of the binomial below
    expect(constant).toBeGreaterThanOrEqual(292);
  });

  it("does not follow the scatter of a few faint frames, though it is twice what it should be", () => {
    const random = createRandom(5);
    const few = times.slice(0, 13);
    const values = few.map(() => 5 + random.normal());
    const mean = values.reduce((a, v) => a + v, 0) / 13;
    const sum = values.reduce((a, v) => a + (v - mean) ** 2, 0);
    // scaled so that χ² is 2.3 times its degrees of freedom, which chance gives less than once in a hundred
    const steady = steadyCourse(
      few,
      values,
      Float64Array.from(few, () => sum / (2.3 * 12)),
      fits,
    );
    expect(steady.kind).toBe("constant");
  });

  it("passes over frames without a value, and says something about them too", () => {
    const random = createRandom(4);
    const values = times.map((t, i) => (i % 7 === 3 ? Number.NaN : 2 * t + 0.1 * random.normal()));
    const steady = steadyCourse(times, values, variances, fits);
    expect(steady.at(3)).toBeCloseTo(2 * times[3]!, 0);
    const wild = values.map((v, i) => v + 3 * Math.sin(i));
    expect(steadyCourse(times, wild, variances, fits).at(3)).not.toBeNaN();
  });

  it("takes the values of two frames as they are", () => {
    const steady = steadyCourse([0, 1], [4, 4.05], [0.01, 0.01], fits);
    expect(steady.at(0)).toBeCloseTo(4.025, 10);
  });
});
