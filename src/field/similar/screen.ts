import { nodesOver } from "../quadrature.ts";
import type { Flow } from "./flow.ts";
import type { LaguerreBasis } from "./laguerre-basis.ts";
import type { Optics } from "./optics.ts";
import { StretchedAxis } from "./stretched-axis.ts";

/** Up to where a profile is followed, in standard deviations. */
export const REACH = 6.7;
/** Coefficients below this share of the first are left out. */
export const NEGLIGIBLE = 1e-9;

/** Light v of each of a flow's states on points that do not move, so that states can be added. */
export interface Screen {
  readonly values: readonly Float64Array[];
}

export interface RoundScreen extends Screen {
  readonly radius: StretchedAxis;
}

export function roundScreen(flow: Flow, optics: Optics, reach: number, step: number): RoundScreen {
  const radius = new StretchedAxis(narrowest(flow, optics.blur[0], 0), reach, step);
  const { basis } = flow.shape;
  const values = flow.coefficients.map((coefficients, i) => {
    const [s] = flow.timeline.scales(flow.timeline.times[i]!);
    const [a, used, scale] = seenRound(basis, coefficients, s, optics);
    const out = new Float64Array(radius.count);
    for (let p = 0; p < radius.count; p++) out[p] = valueAt(basis, a, used, radius.at(p) ** 2, scale);
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

/** ∫ over |y| < slit/2 of round states, averaged over a pixel along x: their values along the radius, added up. */
export function stripScreen(
  flow: Flow,
  optics: Optics,
  reach: number,
  step: number,
  strip: Strip,
): RoundScreen {
  const { radius, values } = roundScreen(flow, optics, reach, step);
  const alongX =
    strip.pixel === 0
      ? [{ at: 0, weight: 1 }]
      : nodesOver(-strip.pixel / 2, strip.pixel / 2, 0.4 / strip.pixel).map(({ at, weight }) => ({
          at,
          weight: weight / strip.pixel,
        }));
  const across = nodesOver(0, Math.min(strip.slit / 2, reach), 2 / narrowest(flow, optics.blur[0], 0));
  const count = radius.count;
  const table = new Float64Array(count * count);
  for (let p = 0; p < count; p++) {
    for (const dx of alongX) {
      for (const y of across) {
        const square = (radius.at(p) + dx.at) ** 2 + y.at ** 2;
        addCubic(table, p * count, radius.psi(square) / radius.step, count, 2 * dx.weight * y.weight);
      }
    }
  }
  return { radius, values: values.map((each) => product(table, each)) };
}

/** Adds to a row of `count` the weights that read an even function at u by Lagrange's cubic; none beyond the end. */
function addCubic(table: Float64Array, row: number, u: number, count: number, weight: number): void {
  const i = Math.floor(u);
  if (i + 2 >= count) return;
  const f = u - i;
  const [before, after, second] = [f + 1, f - 1, f - 2];
  const shares = [
    (-f * after * second) / 6,
    (before * after * second) / 2,
    (-before * f * second) / 2,
    (before * f * after) / 6,
  ];
  for (const [k, share] of shares.entries()) {
    const at = row + Math.abs(i - 1 + k);
    table[at] = table[at]! + weight * share;
  }
}

function product(table: Float64Array, values: Float64Array): Float64Array {
  const count = values.length;
  return Float64Array.from(values, (_, p) => {
    let sum = 0;
    for (let q = 0, at = p * count; q < count; q++, at++) sum += table[at]! * values[q]!;
    return sum;
  });
}

/** Smallest width of the light over a flow. */
export function narrowest({ timeline }: Flow, blur: number, axis: 0 | 1): number {
  return Math.sqrt(Math.min(1, timeline.scales(timeline.end)[axis]) + blur);
}

function valueAt(basis: LaguerreBasis, a: Float64Array, used: number, square: number, scale: number): number {
  const z = square / (2 * scale);
  if (z > 60) return 0;
  const gauss = Math.exp(-z) / scale;
  return used === 1 ? gauss * a[0]! : basis.sum(z, gauss, a, used);
}

/** Coefficients after blur, which is diffusion of the light alone, and pixels. */
function seenRound(
  basis: LaguerreBasis,
  coefficients: Float64Array,
  s: number,
  { blur, fourth }: Optics,
): [a: Float64Array, used: number, scale: number] {
  const scale = s + blur[0];
  const [strength] = fourth;
  const a = coefficients.slice();
  let damping = 1;
  for (let k = 0; k < a.length; k++) {
    a[k] = a[k]! * damping;
    damping *= s / scale;
  }
  let used = a.length;
  while (used > 1 && Math.abs(a[used - 1]!) < NEGLIGIBLE * a[0]!) used--;
  if (strength === 0) return [a, used, scale];
  for (let k = Math.min(used, a.length - 2) - 1; k >= 0; k--) {
    a[k + 2] = a[k + 2]! + (strength * basis.raised(k) * basis.raised(k + 1) * a[k]!) / scale ** 2;
  }
  return [a, Math.min(used + 2, a.length), scale];
}
