import type { Covariance } from "../../frame/spot.ts";
import type { Foot } from "./foot.ts";

/** What a recording's mean light follows from. Lengths in µm, times in ns. */
export interface SimilarProblem {
  /** "trace": light behind a slit along x; the spot is taken as round with Σ₀xx, diffusion as isotropic with D_xx. */
  readonly kind: "map" | "trace";
  /** Σ₀ of the density that a pulse makes, µm². */
  readonly start: Covariance;
  /** A wider Gaussian under the one of Σ₀; absent for a Gaussian start. */
  readonly foot?: Foot;
  /** D, µm²/ns. */
  readonly diffusion: Covariance;
  /** τ, ns. */
  readonly lifetime: number;
  /**
   * β = u₀n₀/k_BT at the peak right after a pulse onto an empty sample: there D is (1 + β) times as large (see `Medium`).
   */
  readonly repulsion: number;
  /** k·n₀ at the peak right after a pulse onto an empty sample, 1/ns. */
  readonly annihilation: number;
  /** c, 1/ns. */
  readonly capture: number;
  /** τ_m, ns. */
  readonly trapLifetime: number;
  /** ε: light of a caught exciton relative to a free one's. */
  readonly trapLight: number;
  /** Variance of the point-spread function per axis, µm². It blurs the light, not the density. */
  readonly blurVariance: number;
  /** Side of the pixels that the light is averaged over (along x only on a trace), µm; 0 for the light at points. */
  readonly pixel: number;
  /** Gate openings, ns, the pulse at 0. */
  readonly delays: readonly number[];
  /** How long each frame collects, ns; a frame is the mean over its gate. */
  readonly gate: number;
  /** Standard deviation of the instrument's Gaussian response, ns; 0 for none. */
  readonly responseSigma: number;
  /** Time between pulses, ns; null for a single one. */
  readonly period: number | null;
  /** Width of the strip that a trace collects from, µm; null for all of it. */
  readonly slit: number | null;
  /** How far from the centre light will be asked for, µm; absent: as far as there is any. */
  readonly reach?: number;
}

/** Pixel centres: x0 + i·pixel, y0 + j·pixel, in µm from the spot's centre. A trace has height 1 and no use for y0. */
export interface PixelGrid {
  readonly x0: number;
  readonly y0: number;
  readonly pixel: number;
  readonly width: number;
  readonly height: number;
}

/** The mean light of every frame, in units of one pulse's excitons. */
export interface SimilarLight {
  /** All the light of a frame: in the plane, or behind the slit. */
  amount(frame: number): number;
  /** Part of it that comes from caught excitons, 0 to 1. */
  caughtShare(frame: number): number;
  /** Light per µm² (map, row-major) or per µm (trace). */
  fill(frame: number, grid: PixelGrid, out: Float64Array): void;
  /**
   * Light per µm² at the distances 0, step, 2·step … from the centre, count of them; only for maps that are round but
   * for the pixels' own corners, whose part is averaged over all directions.
   */
  readonly radial?: (frame: number, step: number, count: number, out: Float64Array) => void;
}
