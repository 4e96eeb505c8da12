/** Distance from the centre, in starting widths, from where points get sparser. */
const DENSE = 3;

/**
 * Points ψ_i = i·step along half an axis, dense at the core and sparse far out: ψ² = c²(√(1 + 2x²/c²) − 1), which is
 * even, smooth and quick to evaluate from x².
 */
export class StretchedAxis {
  readonly step: number;
  /** Points are 0 … count − 1; the last two lie beyond the reach. */
  readonly count: number;
  readonly #c: number;

  /**
   * @param unit the narrowest width to resolve
   * @param reach up to where values are needed
   * @param step distance of the points at the core, in units
   */
  constructor(unit: number, reach: number, step: number) {
    this.#c = DENSE * unit;
    this.step = step * unit;
    this.count = Math.ceil(this.psi(reach * reach) / this.step) + 3;
  }

  /** ψ from x². */
  psi(square: number): number {
    const c2 = this.#c * this.#c;
    return Math.sqrt(c2 * (Math.sqrt(1 + (2 * square) / c2) - 1));
  }

  /** x of point i. */
  at(i: number): number {
    const psi = i * this.step;
    return psi * Math.sqrt(1 + psi ** 2 / (2 * this.#c ** 2));
  }

  /** dx/dψ at point i, for integrals over the axis. */
  slope(i: number): number {
    const psi = i * this.step;
    return i === 0 ? 1 : (psi + psi ** 3 / this.#c ** 2) / this.at(i);
  }

  /** c², for loops over pixels. */
  get stretch(): number {
    return this.#c * this.#c;
  }
}
