import { Evolution } from "./evolution.ts";
import { gridFor } from "./grid.ts";
import { type Medium, peakDensity, removalRate, type Start } from "./medium.ts";
import { nodesOver } from "./quadrature.ts";

const ACCURACY = { tolerance: 1e-6, clearance: 5, resolution: 2.5 };
/** Lifetimes after which no annihilation is looked for. */
const LONGEST = 8;
/** Share of the excitons whose later annihilation may be neglected. */
const ENOUGH = 1e-6;

/**
 * How long an exciton of one pulse moves on average before it recombines, annihilates or is caught: ∫N dt / N₀, ns.
 *
 * Its displacement has variance 2D times the time it moved, so the diffusion length by the definition L² = ½⟨x²⟩ at
 * the end of life is L = √(D·t_moving): multiply the equations by x² and integrate over space and time, and ½⟨x²⟩
 * over all ends, caught or not, comes out as D∫N dt/N₀. Without annihilation it is 1/(1/τ + c).
 */
export function movingTime(medium: Medium, start: Start): number {
  const gamma = removalRate(medium);
  if (medium.annihilation === 0) return 1 / gamma;
  const last = LONGEST / gamma;
  const grid = gridFor(start.covariance, medium.diffusion, last, ACCURACY);
  const evolution = new Evolution(medium, start, grid, ACCURACY.tolerance);
  const cell = grid.hx * grid.hy;
  const aliveAt = (t: number) => {
    evolution.advance(t);
    return evolution.free.reduce((sum, n) => sum + n, 0) * cell;
  };
  let from = 0;
  let to = Math.min(last, 0.5 / (gamma + medium.annihilation * peakDensity(start)));
  let sum = 0;
  let alive = start.amount;
  // annihilation is quick at first: panels double in length until it no longer counts
  while (from < last && alive * medium.annihilation * evolution.peak > ENOUGH * gamma * start.amount) {
    for (const { at, weight } of nodesOver(from, to, 1 / (to - from))) sum += weight * aliveAt(at);
    alive = aliveAt(to);
    [from, to] = [to, Math.min(last, 2 * to)];
  }
  // what is left decays with γ alone
  return (sum + alive / gamma) / start.amount;
}
