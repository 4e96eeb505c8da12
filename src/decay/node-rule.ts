import type { Response } from "../stack/acquisition.ts";
import { cutGates } from "./gated-exponential.ts";
import { gaussLegendre } from "./gauss-legendre.ts";
import { gaussianShape, type ResponseShape } from "./response-shape.ts";
import { sampledShape } from "./sampled-response.ts";
import type { Timing } from "./timing.ts";

/**
 * A quadrature that turns a light given at `nodes` (times since the last pulse) into what each frame sees:
 * O_i = Σ_k weights[k]·L(nodes[columns[k]]) over k from rows[i] to rows[i+1].
 */
export interface NodeRule {
  readonly nodes: Float64Array;
  readonly rows: Int32Array;
  readonly columns: Int32Array;
  readonly weights: Float64Array;
}

export function applyNodes({ rows, columns, weights }: NodeRule, light: Float64Array, out: Float64Array) {
  for (let i = 0; i + 1 < rows.length; i++) {
    let sum = 0;
    for (let k = rows[i]!; k < rows[i + 1]!; k++) sum += weights[k]! * light[columns[k]!]!;
    out[i] = sum;
  }
}

/**
 * The rule is the same for every law and every parameter, so it is made once. Panels end where a gate opens or closes
 * and shrink towards the pulse, where a law may have a cusp or an infinite slope; each holds a Gauss–Legendre rule.
 */
export function nodeRule(timing: Timing): NodeRule {
  return timing.response === null ? gateRule(timing) : responseRule(timing, timing.response);
}

/** No response: each gate's own panels. */
function gateRule(timing: Timing): NodeRule {
  const build = new Builder(timing.delays.length);
  for (const { frame, start, length, share } of cutGates(timing)) {
    if (length === 0) build.add(frame, build.node(start), share);
    else {
      for (const [a, b] of graded(start, start + length)) {
        for (const [u, weight] of panel(a, b)) build.add(frame, build.node(u), (share * weight) / length);
      }
    }
  }
  return build.finish();
}

/** With a response: one set of panels for all frames, weighted by K(s) = (1/w)∫_s^{s+w} R at s = t_i − u. */
function responseRule(timing: Timing, response: Response): NodeRule {
  const { delays, gate, period } = timing;
  const shape = response.kind === "gaussian" ? gaussianShape(response.fwhm) : sampledShape(response);
  const build = new Builder(delays.length);
  const first = Float64Array.from(delays, (t) => t - shape.to);
  const last = Float64Array.from(delays, (t) => t + gate - shape.from);
  const end = period ?? Math.max(0, ...last);
  for (const [a, b] of responsePanels(timing, shape, end)) {
    for (const [u, weight] of panel(a, b)) {
      const node = build.node(u);
      for (let i = 0; i < delays.length; i++) {
        const from = first[i]!;
        const to = last[i]!;
        if (period === null && (u < from || u > to)) continue;
        const turns = period === null ? 0 : Math.ceil((from - u) / period);
        let kernel = 0;
        for (let v = u + turns * (period ?? 0); v <= to; v += period ?? Number.POSITIVE_INFINITY) {
          if (v < from) continue;
          const s = delays[i]! - v;
          kernel += gate === 0 ? shape.density(s) : shape.share(s, s + gate) / gate;
        }
        if (kernel !== 0) build.add(i, node, kernel * weight);
      }
    }
  }
  return build.finish();
}

/** Panels over [0, end]: around each gate edge as the response asks, elsewhere as wide as possible. */
function responsePanels({ delays, gate, period }: Timing, shape: ResponseShape, end: number) {
  const cuts = [0, end];
  const edges = Array.from(delays).flatMap((t) => (gate === 0 ? [t] : [t, t + gate]));
  for (const edge of edges) {
    for (const at of shape.breaks) {
      const u = period === null ? edge - at : (((edge - at) % period) + period) % period;
      if (u > 0 && u < end) cuts.push(u);
    }
  }
  cuts.sort((a, b) => a - b);
  const width = (shape.to - shape.from) / 1000;
  const kept = cuts.filter(
    (u, k) => k === 0 || u === end || (u - cuts[k - 1]! > 1e-6 * width && end - u > width),
  );
  return kept.slice(1).flatMap((u, k) => graded(kept[k]!, u));
}

/** [a, b] in panels no longer than their distance from the pulse; the last one next to it is 2⁻¹⁰ of the whole. */
function graded(a: number, b: number): [number, number][] {
  const out: [number, number][] = [];
  const floor = a > 0 ? a : b * 2 ** -10;
  let upper = b;
  while (upper > 2 * floor) {
    out.push([upper / 2, upper]);
    upper /= 2;
  }
  out.push([a, upper]);
  return out;
}

/** Nodes and weights on a panel. One that starts at the pulse is mapped by u = b·x³, which tames u^β. */
function panel(a: number, b: number): [number, number][] {
  // Over a tenth of its age or less a light hardly bends.
  const { points, weights } = gaussLegendre(b - a < 0.1 * a ? 4 : 6);
  if (a > 0) return points.map((x, k) => [a + (b - a) * x, (b - a) * weights[k]!]);
  return points.map((x, k) => [b * x ** 3, 3 * b * x * x * weights[k]!]);
}

/** Collects the entries of a rule, frame by frame or node by node. */
class Builder {
  private readonly nodes: number[] = [];
  private readonly columns: number[][];
  private readonly weights: number[][];

  constructor(frames: number) {
    this.columns = Array.from({ length: frames }, () => []);
    this.weights = Array.from({ length: frames }, () => []);
  }

  node(u: number): number {
    return this.nodes.push(u) - 1;
  }

  add(frame: number, node: number, weight: number) {
    this.columns[frame]!.push(node);
    this.weights[frame]!.push(weight);
  }

  finish(): NodeRule {
    const rows = new Int32Array(this.columns.length + 1);
    this.columns.forEach((row, i) => {
      rows[i + 1] = rows[i]! + row.length;
    });
    return {
      nodes: Float64Array.from(this.nodes),
      rows,
      columns: Int32Array.from(this.columns.flat()),
      weights: Float64Array.from(this.weights.flat()),
    };
  }
}
