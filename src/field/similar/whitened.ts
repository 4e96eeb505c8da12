import type { Covariance } from "../../frame/spot.ts";
import type { SimilarProblem } from "./problem.ts";

/**
 * Coordinates in which the starting spot is exp(−½|x'|²) and diffusion runs along the axes: with Σ₀ = LLᵀ and
 * L⁻¹DL⁻ᵀ = R·diag(d)·Rᵀ, x' = RᵀL⁻¹x. Annihilation is local and does not mind a linear map, so every problem becomes
 * symmetric about both axes, and round where d₁ = d₂.
 */
export interface Whitened {
  /** Rows of the map from µm to x'. */
  readonly map: readonly [x1: number, y1: number, x2: number, y2: number];
  /** √|Σ₀|: µm² per unit of area. */
  readonly area: number;
  /** d₁ ≥ d₂, 1/ns. */
  readonly diffusion: readonly [number, number];
  /** Covariance of the blur, [11, 12, 22]; 12 is nonzero only where neither Σ₀ nor D is round and their axes differ. */
  readonly blur: Covariance;
  readonly round: boolean;
}

/** Principal diffusion rates closer than this part of the larger are taken as equal. */
const SAME = 1e-9;

export function whitened(problem: SimilarProblem): Whitened {
  const map = problem.kind === "map";
  const pixelVariance = map ? problem.pixel ** 2 / 12 : 0;
  const blurVariance = problem.blurVariance + pixelVariance;
  if (!map) return whiten(round(problem.start[0]), round(problem.diffusion[0]), blurVariance);
  return whiten(problem.start, problem.diffusion, blurVariance);
}

function round(value: number): Covariance {
  return [value, 0, value];
}

function whiten([xx, xy, yy]: Covariance, diffusion: Covariance, blurVariance: number): Whitened {
  const area2 = xx * yy - xy * xy;
  if (!(xx > 0 && area2 > 0)) throw new RangeError("The starting spot needs a positive definite covariance.");
  const area = Math.sqrt(area2);
  // L⁻¹, lower triangular
  const [a, b, d] = [1 / Math.sqrt(xx), -xy / (Math.sqrt(xx) * area), Math.sqrt(xx) / area];
  const inside = ([txx, txy, tyy]: Covariance) =>
    [a * a * txx, a * (b * txx + d * txy), b * b * txx + 2 * b * d * txy + d * d * tyy] as const;
  const [pxx, pxy, pyy] = inside(diffusion);
  const mean = (pxx + pyy) / 2;
  const half = Math.hypot((pxx - pyy) / 2, pxy);
  const isRound = 2 * half <= SAME * Math.abs(mean);
  // round diffusion leaves the axes free: take the blur's
  const [qxx, qxy, qyy] = isRound ? inside([1, 0, 1]) : [pxx, pxy, pyy];
  const angle = Math.atan2(2 * qxy, qxx - qyy) / 2;
  const [c, s] = [Math.cos(angle), Math.sin(angle)];
  const rows = [c * a + s * b, s * d, -s * a + c * b, c * d] as const;
  const blur: Covariance = [
    blurVariance * (rows[0] ** 2 + rows[1] ** 2),
    blurVariance * (rows[0] * rows[2] + rows[1] * rows[3]),
    blurVariance * (rows[2] ** 2 + rows[3] ** 2),
  ];
  const blurIsRound = xx === yy && xy === 0;
  return {
    map: rows,
    area,
    diffusion: isRound ? [mean, mean] : [mean + half, mean - half],
    blur,
    round: isRound && (blurVariance === 0 || blurIsRound),
  };
}
