import { nodesOver } from "../quadrature.ts";

/** How fast things go, in the whitened frame, 1/ns. */
export interface Rates {
  /** d₁, d₂ */
  readonly diffusion: readonly [number, number];
  /** λ = 1/τ + c */
  readonly removal: number;
  /** β = u₀n₀/k_BT */
  readonly repulsion: number;
  /** κ = k n₀ */
  readonly annihilation: number;
  readonly capture: number;
  /** 1/τ_m */
  readonly trapRate: number;
}

/** Intervals a panel is divided into. */
const INTERVALS = 6;
/** Length of a panel on the clock: sets the accuracy of steps and of interpolation in time. */
const PANEL = 0.9;
const LOBATTO = Array.from(
  { length: INTERVALS + 1 },
  (_, j) => 0.5 - 0.5 * Math.cos((j * Math.PI) / INTERVALS),
);
const BARYCENTRIC = LOBATTO.map((_, j) => (j % 2 === 0 ? 1 : -1) * (j === 0 || j === INTERVALS ? 0.5 : 1));

/**
 * The times at which the density is known, and how to read it, or what it has left in the traps, at any other time.
 *
 * Spreading slows as 1/s(t), s = 1 + 2dt, annihilation as 1/(1 + κy), y = ∫e^(−λt)dt, and repulsion, which bends the
 * profile at a rate of some 4βd, alike: the clock θ = ½ ln s₁ + ½ ln s₂ + ln(1 + (κ + 4βd)y) runs evenly with what
 * happens. Where spreading is slow, annihilation dies with
 * the lifetime before spreading takes over: there a share of ln(1 + λt) keeps the clock running. Panels of equal length on it hold 7
 * Chebyshev–Lobatto nodes each; between them v = e^(λt)·n is a polynomial in θ.
 */
export class Timeline {
  readonly rates: Rates;
  /** Node times, rising; panels share their ends. */
  readonly times: readonly number[];
  readonly panels: number;
  readonly #clockStep: number;
  /** Weight of the clock's last term. */
  readonly #handover: number;
  /** What has been caught by each panel's beginning, as weights of the nodes. */
  readonly #caught: Float64Array[] = [];

  /** @param panels by default as many as accuracy needs */
  constructor(rates: Rates, end: number, panels?: number) {
    this.rates = rates;
    const [a, b] = rates.diffusion;
    this.#handover =
      rates.removal === 0 ? 0 : rates.removal / (rates.removal + 5 * (Math.abs(a) + Math.abs(b)));
    const length = this.clock(end);
    this.panels = panels ?? Math.max(1, Math.ceil(length / PANEL));
    this.#clockStep = length / this.panels;
    const times: number[] = [0];
    for (let p = 0; p < this.panels; p++) {
      for (let j = 1; j <= INTERVALS; j++) {
        times.push(this.#timeAt((p + LOBATTO[j]!) * this.#clockStep, times.at(-1)!, end));
      }
    }
    times[times.length - 1] = end;
    this.times = times;
    if (rates.capture > 0) this.#collectCaught();
  }

  get end(): number {
    return this.times.at(-1)!;
  }

  get size(): number {
    return this.times.length;
  }

  /** θ(t). */
  clock(t: number): number {
    const [a, b] = this.scales(t);
    const spreading = 0.5 * (Math.abs(Math.log(a)) + Math.abs(Math.log(b)));
    const { annihilation, repulsion, removal, diffusion } = this.rates;
    if (annihilation === 0 && repulsion === 0) return spreading;
    // how fast the profile changes its shape
    const bending = annihilation + 2 * Math.abs(repulsion) * (diffusion[0] + diffusion[1]);
    return spreading + Math.log1p(bending * this.decayed(t)) + this.#handover * Math.log1p(removal * t);
  }

  /**
   * s along both axes, the widths² of the basis: 1 + 2dt, the variances of plain diffusion. Repulsion adds
   * (ds/dt = 2d + ½βd·e^(−λt)/s for a round Gaussian); s² = (1 + 2dt)² + βd·y is close enough for a basis.
   */
  scales(t: number): readonly [number, number] {
    const { diffusion, repulsion } = this.rates;
    const [a, b] = [1 + 2 * diffusion[0] * t, 1 + 2 * diffusion[1] * t];
    if (repulsion === 0) return [a, b];
    const push = repulsion * this.decayed(t);
    return [Math.sqrt(a * a + diffusion[0] * push), Math.sqrt(b * b + diffusion[1] * push)];
  }

  /** ds/dt along both axes. */
  growth(t: number): readonly [number, number] {
    const { diffusion, repulsion, removal } = this.rates;
    const push = 0.5 * repulsion * Math.exp(-removal * t);
    const s = this.scales(t);
    const of = (axis: 0 | 1): number =>
      (diffusion[axis] * (2 * (1 + 2 * diffusion[axis] * t) + push)) / s[axis];
    return [of(0), of(1)];
  }

  /** y(t) = ∫₀ᵗ e^(−λt')dt'. */
  decayed(t: number): number {
    const { removal } = this.rates;
    return removal === 0 ? t : -Math.expm1(-removal * t) / removal;
  }

  /** The time halfway on the clock between nodes i and i + 1. */
  between(i: number): number {
    const [from, to] = [this.times[i]!, this.times[i + 1]!];
    return this.#timeAt(0.5 * (this.clock(from) + this.clock(to)), from, to);
  }

  /** Adds weight·(weights that read v at t) to `out`. */
  addReading(t: number, weight: number, out: Float64Array): void {
    const panel = this.#panelAt(t);
    this.#addLagrange(panel, t, weight, out);
  }

  /** Adds weight·(weights that give n at t); nothing is left after the end. */
  addFree(t: number, weight: number, out: Float64Array): void {
    if (t <= this.end) this.addReading(t, weight * Math.exp(-this.rates.removal * t), out);
  }

  /** Adds weight·(weights that give m at t). */
  addCaught(t: number, weight: number, out: Float64Array): void {
    const panel = this.#panelAt(Math.min(t, this.end));
    const from = this.times[panel * INTERVALS]!;
    const survival = weight * Math.exp(-this.rates.trapRate * (t - from));
    this.#caught[panel]!.forEach((w, i) => {
      out[i] = out[i]! + survival * w;
    });
    this.#addCatch(panel, Math.min(t, this.end), t, weight, out);
  }

  #collectCaught(): void {
    this.#caught.push(new Float64Array(this.size));
    for (let p = 1; p <= this.panels; p++) {
      const sum = new Float64Array(this.size);
      const [from, to] = [this.times[(p - 1) * INTERVALS]!, this.times[p * INTERVALS]!];
      const survival = Math.exp(-this.rates.trapRate * (to - from));
      this.#caught[p - 1]!.forEach((w, i) => {
        sum[i] = survival * w;
      });
      this.#addCatch(p - 1, to, to, 1, sum);
      this.#caught.push(sum);
    }
  }

  /** c ∫ e^(−(t−t')/τ_m) e^(−λt') v(t') dt' from the panel's beginning to `until`. */
  #addCatch(panel: number, until: number, t: number, weight: number, out: Float64Array): void {
    const from = this.times[panel * INTERVALS]!;
    const to = this.times[(panel + 1) * INTERVALS]!;
    const { removal, trapRate, capture } = this.rates;
    for (const { at, weight: share } of nodesOver(
      from,
      until,
      Math.max(removal, trapRate) + 2 / (to - from),
    )) {
      const born = weight * share * capture * Math.exp(-trapRate * (t - at) - removal * at);
      this.#addLagrange(panel, at, born, out);
    }
  }

  #panelAt(t: number): number {
    const at = this.#clockStep === 0 ? 0 : Math.floor(this.clock(t) / this.#clockStep);
    return Math.min(Math.max(at, 0), this.panels - 1);
  }

  /** Barycentric interpolation (Berrut and Trefethen, SIAM Rev. 46, 501, 2004). */
  #addLagrange(panel: number, t: number, weight: number, out: Float64Array): void {
    const first = panel * INTERVALS;
    const x = this.#clockStep === 0 ? 0 : this.clock(t) / this.#clockStep - panel;
    let sum = 0;
    for (let j = 0; j <= INTERVALS; j++) {
      const distance = x - LOBATTO[j]!;
      if (Math.abs(distance) < 1e-13) {
        out[first + j] = out[first + j]! + weight;
        return;
      }
      sum += BARYCENTRIC[j]! / distance;
    }
    for (let j = 0; j <= INTERVALS; j++) {
      out[first + j] = out[first + j]! + (weight * BARYCENTRIC[j]!) / (x - LOBATTO[j]!) / sum;
    }
  }

  /** The time in [from, to] at which the clock shows θ, by bisection made quick (Illinois rule). */
  #timeAt(theta: number, from: number, to: number): number {
    let [a, b] = [from, to];
    let [fa, fb] = [this.clock(a) - theta, this.clock(b) - theta];
    if (fb - fa === 0) return b;
    for (let k = 0; k < 100; k++) {
      const t = b - (fb * (b - a)) / (fb - fa);
      const f = this.clock(t) - theta;
      if (Math.abs(f) < 1e-12 || Math.abs(b - a) <= 1e-15 * b) return t;
      if (f * fb < 0) {
        [a, fa] = [b, fb];
      } else {
        fa /= 2;
      }
      [b, fb] = [t, f];
    }
    return b;
  }
}
