import { Evolution } from "./evolution.ts";
import { gridFor, widened } from "./grid.ts";
import { determinant, type Medium, peakDensity, plainMedium, removalRate, type Start } from "./medium.ts";
import { pushedTime } from "./pushed-spread.ts";
import { nodesOver } from "./quadrature.ts";

const TOLERANCE = 1e-6;
/** The grid is widened each time the variance along an axis has grown by this factor. */
const GROWTH = 4;
/** 64 points a side, and 5 standard deviations clear of the border when the spot is at its widest. */
const DEMAND = { clearance: 5 * Math.sqrt(GROWTH), resolution: 3 };
/** Share of the excitons whose later annihilation, or share of a motion whose later push, may be neglected. */
const ENOUGH = 1e-6;

/**
 * How long an exciton of one pulse moves on average before it recombines, annihilates or is caught, time in which
 * repulsion drives it counted for more: ∫∫(n + ½bn²) dA dt / N₀, ns.
 *
 * The diffusion length by the definition L² = ½⟨x²⟩ at the end of life, x from where the pulse struck and less what the
 * starting spot has of it, is then L = √(D·t_moving): multiply the equations by x² and integrate over space and time,
 * twice by parts, and ½⟨x²⟩ over all ends, caught or not, grows by D∫∫(n + ½bn²) dA dt/N₀. Without annihilation and
 * repulsion it is 1/(1/τ + c).
 *
 * With b = 0 excitons walk freely, and L is also how far each gets from its own starting point. With repulsion that is
 * less: the push away from the centre widens the spot beyond it.
 */
export function movingTime(medium: Medium, start: Start): number {
  const gamma = removalRate(medium);
  if (medium.annihilation === 0 && medium.repulsion === 0) return 1 / gamma;
  const alive = new Survivors(medium, start);
  let panel = 0.5 / (gamma + (medium.annihilation + medium.repulsion * gamma) * peakDensity(start));
  let from = 0;
  let sum = 0;
  // annihilation and repulsion are quick at first: panels double in length until they no longer count
  while (alive.collidingRate > ENOUGH * gamma * start.amount) {
    for (const { at, weight } of nodesOver(from, from + panel, 1 / panel)) sum += weight * alive.movingAt(at);
    from += panel;
    panel *= 2;
    alive.movingAt(from);
  }
  // what is left decays with γ alone
  return (sum + alive.movingAt(from) / gamma) / start.amount;
}

/**
 * The free excitons over time, on a small grid that widens with the spot.
 *
 * A linear map that keeps areas keeps densities and numbers too, so the spot is taken as round, of variance √|Σ₀|, and
 * diffusion along the axes, with √|Σ₀| times the eigenvalues of Σ₀⁻¹D.
 */
class Survivors {
  readonly #variance: number;
  readonly #diffusion: readonly [number, number];
  readonly #medium: Medium;
  readonly #start: Start;
  /** Times at which an axis is widened next; with repulsion those of plain diffusion that spreads as far. */
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
      repulsion: medium.repulsion,
      annihilation: medium.annihilation,
    };
    const round: Start = { amount: start.amount, covariance: [variance, 0, variance] };
    this.#start = round;
    this.#whenWide = [this.#timeOf(0, GROWTH * variance), this.#timeOf(1, GROWTH * variance)];
    const grid = gridFor(round.covariance, [0, 0, 0], 0, DEMAND);
    this.#evolution = new Evolution(this.#medium, round, grid, TOLERANCE);
  }

  /** Excitons that annihilate per time, or that repulsion adds to those that move per lifetime, are fewer than this. */
  get collidingRate(): number {
    const { annihilation, repulsion, lifetime } = this.#medium;
    return this.#amount() * (annihilation + (0.5 * repulsion) / lifetime) * this.#evolution.peak;
  }

  /** ∫(n + ½bn²) dA at a time not before the last one asked for. */
  movingAt(t: number): number {
    for (;;) {
      const next = Math.min(...this.#whenWide);
      if (next > this.#pushedTime(t)) break;
      const when = this.#whenPushed(next);
      this.#evolution.advance(when - this.#restarted);
      this.#restarted = when;
      this.#widen(next);
    }
    this.#evolution.advance(t - this.#restarted);
    const { free, grid } = this.#evolution;
    const half = 0.5 * this.#medium.repulsion;
    return free.reduce((sum, n) => sum + n + half * n * n, 0) * grid.hx * grid.hy;
  }

  #widen(now: number): void {
    const x = this.#whenWide[0] <= now * (1 + 1e-9);
    const y = this.#whenWide[1] <= now * (1 + 1e-9);
    const { grid, field } = widened(this.#evolution.grid, this.#evolution.free, { x, y });
    const [vx, vy] = [this.#varianceAt(0, now), this.#varianceAt(1, now)];
    const spot: Start = { amount: this.#amount(), covariance: [vx, 0, vy] };
    this.#evolution = new Evolution(this.#medium, spot, grid, TOLERANCE);
    this.#evolution.free.set(field);
    if (x) this.#whenWide[0] = this.#timeOf(0, GROWTH * vx);
    if (y) this.#whenWide[1] = this.#timeOf(1, GROWTH * vy);
  }

  #amount(): number {
    const { free, grid } = this.#evolution;
    return free.reduce((sum, n) => sum + n, 0) * grid.hx * grid.hy;
  }

  #pushedTime(t: number): number {
    return pushedTime(this.#medium, this.#start, t);
  }

  /** The time t at which `pushedTime` is θ, to a part in a million. */
  #whenPushed(theta: number): number {
    if (this.#medium.repulsion === 0) return theta;
    let [from, to] = [this.#restarted, theta];
    while (to - from > 1e-6 * to) {
      const middle = 0.5 * (from + to);
      if (this.#pushedTime(middle) < theta) from = middle;
      else to = middle;
    }
    return to;
  }

  #varianceAt(axis: 0 | 1, t: number): number {
    return this.#variance + 2 * this.#diffusion[axis] * t;
  }

  #timeOf(axis: 0 | 1, variance: number): number {
    return (variance - this.#variance) / (2 * this.#diffusion[axis]);
  }
}
