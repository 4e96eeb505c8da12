import { determinant, type Medium, removalRate, type Start, spreadCovariance } from "./medium.ts";

/** Steps of the integration, each a fixed part of the time so far. */
const STEPS = 48;

/**
 * The time θ ≥ t after which plain diffusion has spread a spot as far as repulsion has by the time t: with N excitons
 * left in a spot that is taken to stay Gaussian, the mean of b n/2 over them is b N/(8π√|Σ|), so
 *
 *     dθ/dt = 1 + b N₀ e^(−γt)/(8π√|Σ₀ + 2Dθ|)
 *
 * which is exact at t = 0 and some per cent off later. For choosing grids and steps, not for results.
 */
export function pushedTime(medium: Medium, start: Start, t: number): number {
  const { repulsion, diffusion } = medium;
  if (repulsion === 0 || !(t > 0 && t < Infinity)) return t;
  const gamma = removalRate(medium);
  const slope = (at: number, theta: number): number => {
    const area = Math.sqrt(determinant(spreadCovariance(start.covariance, diffusion, theta)));
    return 1 + (repulsion * start.amount * Math.exp(-gamma * at)) / (8 * Math.PI * area);
  };
  let theta = 0;
  for (let i = 0; i < STEPS; i++) {
    // short steps first, where the spot is small
    const [from, to] = [t * (i / STEPS) ** 2, t * ((i + 1) / STEPS) ** 2];
    const middle = theta + 0.5 * (to - from) * slope(from, theta);
    theta += (to - from) * slope(0.5 * (from + to), middle);
  }
  return theta;
}
