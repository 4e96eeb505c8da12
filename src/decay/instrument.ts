import { gatedColumn } from "./gated-exponential.ts";
import { gaussianColumn, sigmaOfFwhm } from "./gaussian-exponential.ts";
import { applyNodes, type NodeRule, nodeRule } from "./node-rule.ts";
import type { Column, Timing } from "./timing.ts";

/**
 * What the instrument makes of a light L(u), u ≥ 0 the time since the last pulse: in frame i
 *
 *     O_i = s_i · (1/w) ∫_{t_i}^{t_i+w} (R ⊗ L)(t) dt ,
 *
 * R the response of unit area, w the gate (w = 0: the value at t_i) and s_i the transmission. Before the first pulse
 * L is 0; with a period, L repeats: what earlier pulses left behind is the law's own affair (each law says how).
 */
export interface Instrument {
  readonly frames: number;
  readonly period: number | null;
  /** O_i of L(u) = e^(−r·u), and ∂O_i/∂r. */
  exponential(rate: number, value: Float64Array, slope: Float64Array): void;
  /** Times u (ns) at which any other light is sampled; made when first asked for. */
  nodes(): Float64Array;
  /** O_i of a light given at the nodes. */
  observe(light: Float64Array, out: Float64Array): void;
}

export function instrument(timing: Timing): Instrument {
  const frames = timing.delays.length;
  const column = exponentialColumn(timing, () => rule());
  let made: NodeRule | null = null;
  const rule = () => {
    made ??= nodeRule(timing);
    return made;
  };
  const transmit = (out: Float64Array) => {
    const share = timing.transmission;
    if (share) for (let i = 0; i < frames; i++) out[i]! *= share[i]!;
  };
  return {
    frames,
    period: timing.period,
    exponential(rate, value, slope) {
      column(rate, value, slope);
      transmit(value);
      transmit(slope);
    },
    nodes: () => rule().nodes,
    observe(light, out) {
      applyNodes(rule(), light, out);
      transmit(out);
    },
  };
}

/** Closed forms without a response and with a Gaussian one; the nodes for a sampled response. */
function exponentialColumn(timing: Timing, rule: () => NodeRule): Column {
  const { response } = timing;
  if (response === null) return gatedColumn(timing);
  if (response.kind === "gaussian") return gaussianColumn(timing, sigmaOfFwhm(response.fwhm));
  return (rate, value, slope) => {
    const { nodes } = rule();
    const light = nodes.map((u) => Math.exp(-rate * u));
    applyNodes(rule(), light, value);
    for (let j = 0; j < nodes.length; j++) light[j]! *= -nodes[j]!;
    applyNodes(rule(), light, slope);
  };
}
