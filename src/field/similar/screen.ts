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
  const radius = new StretchedAxis(narrowest(flow, optics.blur[0], 0), reach, step);
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

/** Smallest width of the light over a flow. */
export function narrowest({ timeline }: Flow, blur: number, axis: 0 | 1): number {
  return Math.sqrt(Math.min(1, timeline.scales(timeline.end)[axis]) + blur);
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
