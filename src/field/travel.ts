import { Evolution } from "./evolution.ts";
import { gridFor } from "./grid.ts";
import { type Medium, removalRate, type Start } from "./medium.ts";
import { nodesOver } from "./quadrature.ts";
import type { Accuracy } from "./recording.ts";

/**
 * How long an exciton of one pulse moves on average before it recombines, annihilates or is caught: ∫N dt / N₀, ns.
 *
 * Its displacement has variance 2D times the time it moved, so the diffusion length by the definition L² = ½⟨x²⟩ at
 * the end of life is L = √(D·t_moving): multiply the equations by x² and integrate over space and time, and ½⟨x²⟩
 * over all ends, caught or not, comes out as D∫N dt/N₀. Without annihilation it is 1/(1/τ + c).
 */
export function movingTime(medium: Medium, start: Start, accuracy: Accuracy): number {
  const gamma = removalRate(medium);
  if (medium.annihilation === 0) return 1 / gamma;
  const last = 12 / gamma;
  const grid = gridFor(start.covariance, medium.diffusion, last, accuracy);
  const evolution = new Evolution(medium, start, grid, accuracy.tolerance);
  const cell = grid.hx * grid.hy;
  const aliveAt = (t: number) => {
    evolution.advance(t);
    return evolution.free.reduce((sum, n) => sum + n, 0) * cell;
  };
  // annihilation is quick at first: panels double in length
  const quickest = medium.annihilation * start.amount * 2;
  let from = 0;
  let to = Math.min(
    last,
    1 / (gamma + quickest / (2 * Math.PI * Math.sqrt(start.covariance[0] * start.covariance[2]))),
  );
  let sum = 0;
  while (from < last) {
    for (const { at, weight } of nodesOver(from, to, 1 / (to - from))) sum += weight * aliveAt(at);
    [from, to] = [to, Math.min(last, 2 * to)];
  }
  // what is left then decays with γ, as thin as it is
  return (sum + aliveAt(last) / gamma) / start.amount;
}
