import { invertSymmetric } from "../numerics/linear-algebra.ts";
import type { Parameters } from "./kernel.ts";
import type { NoiseLaw, Patch } from "./patch.ts";
import { pixelVariance } from "./patch.ts";

/** Evidence on a spot's shape: q = score/information, with variance 1/information. Adds over frames. */
export interface ShapeScore {
  readonly score: number;
  readonly information: number;
}

/**
 * Whether a spot is flatter or more peaked than a Gaussian: the score of q in m = N·g·(1 + q·P(ρ²)) + B at q = 0, with
 * ρ² = (r−c)ᵀΣ⁻¹(r−c) and the polynomial that is orthogonal to light and width under the Gaussian: on a map
 * P = (ρ⁴ − 8ρ² + 8)/8 (Laguerre L₂(ρ²/2)), on a trace P = (ρ⁴ − 6ρ² + 3)/√24 (Hermite He₄). The spot's other
 * parameters are projected out (Rao's score test with nuisance parameters, Cox and Hinkley, Theoretical Statistics,
 * 1974, section 9.3).
 *
 * q < 0: flat top, as annihilation makes it; q > 0: a core on a foot, as traps make it. On a map the excess kurtosis
 * ⟨ρ⁴⟩/⟨ρ²⟩² − 2 is 2q, on a trace ⟨ρ⁴⟩/⟨ρ²⟩² − 3 is √24·q (derived from the norms of the polynomials).
 *
 * @param p the spot in pixels and photons
 */
export function shapeScore(kind: "map" | "trace", patch: Patch, p: Parameters, noise: NoiseLaw): ShapeScore {
  const map = kind === "map";
  const n = map ? 7 : 4;
  const [xx, xy, yy] = map ? [p[3]!, p[4]!, p[5]!] : [p[2]!, 0, 1];
  const determinant = xx * yy - xy * xy;
  const [pxx, pxy, pyy] = map ? [yy / determinant, -xy / determinant, xx / determinant] : [1 / xx, 0, 0];
  const peak = map ? p[0]! / (2 * Math.PI * Math.sqrt(determinant)) : p[0]! / Math.sqrt(2 * Math.PI * xx);
  const background = p[n - 1]!;
  const cy = map ? p[2]! : patch.rectangle.y0;
  const { x0, y0, width, height } = patch.rectangle;

  const f = new Float64Array(n);
  const score = new Float64Array(n);
  const cross = new Float64Array(n);
  const information = new Float64Array(n * n);
  let own = 0;
  let self = 0;
  const excluded = new Set(patch.excluded);
  for (let j = 0; j < height; j++) {
    const dy = y0 + j - cy;
    for (let i = 0; i < width; i++) {
      const dx = x0 + i - p[1]!;
      const rho2 = pxx * dx * dx + 2 * pxy * dx * dy + pyy * dy * dy;
      // beyond five standard deviations the polynomial times the Gaussian is nothing
      if (rho2 > 25) continue;
      const index = j * width + i;
      if (excluded.size > 0 && excluded.has(index)) continue;
      const g = Math.exp(-0.5 * rho2);
      const mean = peak * g + background;
      const w = 1 / pixelVariance(noise, mean);
      const residual = (patch.data[index]! - mean) * w;
      const h =
        peak * g * (map ? (rho2 * rho2 - 8 * rho2 + 8) / 8 : (rho2 * rho2 - 6 * rho2 + 3) / Math.sqrt(24));
      own += residual * h;
      self += w * h * h;
      fillBasis(map, f, g, dx, dy);
      for (let a = 0; a < n; a++) {
        const wf = w * f[a]!;
        score[a]! += residual * f[a]!;
        cross[a]! += wf * h;
        for (let b = 0; b <= a; b++) information[a * n + b]! += wf * f[b]!;
      }
    }
  }
  if (!invertSymmetric(information, n)) return { score: 0, information: 0 };
  for (let a = 0; a < n; a++) {
    for (let b = 0; b < n; b++) {
      const weight = cross[a]! * information[a * n + b]!;
      own -= weight * score[b]!;
      self -= weight * cross[b]!;
    }
  }
  return { score: own, information: Math.max(self, 0) };
}

/** The directions in which the spot's own parameters move the model, up to a linear map. */
function fillBasis(map: boolean, f: Float64Array, g: number, dx: number, dy: number): void {
  f[0] = g;
  f[1] = g * dx;
  if (!map) {
    f[2] = g * dx * dx;
    f[3] = 1;
    return;
  }
  f[2] = g * dy;
  f[3] = g * dx * dx;
  f[4] = g * dx * dy;
  f[5] = g * dy * dy;
  f[6] = 1;
}
