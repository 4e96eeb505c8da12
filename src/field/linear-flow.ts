import { frequency, type Grid } from "./grid.ts";
import { type Medium, removalRate } from "./medium.ts";

/** ∫₀ʰ exp(−rate·s) ds = (1 − e^(−rate·h))/rate, without loss for small rate·h. */
export function decayedTime(rate: number, h: number): number {
  const x = rate * h;
  return Math.abs(x) < 1e-12 ? h : -Math.expm1(-x) / rate;
}

/**
 * ∫₀ʰ e^(−from·s) e^(−into·(h−s)) ds = (e^(−into·h) − e^(−from·h))/(from − into): what a pool that empties at the rate
 * `from` has put into one that empties at the rate `into`, without loss where the rates are near and without overflow.
 */
export function handedOver(from: number, into: number, h: number): number {
  return Math.exp(-Math.min(from, into) * h) * decayedTime(Math.abs(from - into), h);
}

/**
 * Everything but annihilation over a time h, exactly, one Fourier mode at a time. With Γ = γ + q·Dq:
 *
 *     n̂(h) = n̂₀ e^(−Γh)
 *     m̂(h) = m̂₀ e^(−h/τ_m) + n̂₀ c (e^(−h/τ_m) − e^(−Γh))/(Γ − 1/τ_m)
 */
export interface LinearFlow {
  /** e^(−Γh) of each mode, in the order of a spectrum's elements. */
  readonly survival: Float64Array;
  /** What m̂ gains from n̂₀; null without capture. */
  readonly catching: Float64Array | null;
  /** e^(−h/τ_m) */
  readonly trapSurvival: number;
}

export function linearFlow(medium: Medium, grid: Grid, h: number): LinearFlow {
  const trapRate = 1 / medium.trapLifetime;
  const trapSurvival = Math.exp(-trapRate * h);
  const rates = modeRates(medium, grid);
  const survival = rates.map((rate) => Math.exp(-rate * h));
  const catching =
    medium.capture === 0 ? null : rates.map((rate) => medium.capture * handedOver(rate, trapRate, h));
  return { survival, catching, trapSurvival };
}

/** Γ = γ + q·Dq of each mode, 1/ns, in the order of a spectrum's elements. */
export function modeRates(medium: Medium, grid: Grid): Float64Array {
  const { nx, ny, hx, hy } = grid;
  const [dxx, dxy, dyy] = medium.diffusion;
  const gamma = removalRate(medium);
  const rates = new Float64Array((nx / 2 + 1) * ny);
  for (let kx = 0; kx <= nx / 2; kx++) {
    const qx = frequency(kx, nx, hx);
    for (let ky = 0; ky < ny; ky++) {
      const qy = frequency(ky, ny, hy);
      // the highest frequency stands for both signs: its mixed term averages out
      const mixed = 2 * kx === nx || 2 * ky === ny ? 0 : 2 * dxy * qx * qy;
      rates[kx * ny + ky] = gamma + dxx * qx * qx + mixed + dyy * qy * qy;
    }
  }
  return rates;
}
