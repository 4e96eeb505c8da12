import { describe, expect, it } from "vitest";
import type { Parameters } from "../../src/frame/kernel.ts";
import { createEvaluation, evaluateTrace } from "../../src/frame/kernel.ts";
import type { Patch } from "../../src/frame/patch.ts";
import { invertSymmetric } from "../../src/numerics/linear-algebra.ts";
import { digitsOf, readNonlinear } from "./nist-strd.ts";

/**
 * NIST's Eckerle4 (Statistical Reference Datasets; K. Eckerle, 1979), y = (b1/b2)·exp(−½((x−b3)/b2)²), is a trace:
 * b1√(2π)/h photons, centre b3, standard deviation b2, no background, on pixels of h = 0.5. Constant variance (excess 0,
 * read noise 1) makes the kernel unweighted least squares.
 */
const H = 0.5;
const set = readNonlinear("Eckerle4");
const x = set.x[0]!;
const first = x[0]!;

function patchOf(): Patch {
  const width = Math.round((x.at(-1)! - first) / H) + 1;
  const data = new Float32Array(width);
  const recorded = new Set<number>();
  x.forEach((at, k) => {
    const index = Math.round((at - first) / H);
    recorded.add(index);
    data[index] = set.y[k]!;
  });
  const excluded = Array.from({ length: width }, (_, i) => i).filter((i) => !recorded.has(i));
  return { rectangle: { x0: 0, y0: 0, width, height: 1 }, data, outerCount: 0, outerSum: 0, excluded };
}

const toKernel = ([b1, b2, b3]: readonly number[]): Parameters =>
  Float64Array.of((b1! * Math.sqrt(2 * Math.PI)) / H, (b3! - first) / H, (b2! / H) ** 2, 0);

/** Gauss–Newton on N, x and Σ, the background held at zero. */
function descend(start: readonly number[]) {
  const patch = patchOf();
  const p = toKernel(start);
  const evaluation = createEvaluation(4);
  const covariance = new Float64Array(9);
  for (let iteration = 0; iteration < 60; iteration++) {
    evaluateTrace(patch, p, { excess: 0, floor: 1 }, evaluation);
    for (let a = 0; a < 3; a++)
      for (let b = 0; b < 3; b++) covariance[a * 3 + b] = evaluation.information[a * 4 + b]!;
    expect(invertSymmetric(covariance, 3)).toBe(true);
    for (let a = 0; a < 3; a++)
      for (let b = 0; b < 3; b++) p[a]! += covariance[a * 3 + b]! * evaluation.score[b]!;
  }
  return { p, covariance, sum: evaluation.pearson, points: evaluation.pixels };
}

describe("NIST's Eckerle4 through the spot's kernel", () => {
  const { p, covariance, sum, points } = descend(set.starts[1]);
  const sigma = Math.sqrt(p[2]!);

  it("reaches the certified parameters to six digits from start 2", () => {
    const found = [(p[0]! * H) / Math.sqrt(2 * Math.PI), sigma * H, p[1]! * H + first];
    for (const [j, value] of found.entries())
      expect(digitsOf(value, set.certified[j]!)).toBeGreaterThanOrEqual(6);
  });

  it("gives the certified standard deviations to six digits", () => {
    expect(points).toBe(35);
    expect(digitsOf(sum, set.residualSumOfSquares)).toBeGreaterThanOrEqual(6);
    const scale = Math.sqrt(sum / (points - 3));
    const u = [0, 4, 8].map((at) => scale * Math.sqrt(covariance[at]!));
    const found = [(u[0]! * H) / Math.sqrt(2 * Math.PI), (u[2]! * H) / (2 * sigma), u[1]! * H];
    for (const [j, value] of found.entries())
      expect(digitsOf(value, set.certifiedDeviations[j]!)).toBeGreaterThanOrEqual(6);
  });
});
