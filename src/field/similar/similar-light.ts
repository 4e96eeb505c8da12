import { changeRate, exposures } from "../exposure.ts";
import type { Start } from "../medium.ts";
import { combine, memory, steadyFlow } from "./earlier-pulses.ts";
import { type Flow, flowOf } from "./flow.ts";
import { apart, type Foot, modesFor, onFoot, together } from "./foot.ts";
import { type Optics, opticsOf } from "./optics.ts";
import { plainLight } from "./plain-light.ts";
import { planarScreen } from "./planar-screen.ts";
import type { SimilarLight, SimilarProblem } from "./problem.ts";
import { fillPlanar, fillRound, fillStrip, logQuarters } from "./profile.ts";
import { REACH, roundScreen, stripScreen } from "./screen.ts";
import { shapeOf } from "./shape.ts";
import { Timeline } from "./timeline.ts";
import { dot, type FrameWeights, frameWeights, lightWeights } from "./weights.ts";
import { type Whitened, whitened } from "./whitened.ts";

/** Standard deviations after which the response has ended (see `exposures`). */
const RESPONSE_REACH = 6;

/**
 * How finely a problem is resolved. A fit that takes differences of lights computes all of them with one resolution, so
 * that the small errors are the same in both and cancel.
 */
export interface Resolution {
  /** Basis functions along an axis. */
  readonly modes: number;
  /** Panels of the timeline. */
  readonly panels: number;
  /** Distance of the profile's points, in narrowest widths: along a radius, and on each axis of a quarter plane. */
  readonly radialStep: number;
  readonly planarStep: number;
}

/**
 * Fine enough for profiles right to 1e-5 of their peak.
 *
 * Annihilation flattens the top, diffusion rounds it again: modes go with ln(κ/d), measured against 64 modes for k n₀ τ
 * up to 30. Repulsion gives the spot an edge: modes measured against the Fourier solver, 1e-5 for β up to 3 and 2e-4 at
 * 10 where the spot is round, 3e-4 at 10 in a quarter plane, whose modes cost more.
 */
export function resolutionOf(problem: SimilarProblem): Resolution {
  if (problem.foot !== undefined) return footedResolution(problem, problem.foot);
  const { diffusion, round } = whitened(problem);
  const rates = ratesOf(problem, diffusion);
  const line = new Timeline(rates, endOf(problem));
  const meeting = line.decayed(line.end);
  const sharp = rates.annihilation / (Math.max(diffusion[1], 0) + 0.02 / meeting);
  const flatness = meeting > 0 ? Math.log1p(Math.max(sharp, 0)) : 0;
  const flat = 5 * flatness + 6 * Math.max(flatness - 3.5, 0);
  const pushed = rates.repulsion === 0 ? 0 : 6 + 20 * Math.log1p(Math.abs(rates.repulsion));
  const most = pushed > 0 && !round ? 48 : 72;
  return {
    modes: Math.min(4 * Math.ceil((14 + flat + pushed) / 4), most),
    panels: line.panels,
    radialStep: 0.04,
    planarStep: 0.12,
  };
}

/**
 * What the narrow Gaussian needs alone; where it meets the wide one its modes in that one's basis, and somewhat shorter
 * steps: right to 1e-5 of the peak without and 3e-4 with annihilation, measured for ratios up to 9.
 */
function footedResolution({ foot: _, ...narrow }: SimilarProblem, foot: Foot): Resolution {
  const alone = resolutionOf(narrow);
  if (isLinear(narrow)) return alone;
  const most = whitened(narrow).round ? 96 : 72;
  const modes = Math.max(alone.modes, Math.min(4 * Math.ceil(modesFor(foot, 1e-5) / 4), most));
  const finer = 1 / Math.sqrt(foot.ratio);
  return {
    modes,
    panels: Math.ceil(1.5 * alone.panels),
    radialStep: alone.radialStep * finer,
    planarStep: alone.planarStep * finer,
  };
}

function isLinear({ annihilation, repulsion }: SimilarProblem): boolean {
  return annihilation === 0 && repulsion === 0;
}

/**
 * The mean light of a recording's frames; reaction and diffusion as in `Medium`, in the whitened frame (see
 * `whitened`) by a basis that spreads with the spot (see `LaguerreBasis`, `flowOf`, `Timeline`).
 *
 * @throws RangeError where Σ₀ is not positive definite, or a negative D makes the spot shrink to less than a third
 */
export function similarLight(problem: SimilarProblem, resolution?: Resolution): SimilarLight {
  const { foot } = problem;
  if (foot !== undefined && isLinear(problem)) {
    const parts = apart(problem, foot);
    return together(
      parts.map((part) => ({ share: part.share, light: similarLight(part.problem, resolution) })),
    );
  }
  if (isLinear(problem) && problem.capture === 0) return plainLight(problem);
  const steps = resolution ?? resolutionOf(problem);
  return flowingLight(foot === undefined ? problem : onFoot(problem, foot), steps, problem);
}

/** @param narrow the problem before it was brought to the units of its wide Gaussian: things go as fast as it says */
function flowingLight(problem: SimilarProblem, steps: Resolution, narrow: SimilarProblem): SimilarLight {
  const { capture, lifetime, period } = problem;
  if (
    period !== null &&
    !(1 / lifetime + capture > 0 && (capture === 0 || problem.trapLifetime < Infinity))
  ) {
    throw new RangeError("Excitons that never end pile up over the pulses: give a lifetime or no period.");
  }
  const frame = whitened(problem);
  const flow = flowFor(problem, frame, steps);
  // rates of change do not depend on the unit: a peak of 1 after a pulse
  const start: Start = { amount: 2 * Math.PI * whitened(narrow).area, covariance: narrow.start };
  const list = exposures(problem, changeRate(narrow, start));
  const weights = frameWeights(flow.timeline, list, problem.delays.length, period);
  if (problem.kind === "trace") return stripLight(problem, frame, flow, weights, steps);
  return frame.round
    ? roundLight(problem, frame, flow, weights, steps)
    : planarLight(problem, frame, flow, weights, steps);
}

export function flowFor(problem: SimilarProblem, frame: Whitened, resolution: Resolution): Flow {
  if (problem.repulsion !== 0 && !(frame.diffusion[1] > 0 && problem.repulsion > -1)) {
    throw new RangeError("Repulsion needs a diffusion coefficient above zero.");
  }
  const timeline = new Timeline(ratesOf(problem, frame.diffusion), endOf(problem), resolution.panels);
  if (!(Math.min(...timeline.scales(timeline.end)) > 1 / 3)) {
    throw new RangeError(
      "The diffusion coefficient is so negative that the spot shrinks to less than a third.",
    );
  }
  const shape = shapeOf(frame.round, resolution.modes);
  return problem.period === null
    ? flowOf(shape, timeline, null, problem.foot)
    : steadyFlow(shape, timeline, problem.period, problem.foot);
}

function ratesOf(problem: SimilarProblem, diffusion: readonly [number, number]) {
  return {
    diffusion,
    repulsion: problem.repulsion,
    removal: 1 / problem.lifetime + problem.capture,
    annihilation: problem.annihilation,
    capture: problem.capture,
    trapRate: 1 / problem.trapLifetime,
  };
}

function endOf({ delays, gate, period, lifetime, capture, responseSigma }: SimilarProblem): number {
  const last = Math.max(0, ...delays) + gate + RESPONSE_REACH * responseSigma;
  return period === null ? last : Math.max(Math.min(last, period), memory(1 / lifetime + capture));
}

/**
 * Where even the widest light of weight has fallen below 2e-10 of the peak. What is left of earlier pulses is wide but
 * weak: at the age t its e^(−γ(t − last)), γ the slowest rate of decay, is taken off.
 */
function reachOf({ timeline }: Flow, { blur }: Optics, { delays, gate }: SimilarProblem): [number, number] {
  const { removal, capture, trapRate } = timeline.rates;
  const rate = capture > 0 ? Math.min(removal, trapRate) : removal;
  const last = Math.max(0, ...delays) + gate;
  const square = (axis: 0 | 1) =>
    timeline.times.map((t) => {
      const exponent = Math.max(REACH ** 2 - 2 * rate * Math.max(t - last, 0), 0);
      return exponent * (timeline.scales(t)[axis] + blur[axis === 0 ? 0 : 2]);
    });
  return [Math.sqrt(Math.max(...square(0))), Math.sqrt(Math.max(...square(1)))];
}

/** Cuts a reach to what will be asked for: an axis' unit is 1/`scale` µm long, and interpolation looks a little further. */
function within(problem: SimilarProblem, reach: number, scale: number): number {
  return problem.reach === undefined ? reach : Math.min(reach, 1.1 * scale * problem.reach + 1);
}

/** Amounts and shares from each state's own amount; a frame's profile is made when it is first asked for. */
function collected(
  problem: SimilarProblem,
  amounts: Float64Array,
  weights: readonly FrameWeights[],
  fill: (weights: Float64Array, frame: number) => SimilarLight["fill"],
): SimilarLight {
  const light = weights.map((each) => lightWeights(each, problem.trapLight));
  const fills: SimilarLight["fill"][] = [];
  return {
    amount: (i) => dot(light[i]!, amounts),
    caughtShare(i) {
      const { caught } = weights[i]!;
      const all = dot(light[i]!, amounts);
      return caught === null || all === 0 ? 0 : (problem.trapLight * dot(caught, amounts)) / all;
    },
    fill(i, grid, out) {
      fills[i] ??= fill(light[i]!, i);
      fills[i](i, grid, out);
    },
  };
}

function roundLight(
  problem: SimilarProblem,
  frame: Whitened,
  flow: Flow,
  weights: readonly FrameWeights[],
  { radialStep }: Resolution,
): SimilarLight {
  const optics = opticsOf(problem, frame);
  const width = Math.sqrt(frame.area);
  const reach = within(problem, reachOf(flow, optics, problem)[0], 1 / width);
  const { radius, values } = roundScreen(flow, optics, reach, radialStep);
  const light = collected(problem, shares(flow), weights, (each) => {
    const profile = profileOf(values, each, 1 / (2 * Math.PI * frame.area));
    return (_, grid, out) => fillRound(profile, radius, width, grid, out);
  });
  return {
    ...light,
    // the radius is a line of points from the centre
    radial: (i, step, count, out) =>
      light.fill(i, { x0: 0, y0: 0, pixel: step, width: count, height: 1 }, out),
  };
}

function planarLight(
  problem: SimilarProblem,
  frame: Whitened,
  flow: Flow,
  weights: readonly FrameWeights[],
  { planarStep }: Resolution,
): SimilarLight {
  const optics = opticsOf(problem, frame);
  const [along, across] = reachOf(flow, optics, problem);
  const [x1, y1, x2, y2] = frame.map;
  const reach = [
    within(problem, along, Math.hypot(x1, y1)),
    within(problem, across, Math.hypot(x2, y2)),
  ] as const;
  const { axes, values, quarters } = planarScreen(flow, optics, reach, planarStep);
  return collected(problem, shares(flow), weights, (light) => {
    const profile = profileOf(values, light, 1);
    if (!(profile[0]! > 0)) return (_, grid, out) => void out.fill(0, 0, grid.width * grid.height);
    const tables = logQuarters(profile, axes[0].count, axes[1].count, quarters);
    const scale = 1 / (2 * Math.PI * frame.area);
    return (_, grid, out) => fillPlanar(tables, axes, frame, scale, grid, out);
  });
}

function stripLight(
  problem: SimilarProblem,
  frame: Whitened,
  flow: Flow,
  weights: readonly FrameWeights[],
  { radialStep }: Resolution,
): SimilarLight {
  const optics = opticsOf(problem, frame);
  const width = Math.sqrt(frame.area);
  const strip = { slit: (problem.slit ?? Infinity) / width, pixel: problem.pixel / width };
  const { radius, values } = stripScreen(flow, optics, reachOf(flow, optics, problem)[0], radialStep, strip);
  // trapezoids over the whole line; the integrand is even and dies out
  const measure = Float64Array.from(
    { length: radius.count },
    (_, p) => ((p === 0 ? 1 : 2) * radius.step * radius.slope(p)) / (2 * Math.PI),
  );
  const amounts = Float64Array.from(values, (each) => dot(each, measure));
  return collected(problem, amounts, weights, (light) => {
    const profile = profileOf(values, light, 1 / (2 * Math.PI * width));
    return (_, grid, out) => fillStrip(profile, radius, width, grid, out);
  });
}

/** Share of the pulse's excitons that annihilation has left, at each time. */
export function shares(flow: Flow): Float64Array {
  return Float64Array.from(flow.coefficients, (a) => a[0]!);
}

function profileOf(values: readonly Float64Array[], light: Float64Array, scale: number): Float64Array {
  const out = new Float64Array(values[0]!.length);
  combine(
    values,
    light.map((w) => w * scale),
    out,
  );
  return out;
}
