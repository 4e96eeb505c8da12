import { type Background, type Flow, flowOf } from "./flow.ts";
import type { Foot } from "./foot.ts";
import type { Shape } from "./shape.ts";
import type { Timeline } from "./timeline.ts";

/** Light that has fallen to this share is forgotten. */
const FORGOTTEN = 1e-8;
/** The steady state stands when the earlier pulses' density changes by less than this part of the peak. */
const STANDS = 1e-7;
const MOST_ROUNDS = 60;
/** More left means less surviving: rounds alternate, and a part of the way converges fastest (0.8 takes 3 to 6 rounds). */
const RELAXATION = 0.8;

/** How long free excitons of one pulse matter, ns. */
export function memory(removal: number): number {
  return -Math.log(FORGOTTEN) / removal;
}

/**
 * One pulse among all the earlier ones: the densities p(age) of all pulses obey
 * p_t = ∇·D∇p − λp − κp(p + 2ℓ), ℓ(age) = Σ_(i≥1) p(age + iT), and add up to the whole density, n = Σ p: each pair of
 * pulses annihilates in two halves, and the younger carries both of them. So every pulse keeps its own width, and the
 * steady state is a fixed point of ℓ, found by iteration.
 */
export function steadyFlow(shape: Shape, timeline: Timeline, period: number, foot?: Foot): Flow {
  let flow = flowOf(shape, timeline, null, foot);
  if (timeline.rates.annihilation === 0 && timeline.rates.repulsion === 0) return flow;
  const glows = glowsOf(shape, timeline, period);
  let background = left(flow, glows);
  for (let round = 0; round < MOST_ROUNDS; round++) {
    flow = flowOf(shape, timeline, background, foot);
    const next = left(flow, glows);
    let change = 0;
    background = background.map((before, i) => {
      const decay = Math.exp(-timeline.rates.removal * timeline.times[i]!);
      return before.map((value, j) => {
        change = Math.max(change, Math.abs(next[i]![j]! - value) * decay);
        return value + RELAXATION * (next[i]![j]! - value);
      });
    });
    if (change < STANDS) break;
  }
  return flow;
}

/** An earlier pulse at one time: how its density there follows from a flow's coefficients. */
interface Glow {
  /** Weights of the states, e^(−λ(t − age)) with them. */
  readonly weights: Float64Array;
  /** [node][k]: basis functions of the width it has by then, per axis; one axis for round shapes. */
  readonly tables: readonly Float64Array[];
}

/** The earlier pulses at each of the timeline's times. They stay the same while the density is sought. */
function glowsOf(shape: Shape, timeline: Timeline, period: number): Glow[][] {
  return timeline.times.map((age) => {
    const glows: Glow[] = [];
    const here = timeline.scales(age);
    for (let t = age + period; t <= timeline.end; t += period) {
      const weights = new Float64Array(timeline.size);
      timeline.addReading(t, Math.exp(-timeline.rates.removal * (t - age)), weights);
      const there = timeline.scales(t);
      const axes = shape.planar ? ([0, 1] as const) : ([0] as const);
      const tables = axes.map((axis) => nodeTable(shape, here[axis] / there[axis], there[axis]));
      glows.push({ weights, tables });
    }
    return glows;
  });
}

/** ℓ at the shape's nodes at each time, times e^(λt). */
function left({ coefficients, shape }: Flow, glows: readonly (readonly Glow[])[]): Background {
  const a = new Float64Array(shape.size);
  return glows.map((each) => {
    const sum = new Float64Array(shape.size);
    for (const { weights, tables } of each) {
      combine(coefficients, weights, a);
      if (shape.planar) addPlanar(shape, a, tables, sum);
      else addRound(shape, a, tables, sum);
    }
    return sum;
  });
}

/** out = Σ weights·states. */
export function combine(states: readonly Float64Array[], weights: Float64Array, out: Float64Array): void {
  out.fill(0);
  for (let k = 0; k < weights.length; k++) {
    const w = weights[k]!;
    if (w === 0) continue;
    const state = states[k]!;
    for (let j = 0; j < out.length; j++) out[j] = out[j]! + w * state[j]!;
  }
}

function addRound({ basis }: Shape, a: Float64Array, [table]: Glow["tables"], sum: Float64Array): void {
  const n = basis.size;
  for (let j = 0; j < n; j++) {
    let value = 0;
    for (let k = 0; k < n; k++) value += a[k]! * table![j * n + k]!;
    sum[j] = sum[j]! + Math.max(value, 0);
  }
}

function addPlanar(
  { basis }: Shape,
  a: Float64Array,
  [first, second]: Glow["tables"],
  sum: Float64Array,
): void {
  const n = basis.size;
  const half = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    half.fill(0);
    for (let k = 0; k < n; k++) {
      const f = first![i * n + k]!;
      for (let l = 0; l < n; l++) half[l] = half[l]! + f * a[k * n + l]!;
    }
    for (let j = 0; j < n; j++) {
      let value = 0;
      for (let l = 0; l < n; l++) value += half[l]! * second![j * n + l]!;
      sum[i * n + j] = sum[i * n + j]! + Math.max(value, 0);
    }
  }
}

function nodeTable({ basis, planar }: Shape, ratio: number, scale: number): Float64Array {
  const n = basis.size;
  const table = new Float64Array(n * n);
  for (let j = 0; j < n; j++) {
    const z = basis.z[j]! * ratio;
    basis.evaluate(z, Math.exp(-z) / (planar ? Math.sqrt(scale) : scale), n, table, j * n);
  }
  return table;
}
