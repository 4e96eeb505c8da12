import { type Foot, startState } from "./foot.ts";
import { PushedFlow } from "./pushed-flow.ts";
import type { Shape } from "./shape.ts";
import type { Timeline } from "./timeline.ts";

/** v = e^(λt)·n of one pulse at the nodes of a timeline. */
export interface Flow {
  readonly shape: Shape;
  readonly timeline: Timeline;
  /** Coefficients a_k, one array a time; a_0 is the share of excitons that annihilation has left. */
  readonly coefficients: readonly Float64Array[];
  /** Null for a single pulse. */
  readonly background: Background | null;
}

/** e^(λt) times the density of earlier pulses, at the shape's nodes at each of the timeline's times. */
export type Background = readonly Float64Array[];

/**
 * v_t = d₁v_xx + d₂v_yy − κe^(−λt)·v(v + 2ℓ), ℓ the earlier pulses' density.
 *
 * Strang's splitting (SIAM J. Numer. Anal. 5, 506, 1968), diffusion exact per coefficient and annihilation exact per
 * node, one whole and two half steps combined as (4·two − one)/3 to fourth order. Without annihilation v stays the
 * spreading Gaussian and there is nothing to do; without diffusion the steps are exact. With repulsion see PushedFlow.
 */
export function flowOf(shape: Shape, timeline: Timeline, background: Background | null, foot?: Foot): Flow {
  const { annihilation, repulsion } = timeline.rates;
  if (repulsion !== 0)
    return { shape, timeline, coefficients: pushed(shape, timeline, background, foot), background };
  const states = [startState(shape, foot)];
  for (let i = 1; i < timeline.size; i++) {
    const before = states[i - 1]!;
    states.push(annihilation === 0 ? before : stepped(shape, timeline, background, i - 1, before));
  }
  const coefficients = states.map((state) => {
    const out = new Float64Array(shape.size);
    shape.toCoefficients(state, out);
    return out;
  });
  return { shape, timeline, coefficients, background };
}

function pushed(
  shape: Shape,
  timeline: Timeline,
  background: Background | null,
  foot: Foot | undefined,
): Float64Array[] {
  const flow = new PushedFlow(shape, timeline);
  const first = new Float64Array(shape.size);
  shape.toCoefficients(startState(shape, foot), first);
  const coefficients: Float64Array[] = [first];
  for (let i = 0; i + 1 < timeline.size; i++) {
    const left = background === null ? null : (t: number) => backgroundBetween(timeline, background, i, t);
    coefficients.push(flow.advance(coefficients[i]!, timeline.times[i]!, timeline.times[i + 1]!, left));
  }
  return coefficients;
}

function stepped(
  shape: Shape,
  timeline: Timeline,
  background: Background | null,
  i: number,
  state: Float64Array,
): Float64Array {
  const [t0, t2] = [timeline.times[i]!, timeline.times[i + 1]!];
  const t1 = timeline.between(i);
  const [s0, s1, s2] = [timeline.scales(t0), timeline.scales(t1), timeline.scales(t2)];
  const { annihilation } = timeline.rates;
  const first = 0.5 * annihilation * (timeline.decayed(t1) - timeline.decayed(t0));
  const second = 0.5 * annihilation * (timeline.decayed(t2) - timeline.decayed(t1));
  const [l0, l2] = [background?.[i] ?? null, background?.[i + 1] ?? null];
  const l1 = background === null ? null : backgroundBetween(timeline, background, i, t1);
  const once = state.slice();
  annihilate(shape, once, s0, first + second, l0);
  shape.diffuse(once, s0, s2);
  annihilate(shape, once, s2, first + second, l2);
  const twice = state.slice();
  annihilate(shape, twice, s0, first, l0);
  shape.diffuse(twice, s0, s1);
  annihilate(shape, twice, s1, first + second, l1);
  shape.diffuse(twice, s1, s2);
  annihilate(shape, twice, s2, second, l2);
  for (let j = 0; j < once.length; j++) once[j] = (4 * twice[j]! - once[j]!) / 3;
  return once;
}

/** v' = −κv(v + 2ℓ) over `meeting` = κ·(time), exactly. */
function annihilate(
  { factors }: Shape,
  state: Float64Array,
  [a, b]: readonly [number, number],
  meeting: number,
  background: Float64Array | null,
): void {
  const amplitude = 1 / Math.sqrt(a * b);
  for (let j = 0; j < state.length; j++) {
    const v = amplitude * factors[j]! * state[j]!;
    if (background === null) {
      state[j] = state[j]! / (1 + meeting * v);
      continue;
    }
    const lost = 2 * background[j]! * meeting;
    const met = lost < 1e-12 ? meeting : (-meeting * Math.expm1(-lost)) / lost;
    state[j] = (state[j]! * Math.exp(-lost)) / (1 + met * v);
  }
}

function backgroundBetween(timeline: Timeline, background: Background, i: number, t: number): Float64Array {
  const weights = new Float64Array(timeline.size);
  timeline.addReading(t, 1, weights);
  const out = new Float64Array(background[i]!.length);
  weights.forEach((w, k) => {
    if (w === 0) return;
    const each = background[k]!;
    for (let j = 0; j < out.length; j++) out[j] = out[j]! + w * each[j]!;
  });
  return out;
}
