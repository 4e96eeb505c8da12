import { Evolution } from "./evolution.ts";
import { gridFor, widened } from "./grid.ts";
import { determinant, type Medium, peakDensity, plainMedium, removalRate, type Start } from "./medium.ts";
import { nodesOver } from "./quadrature.ts";

const TOLERANCE = 1e-6;
/** The grid is widened each time the variance along an axis has grown by this factor. */
const GROWTH = 4;
/** 64 points a side, and 5 standard deviations clear of the border when the spot is at its widest. */
const DEMAND = { clearance: 5 * Math.sqrt(GROWTH), resolution: 3 };
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
  const alive = new Survivors(medium, start);
  let panel = 0.5 / (gamma + medium.annihilation * peakDensity(start));
  let from = 0;
  let sum = 0;
  // annihilation is quick at first: panels double in length until it no longer counts
  while (alive.annihilationRate > ENOUGH * gamma * start.amount) {
    for (const { at, weight } of nodesOver(from, from + panel, 1 / panel)) sum += weight * alive.at(at);
    from += panel;
    panel *= 2;
    alive.at(from);
  }
  // what is left decays with γ alone
  return (sum + alive.at(from) / gamma) / start.amount;
}

/**
 * The number of free excitons over time, on a small grid that widens with the spot.
 *
 * A linear map that keeps areas keeps densities and numbers too, so the spot is taken as round, of variance √|Σ₀|, and
 * diffusion along the axes, with √|Σ₀| times the eigenvalues of Σ₀⁻¹D.
 */
class Survivors {
  readonly #variance: number;
  readonly #diffusion: readonly [number, number];
  readonly #medium: Medium;
  readonly #whenWide: [x: number, y: number];
  #evolution: Evolution;
  #restarted = 0;

  constructor(medium: Medium, start: Start) {
    const variance = Math.sqrt(determinant(start.covariance));
    const [xx, xy, yy] = start.covariance;
    const [dxx, dxy, dyy] = medium.diffusion;
    const mean = (dxx * yy - 2 * dxy * xy + dyy * xx) / 2 / variance;
    const half = Math.sqrt(Math.max(mean * mean - determinant(medium.diffusion), 0));
    this.#variance = variance;
    this.#diffusion = [mean + half, Math.max(mean - half, 0)];
    this.#medium = {
      ...plainMedium([this.#diffusion[0], 0, this.#diffusion[1]], 1 / removalRate(medium)),
      annihilation: medium.annihilation,
    };
    this.#whenWide = [this.#timeOf(0, GROWTH * variance), this.#timeOf(1, GROWTH * variance)];
    const round: Start = { amount: start.amount, covariance: [variance, 0, variance] };
    const grid = gridFor(round.covariance, [0, 0, 0], 0, DEMAND);
    this.#evolution = new Evolution(this.#medium, round, grid, TOLERANCE);
  }

  /** Excitons that annihilate per time are fewer than this. */
  get annihilationRate(): number {
    return this.#amount() * this.#medium.annihilation * this.#evolution.peak;
  }

  /** Free excitons at a time not before the last one asked for. */
  at(t: number): number {
    for (;;) {
      const next = Math.min(...this.#whenWide);
      if (next > t) break;
      this.#evolution.advance(next - this.#restarted);
      this.#widen(next);
    }
    this.#evolution.advance(t - this.#restarted);
    return this.#amount();
  }

  #widen(now: number): void {
    const x = this.#whenWide[0] <= now * (1 + 1e-9);
    const y = this.#whenWide[1] <= now * (1 + 1e-9);
    const { grid, field } = widened(this.#evolution.grid, this.#evolution.free, { x, y });
    const [vx, vy] = [this.#varianceAt(0, now), this.#varianceAt(1, now)];
    const spot: Start = { amount: this.#amount(), covariance: [vx, 0, vy] };
    this.#evolution = new Evolution(this.#medium, spot, grid, TOLERANCE);
    this.#evolution.free.set(field);
    this.#restarted = now;
    if (x) this.#whenWide[0] = this.#timeOf(0, GROWTH * vx);
    if (y) this.#whenWide[1] = this.#timeOf(1, GROWTH * vy);
  }

  #amount(): number {
    const { free, grid } = this.#evolution;
    return free.reduce((sum, n) => sum + n, 0) * grid.hx * grid.hy;
  }

  #varianceAt(axis: 0 | 1, t: number): number {
    return this.#variance + 2 * this.#diffusion[axis] * t;
  }

  #timeOf(axis: 0 | 1, variance: number): number {
    return (variance - this.#variance) / (2 * this.#diffusion[axis]);
  }
}
