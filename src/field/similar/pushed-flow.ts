import type { Shape } from "./shape.ts";
import type { Timeline } from "./timeline.ts";

type Pair = readonly [number, number];
/** ℓ at the nodes at a time; null for a single pulse. */
type Background = ((t: number) => Float64Array) | null;

/** Longest substep in units of 1/(rate of the highest mode): Runge–Kutta's 2.78, less a margin. */
const STABLE = 2;

/**
 * Steps of v_t = Σ d_i ∂_i²(v + ½βe^(−λt)·v(v + 2ℓ)) − κe^(−λt)·v(v + 2ℓ), ℓ the earlier pulses' density, on the
 * coefficients of v: as in `steadyFlow` each pair of pulses pushes in two halves, and the younger carries both.
 *
 * A coefficient a_k of the basis that widens by ds_i shrinks by (s_i/to_i)^k, which takes ½(ds_i/dt)·∂_i²v; what is left
 * of the right side is evaluated at the nodes and moved on by fourth-order Runge–Kutta in the frame that shrinks along
 * (integrating factor, see `PushedStep`). a_0, the number of excitons, is changed by annihilation alone.
 */
export class PushedFlow {
  readonly #shape: Shape;
  readonly #timeline: Timeline;
  readonly #state: Float64Array;
  readonly #pairs: Float64Array;
  readonly #stage: Float64Array;
  readonly #slopes: readonly [Float64Array, Float64Array, Float64Array, Float64Array];

  constructor(shape: Shape, timeline: Timeline) {
    const empty = (): Float64Array => new Float64Array(shape.size);
    this.#shape = shape;
    this.#timeline = timeline;
    this.#state = empty();
    this.#pairs = empty();
    this.#stage = empty();
    this.#slopes = [empty(), empty(), empty(), empty()];
  }

  /** Coefficients at `to` from those at `from`. */
  advance(coefficients: Float64Array, from: number, to: number, background: Background): Float64Array {
    const a = coefficients.slice();
    const steps = Math.max(1, Math.ceil((to - from) * this.#fastest(a, from, background?.(from) ?? null)));
    for (let i = 0; i < steps; i++) {
      this.#step(a, from + ((to - from) * i) / steps, from + ((to - from) * (i + 1)) / steps, background);
    }
    return a;
  }

  #step(a: Float64Array, t0: number, t2: number, background: Background): void {
    const shape = this.#shape;
    const h = t2 - t0;
    const t1 = t0 + 0.5 * h;
    const [s0, s1, s2] = [this.#timeline.scales(t0), this.#timeline.scales(t1), this.#timeline.scales(t2)];
    const middle = background?.(t1) ?? null;
    const stage = this.#stage;
    const [k1, k2, k3, k4] = this.#slopes;
    this.#slope(a, t0, background?.(t0) ?? null, k1);
    shape.damp(a, s0, s1);
    shape.damp(k1, s0, s1);
    sumInto(stage, a, 0.5 * h, k1);
    this.#slope(stage, t1, middle, k2);
    sumInto(stage, a, 0.5 * h, k2);
    this.#slope(stage, t1, middle, k3);
    sumInto(stage, a, h, k3);
    shape.damp(stage, s1, s2);
    this.#slope(stage, t2, background?.(t2) ?? null, k4);
    for (let i = 0; i < a.length; i++) a[i] = a[i]! + (h / 6) * (k1[i]! + 2 * (k2[i]! + k3[i]!));
    shape.damp(a, s1, s2);
    sumInto(a, a, h / 6, k4);
  }

  /** da/dt but for the shrinking. */
  #slope(a: Float64Array, t: number, background: Float64Array | null, out: Float64Array): void {
    const shape = this.#shape;
    const { diffusion, annihilation } = this.#timeline.rates;
    const s = this.#timeline.scales(t);
    const growth = this.#timeline.growth(t);
    const push = this.#push(t);
    const lost = annihilation * this.#survival(t);
    shape.toState(a, this.#state);
    pairsOf(shape, this.#state, s, background, this.#state);
    shape.toCoefficients(this.#state, this.#pairs);
    for (let i = 0; i < out.length; i++) out[i] = -lost * this.#pairs[i]!;
    const both = (of: (axis: 0 | 1) => number): Pair => [of(0) / s[0], of(1) / s[1]];
    shape.addCurvature(
      a,
      both((axis) => diffusion[axis] - 0.5 * growth[axis]),
      out,
    );
    shape.addCurvature(
      this.#pairs,
      both((axis) => push * diffusion[axis]),
      out,
    );
  }

  /** Rate at which repulsion changes the highest mode, 1/ns. */
  #fastest(a: Float64Array, t: number, background: Float64Array | null): number {
    const { factors, basis } = this.#shape;
    const { diffusion } = this.#timeline.rates;
    const s = this.#timeline.scales(t);
    const amplitude = 1 / Math.sqrt(s[0] * s[1]);
    this.#shape.toState(a, this.#state);
    let most = 0;
    for (let j = 0; j < a.length; j++) {
      most = Math.max(most, Math.abs(amplitude * factors[j]! * this.#state[j]!) + (background?.[j] ?? 0));
    }
    const axes = this.#shape.planar ? diffusion[0] / s[0] + diffusion[1] / s[1] : diffusion[0] / s[0];
    return (2 * Math.abs(this.#push(t)) * most * axes * basis.raised(basis.size - 1)) / STABLE;
  }

  #push(t: number): number {
    return 0.5 * this.#timeline.rates.repulsion * this.#survival(t);
  }

  #survival(t: number): number {
    return Math.exp(-this.#timeline.rates.removal * t);
  }
}

/** v(v + 2ℓ) in the form of a state, from a state of v. */
export function pairsOf(
  { factors }: Shape,
  state: Float64Array,
  [a, b]: Pair,
  background: Float64Array | null,
  out: Float64Array,
): void {
  const amplitude = 1 / Math.sqrt(a * b);
  for (let j = 0; j < state.length; j++) {
    const v = amplitude * factors[j]! * state[j]!;
    out[j] = state[j]! * (v + (background === null ? 0 : 2 * background[j]!));
  }
}

/** out = a + factor·b */
function sumInto(out: Float64Array, a: Float64Array, factor: number, b: Float64Array): void {
  for (let i = 0; i < out.length; i++) out[i] = a[i]! + factor * b[i]!;
}
