import type { SimilarLight, SimilarProblem } from "./problem.ts";
import type { Shape } from "./shape.ts";

/**
 * A start that is no Gaussian: one of covariance Σ₀ that holds 1 − share of a pulse's excitons, and one of the same
 * centre and axes, its variances `ratio` times as large, that holds the rest. A share below one is a core on a foot; a
 * share above one, a wide Gaussian less a narrow one, has a flat top.
 */
export interface Foot {
  /** From 0 to ratio/(ratio − 1), where the density at the centre reaches zero. */
  readonly share: number;
  /** Above 1. */
  readonly ratio: number;
}

/** Variance of the whole start over that of the narrow Gaussian. */
export function wideningOf({ share, ratio }: Foot): number {
  return 1 + share * (ratio - 1);
}

/** Largest share that leaves a density at the centre. */
export function largestShare(ratio: number): number {
  return ratio / (ratio - 1);
}

/** Without annihilation and repulsion the two Gaussians know nothing of each other. */
export function apart(problem: SimilarProblem, foot: Foot): { share: number; problem: SimilarProblem }[] {
  const { foot: _, ...narrow } = problem;
  return [
    { share: 1 - foot.share, problem: narrow },
    { share: foot.share, problem: { ...narrow, start: widened(problem, foot.ratio) } },
  ];
}

function widened({ start }: SimilarProblem, by: number): SimilarProblem["start"] {
  return [by * start[0], by * start[1], by * start[2]];
}

interface Part {
  readonly share: number;
  readonly light: SimilarLight;
}

export function together(parts: readonly Part[]): SimilarLight {
  const sum = (of: (light: SimilarLight) => number): number =>
    parts.reduce((total, { share, light }) => total + share * of(light), 0);
  const add = (count: number, out: Float64Array, fill: (light: SimilarLight, one: Float64Array) => void) => {
    const one = new Float64Array(count);
    out.fill(0, 0, count);
    for (const { share, light } of parts) {
      fill(light, one);
      for (let k = 0; k < count; k++) out[k] = out[k]! + share * one[k]!;
    }
    // a wide Gaussian less a narrow one may round to less than nothing
    for (let k = 0; k < count; k++) out[k] = Math.max(out[k]!, 0);
  };
  const round = parts.every(({ light }) => light.radial !== undefined);
  return {
    amount: (i) => sum((light) => light.amount(i)),
    caughtShare(i) {
      const all = sum((light) => light.amount(i));
      return all === 0 ? 0 : sum((light) => light.caughtShare(i) * light.amount(i)) / all;
    },
    fill: (i, grid, out) => add(grid.width * grid.height, out, (light, one) => light.fill(i, grid, one)),
    ...(round
      ? {
          radial: (i, step, count, out) =>
            add(count, out, (light, one) => light.radial!(i, step, count, one)),
        }
      : {}),
  };
}

/**
 * The same problem in units of its wide Gaussian, for the basis that spreads with it: k n₀ and u₀n₀/k_BT are stated at
 * the centre, and there the density is share + (1 − share)·ratio times that of all excitons in the wide Gaussian.
 */
export function onFoot(problem: SimilarProblem, foot: Foot): SimilarProblem {
  const centre = foot.share + (1 - foot.share) * foot.ratio;
  return {
    ...problem,
    start: widened(problem, foot.ratio),
    annihilation: problem.annihilation / centre,
    repulsion: problem.repulsion / centre,
  };
}

/** The state of such a start, in units of the wide Gaussian: e^(−z)·(share + (1 − share)·ratio·e^(−(ratio − 1)z)). */
export function startState(shape: Shape, foot: Foot | undefined): Float64Array {
  const state = shape.start();
  if (foot === undefined) return state;
  const { share, ratio } = foot;
  // v = factors·state, and v = e^(−z) for the Gaussian
  return state.map(
    (value, j) => value * (share + (1 - share) * ratio * (shape.factors[j]! * value) ** (ratio - 1)),
  );
}

/** Basis functions that hold a narrow Gaussian: its coefficients are (1 − 1/ratio)^k (Abramowitz and Stegun 22.9.15). */
export function modesFor({ ratio }: Foot, tolerance: number): number {
  return Math.log(tolerance) / Math.log(1 - 1 / ratio);
}
