import { pushedTime } from "../field/pushed-spread.ts";
import { centreOf } from "../field/recording.ts";
import type { Scenario } from "../field/scenario.ts";
import { similarLight } from "../field/similar/similar-light.ts";
import { travelled } from "../field/similar/travelled.ts";
import {
  meanDiffusionOf,
  type Name,
  namesOf,
  problemOf,
  type Symmetry,
  type Values,
  valuesOf,
} from "../field/stack-fit/parameters.ts";
import { scoreStack } from "../field/stack-fit/score-stack.ts";
import type { StackData } from "../field/stack-fit/stack-data.ts";
import { cutPatch, noiseLaw, rectangleAround } from "../frame/cut.ts";
import { invertSymmetric } from "../numerics/linear-algebra.ts";
import { travelSlopes } from "./field-quantities.ts";
import { quadratic } from "./joint.ts";
import type { Expected, WidthsPrecision } from "./precision.ts";

/** What the whole-stack fit can tell; µm and ns. */
export interface StackPrecision extends WidthsPrecision {
  /** β = u₀n₀/k_BT; null where the scenario has no repulsion. */
  readonly repulsion: Expected | null;
  /** k n₀, 1/ns; null where the scenario has no annihilation. */
  readonly annihilation: Expected | null;
  /** c, 1/ns, and τ_m, ns; null where the scenario has no traps. */
  readonly capture: Expected | null;
  readonly trapLifetime: Expected | null;
}

/** Standard deviations around the centre that are looked at pixel by pixel. */
const REACH = 5;
/** Room for the widening that annihilation brings on top of diffusion. */
const WIDENED = 1.5;

/**
 * The Cramér–Rao bound of the whole-stack fit's parameters: the inverse of Σ ∂m/∂p·∂m/∂q/v over all pixels of all
 * frames (see `scoreStack`) with the scenario's processes free beside light, centre, start and background. L follows by
 * linear propagation (JCGM 100:2008, 5.2).
 *
 * @returns null where the recording does not determine every parameter
 */
export function stackPrecision(scenario: Scenario): StackPrecision | null {
  const { medium } = scenario;
  const candidate = {
    name: "diffusion",
    repulsion: medium.repulsion > 0,
    annihilation: medium.annihilation > 0,
    capture: medium.capture > 0,
  } as const;
  const names = namesOf(scenario.kind, candidate, symmetryOf(scenario));
  const data = expectedData(scenario);
  const p = parametersOf(scenario, data, names);
  const covariance = scoreStack(data, names, p).information;
  if (!invertSymmetric(covariance, names.length)) return null;
  const expected = (value: number, gradient: readonly number[]): Expected => ({
    value,
    u: Math.sqrt(Math.max(quadratic(gradient, covariance), 0)),
  });
  const alone = (name: Name): Expected | null => {
    const at = names.indexOf(name);
    return at < 0 ? null : { value: p[at]!, u: Math.sqrt(covariance[at * names.length + at]!) };
  };
  const d = meanDiffusionOf(names, p);
  const length = Math.sqrt(travelled(problemOf(data, valuesOf(names, p))));
  const length2 = expected(length ** 2, travelSlopes(data, names, p));
  return {
    diffusion: expected(d.value, d.gradient),
    lifetime: alone("tau")!,
    length: { value: length, u: length > 0 ? length2.u / (2 * length) : Math.sqrt(length2.u) },
    repulsion: alone("repulsion"),
    annihilation: alone("k_n0"),
    capture: alone("capture"),
    trapLifetime: alone("trap_lifetime"),
  };
}

function symmetryOf({ kind, start, medium }: Scenario): Symmetry {
  const isRound = ([xx, xy, yy]: readonly [number, number, number]): boolean =>
    Math.abs(xx - yy) < 1e-9 * xx && Math.abs(xy) < 1e-9 * xx;
  if (kind === "trace") return { start: "round", diffusion: "isotropic" };
  const tensor = !isRound(medium.diffusion);
  return {
    start: tensor || !isRound(start.covariance) ? "free" : "round",
    diffusion: tensor ? "tensor" : "isotropic",
  };
}

/** The frames' geometry and noise. The pixels stay empty: the information depends on their means alone. */
function expectedData(scenario: Scenario): StackData {
  const { recording, start, medium, kind, width, height } = scenario;
  const { delays, gate, period, responseSigma, pixelX: pixel, pixelY, psfVariance } = recording;
  const modelledBefore = period !== null || responseSigma > 0;
  const used = delays.flatMap((delay, i) => (delay >= 0 || modelledBefore ? [i] : []));
  const origin = centreOf(recording, used[0]!);
  const empty = new Float64Array(width * height);
  return {
    kind,
    pixel,
    noise: noiseLaw(scenario.acquisition.detector),
    frames: used.map((frame) => {
      const delay = delays[frame]!;
      const age = Math.max(delay + gate, period === null ? 0 : delay + gate + period);
      const time = pushedTime(medium, start, age);
      const of = (axis: 0 | 2): number => start.covariance[axis] + 2 * medium.diffusion[axis] * time;
      const variance = WIDENED * Math.max(of(0), of(2)) + psfVariance;
      const [x, y] = centreOf(recording, frame);
      const reach = (REACH * Math.sqrt(variance)) / pixel + 2;
      const rectangle = rectangleAround(
        [x / pixel, kind === "map" ? y / pixel : 0],
        [reach, kind === "map" ? reach : 0],
        width,
        height,
      );
      return {
        frame,
        delay,
        patch: cutPatch(empty, width, rectangle),
        shift: [x - origin[0], y - origin[1]],
        background: 0,
        variance,
      };
    }),
    gate,
    responseSigma,
    period,
    slit: kind === "trace" && Number.isFinite(pixelY) ? pixelY : null,
    blurVariance: psfVariance,
  };
}

function parametersOf(scenario: Scenario, data: StackData, names: readonly Name[]): Float64Array {
  const { recording, start, medium } = scenario;
  const [x, y] = centreOf(recording, data.frames[0]!.frame);
  const [xx, xy, yy] = medium.diffusion;
  const v: Values = {
    x,
    y,
    s: start.covariance[0],
    s_xx: start.covariance[0],
    s_xy: start.covariance[1],
    s_yy: start.covariance[2],
    D: xx,
    D_xx: xx,
    D_xy: xy,
    D_yy: yy,
    tau: medium.lifetime,
    background: Math.max(scenario.background, 1e-6),
    repulsion: scenario.repulsion,
    k_n0: scenario.annihilationRate,
    capture: medium.capture,
    trap_lifetime: medium.trapLifetime,
  };
  // only the candidate's own parameters, so that what it leaves out is out of the model too
  const own = Object.fromEntries(names.map((name) => [name, v[name] ?? 1]));
  const first = data.frames.findIndex(({ delay }) => delay >= 0);
  const amplitude = scenario.photons / similarLight(problemOf(data, own)).amount(first);
  return Float64Array.from(names, (name) => (name === "amplitude" ? amplitude : own[name]!));
}
