import { nodesOver } from "../quadrature.ts";
import type { Flow } from "./flow.ts";
import type { LaguerreBasis } from "./laguerre-basis.ts";
import { StretchedAxis } from "./stretched-axis.ts";

/** What happens to the light between sample and pixels, in the whitened frame. */
export interface Optics {
  /** Variance of the blur along both axes. */
  readonly blur: readonly [number, number];
  /**
   * Beyond its variance a²/12, a pixel's mean has the term −a⁴/2880·(∂_x⁴ + ∂_y⁴): its parts ∂₁⁴, ∂₁²∂₂², ∂₂⁴
   * (a round screen takes the first for ∇⁴). Odd parts are left out.
   */
  readonly fourth: readonly [number, number, number];
}

/** Up to where a profile is followed, in standard deviations. */
export const REACH = 6.7;
/** Coefficients below this share of the first are left out. */
const NEGLIGIBLE = 1e-11;

/** Light v of each of a flow's states on points that do not move, so that states can be added. */
export interface Screen {
  readonly values: readonly Float64Array[];
}

export interface RoundScreen extends Screen {
  readonly radius: StretchedAxis;
}

export interface PlanarScreen extends Screen {
  readonly axes: readonly [StretchedAxis, StretchedAxis];
}

export function roundScreen(flow: Flow, optics: Optics, reach: number, step: number): RoundScreen {
  const radius = new StretchedAxis(narrowest(flow, optics, 0), reach, step);
  const { basis } = flow.shape;
  const row = new Float64Array(basis.size);
  const values = flow.coefficients.map((coefficients, i) => {
    const [s] = flow.timeline.scales(flow.timeline.times[i]!);
    const [a, used, scale] = seenRound(basis, coefficients, s, optics);
    const out = new Float64Array(radius.count);
    for (let p = 0; p < radius.count; p++) out[p] = valueAt(basis, a, used, radius.at(p) ** 2, scale, row);
    return out;
  });
  return { radius, values };
}

export interface Strip {
  /** In starting widths; Infinity for no slit. */
  readonly slit: number;
  /** Pixel along x. */
  readonly pixel: number;
}

/** ∫ over |y| < slit/2 of round states, averaged over a pixel along x. */
export function stripScreen(
  flow: Flow,
  optics: Optics,
  reach: number,
  step: number,
  strip: Strip,
): RoundScreen {
  const radius = new StretchedAxis(narrowest(flow, optics, 0), reach, step);
  const { basis } = flow.shape;
  const row = new Float64Array(basis.size);
  const alongX =
    strip.pixel === 0
      ? [{ at: 0, weight: 1 }]
      : nodesOver(-strip.pixel / 2, strip.pixel / 2, 0.4 / strip.pixel).map(({ at, weight }) => ({
          at,
          weight: weight / strip.pixel,
        }));
  const values = flow.coefficients.map((coefficients, i) => {
    const [s] = flow.timeline.scales(flow.timeline.times[i]!);
    const [a, used, scale] = seenRound(basis, coefficients, s, optics);
    const across = nodesOver(0, Math.min(strip.slit / 2, REACH * Math.sqrt(scale)), 2 / Math.sqrt(scale));
    const out = new Float64Array(radius.count);
    for (let p = 0; p < radius.count; p++) {
      const x = radius.at(p);
      let sum = 0;
      for (const dx of alongX) {
        for (const y of across) {
          sum += dx.weight * y.weight * valueAt(basis, a, used, (x + dx.at) ** 2 + y.at ** 2, scale, row);
        }
      }
      out[p] = 2 * sum;
    }
    return out;
  });
  return { radius, values };
}

export function planarScreen(
  flow: Flow,
  optics: Optics,
  reach: readonly [number, number],
  step: number,
): PlanarScreen {
  const axes = [0, 1].map((k) => new StretchedAxis(narrowest(flow, optics, k as 0 | 1), reach[k]!, step));
  const [along, across] = [axes[0]!, axes[1]!];
  const { basis } = flow.shape;
  const values = flow.coefficients.map((coefficients, i) => {
    const s = flow.timeline.scales(flow.timeline.times[i]!);
    const scale = [s[0] + optics.blur[0], s[1] + optics.blur[1]] as const;
    const { a, used } = seenPlanar(basis, coefficients, s, scale, optics);
    const first = axisTable(basis, along, used[0], scale[0]);
    const second = axisTable(basis, across, used[1], scale[1]);
    return tensorProduct(first, a, second, [along.count, used[0], used[1], across.count], basis.size);
  });
  return { axes: [along, across], values };
}

/** Smallest width of the light over a flow. */
function narrowest({ timeline }: Flow, { blur }: Optics, axis: 0 | 1): number {
  return Math.sqrt(Math.min(1, timeline.scales(timeline.end)[axis]) + blur[axis]);
}

function valueAt(
  basis: LaguerreBasis,
  a: Float64Array,
  used: number,
  square: number,
  scale: number,
  row: Float64Array,
): number {
  const z = square / (2 * scale);
  if (z > 60) return 0;
  const gauss = Math.exp(-z) / scale;
  if (used === 1) return gauss * a[0]!;
  basis.evaluate(z, gauss, used, row, 0);
  let sum = 0;
  for (let k = 0; k < used; k++) sum += a[k]! * row[k]!;
  return sum;
}

/** Coefficients after blur, which is diffusion of the light alone, and pixels. */
function seenRound(
  basis: LaguerreBasis,
  coefficients: Float64Array,
  s: number,
  { blur, fourth }: Optics,
): [a: Float64Array, used: number, scale: number] {
  const scale = s + blur[0];
  const a = coefficients.slice();
  let damping = 1;
  for (let k = 0; k < a.length; k++) {
    a[k] = a[k]! * damping;
    damping *= s / scale;
  }
  let used = a.length;
  while (used > 1 && Math.abs(a[used - 1]!) < NEGLIGIBLE * a[0]!) used--;
  if (fourth[0] === 0) return [a, used, scale];
  for (let k = Math.min(used, a.length - 2) - 1; k >= 0; k--) {
    a[k + 2] = a[k + 2]! + (fourth[0] * basis.raised(k) * basis.raised(k + 1) * a[k]!) / scale ** 2;
  }
  return [a, Math.min(used + 2, a.length), scale];
}

function seenPlanar(
  basis: LaguerreBasis,
  coefficients: Float64Array,
  s: readonly [number, number],
  scale: readonly [number, number],
  { fourth }: Optics,
): { a: Float64Array; used: [number, number] } {
  const n = basis.size;
  const a = coefficients.slice();
  const used: [number, number] = [1, 1];
  for (let k = 0, alongX = 1; k < n; k++, alongX *= s[0] / scale[0]) {
    for (let l = 0, damping = alongX; l < n; l++, damping *= s[1] / scale[1]) {
      const value = a[k * n + l]! * damping;
      a[k * n + l] = value;
      if (Math.abs(value) < NEGLIGIBLE * a[0]!) continue;
      used[0] = Math.max(used[0], k + 1);
      used[1] = Math.max(used[1], l + 1);
    }
  }
  if (fourth.every((value) => value === 0)) return { a, used };
  const raise = (k: number, axis: 0 | 1) => basis.raised(k) / scale[axis];
  // from the top, so that what is read has not been raised yet
  for (let k = used[0] - 1; k >= 0; k--) {
    for (let l = used[1] - 1; l >= 0; l--) {
      const value = a[k * n + l]!;
      const [x, y] = [raise(k, 0), raise(l, 1)];
      if (k + 2 < n) a[(k + 2) * n + l] = a[(k + 2) * n + l]! + fourth[0] * x * raise(k + 1, 0) * value;
      if (k + 1 < n && l + 1 < n)
        a[(k + 1) * n + l + 1] = a[(k + 1) * n + l + 1]! + fourth[1] * x * y * value;
      if (l + 2 < n) a[k * n + l + 2] = a[k * n + l + 2]! + fourth[2] * y * raise(l + 1, 1) * value;
    }
  }
  return { a, used: [Math.min(used[0] + 2, n), Math.min(used[1] + 2, n)] };
}

/** [point][k]: e^(−z) P_k(z)/√s along an axis. */
function axisTable(basis: LaguerreBasis, axis: StretchedAxis, used: number, scale: number): Float64Array {
  const table = new Float64Array(axis.count * used);
  for (let p = 0; p < axis.count; p++) {
    const z = axis.at(p) ** 2 / (2 * scale);
    if (z < 60) basis.evaluate(z, Math.exp(-z) / Math.sqrt(scale), used, table, p * used);
  }
  return table;
}

/** Σ_kl first[p][k]·a[k][l]·second[q][l]. */
function tensorProduct(
  first: Float64Array,
  a: Float64Array,
  second: Float64Array,
  [rows, k1, k2, columns]: readonly [number, number, number, number],
  stride: number,
): Float64Array {
  const out = new Float64Array(rows * columns);
  const half = new Float64Array(k2);
  for (let p = 0; p < rows; p++) {
    half.fill(0);
    for (let k = 0; k < k1; k++) {
      const f = first[p * k1 + k]!;
      for (let l = 0; l < k2; l++) half[l] = half[l]! + f * a[k * stride + l]!;
    }
    for (let q = 0; q < columns; q++) {
      let sum = 0;
      for (let l = 0; l < k2; l++) sum += half[l]! * second[q * k2 + l]!;
      out[p * columns + q] = sum;
    }
  }
  return out;
}
