import type { Scenario } from "../field/scenario.ts";
import { expectation } from "../field/synthesise.ts";
import { InputFault } from "../stack/fault.ts";
import { type Expected, widthsPrecision } from "./precision.ts";
import { CM2_PER_S } from "./quantities.ts";
import { type StackPrecision, stackPrecision } from "./stack-precision.ts";

/** How precise a planned recording will be, and what would halve the error of D. */
export interface Forecast {
  readonly schema: "gleamwalk.forecast/1";
  /** How messages call the plan. */
  readonly plan: string;
  /** Which analysis the numbers hold for. */
  readonly road: "widths" | "whole_stack";
  readonly kind: "map" | "trace";
  /** Photons in the first frame after the pulse. */
  readonly photons: number;
  readonly frames: number;
  readonly first_ns: number;
  readonly last_ns: number;
  /** Standard deviation of the excitation spot, the wider axis, µm. */
  readonly sigma0_um: number;
  readonly quantities: {
    readonly diffusion_coefficient: ForecastQuantity;
    readonly lifetime: ForecastQuantity;
    readonly diffusion_length: ForecastQuantity;
    readonly repulsion: ForecastQuantity | null;
    readonly k_n0: ForecastQuantity | null;
    readonly capture: ForecastQuantity | null;
    readonly trap_lifetime: ForecastQuantity | null;
  };
  /** Relative standard uncertainty that pixel size and time base add to D; more light does not lower it. */
  readonly systematic_relative_u: number;
  /** What alone would halve the counting error of D. */
  readonly halving: Readonly<Record<RemedyName, Remedy>>;
  readonly cautions: readonly string[];
}

/** Value with the standard uncertainty (k = 1) that counting leaves at best. */
export interface ForecastQuantity extends Expected {
  readonly unit: string;
}

export type RemedyName = "light" | "window" | "spot";

export interface Remedy {
  /** Times the light, the delays or σ₀; null where nothing within reach halves the error. */
  readonly factor: number | null;
  /** The best factor within reach and the error of D there over the plan's. */
  readonly best: { readonly factor: number; readonly error_ratio: number };
}

/** Factors tried one after another; between the two around the aim it is halved further. */
const TRIED: Readonly<Record<RemedyName, readonly number[]>> = {
  light: [2, 4, 8, 16, 64, 1024],
  window: [1.25, 1.6, 2, 2.5, 3.2, 4, 6, 8],
  spot: [0.8, 0.65, 0.5, 0.4, 0.3, 0.2, 0.1],
};
/** Relative width at which the search for a factor ends. */
const CLOSE = 1.01;
/** A spot narrower than this many pixels is no longer sampled, and a width means little. */
const NARROWEST_IN_PIXELS = 0.6;
/** Relative error from which the linear rule is only a guide. */
const COARSE = 0.3;

/**
 * What a recording as planned will tell: the Cramér–Rao bounds from its Fisher information. A plain scenario (one
 * lifetime, no repulsion, annihilation, traps, slit, response or earlier pulses) is taken by the widths' road, as `spread` takes
 * it; any other by the whole-stack fit.
 *
 * @throws InputFault where the plan does not determine its quantities
 */
export function forecast(scenario: Scenario): Forecast {
  const road = roadOf(scenario);
  const precision = precisionOf(scenario, road);
  if (precision === null) {
    throw new InputFault(
      `${scenario.file}: too few frames or too little light after the pulse to determine D and the lifetime; plan more of either`,
      { file: scenario.file, where: "recording" },
    );
  }
  const { recording, start, acquisition } = scenario;
  const { diffusion, lifetime, length } = precision;
  const aim = diffusion.u / 2;
  const remedy = (name: RemedyName): Remedy =>
    search(TRIED[name], diffusion.u, aim, (factor) => {
      const changed = CHANGES[name](scenario, factor);
      return changed === null ? null : (quietly(() => precisionOf(changed, road))?.diffusion.u ?? null);
    });
  return {
    schema: "gleamwalk.forecast/1",
    plan: scenario.file,
    road,
    kind: scenario.kind,
    photons: scenario.photons,
    frames: scenario.frames,
    first_ns: recording.delays[0]!,
    last_ns: recording.delays.at(-1)!,
    sigma0_um: Math.sqrt(Math.max(start.covariance[0], scenario.kind === "map" ? start.covariance[2] : 0)),
    quantities: {
      diffusion_coefficient: {
        value: diffusion.value * CM2_PER_S,
        u: diffusion.u * CM2_PER_S,
        unit: "cm^2/s",
      },
      lifetime: { ...lifetime, unit: "ns" },
      diffusion_length: { ...length, unit: "um" },
      repulsion: withUnit(precision.repulsion, "1"),
      k_n0: withUnit(precision.annihilation, "1/ns"),
      capture: withUnit(precision.capture, "1/ns"),
      trap_lifetime: withUnit(precision.trapLifetime, "ns"),
    },
    systematic_relative_u: Math.hypot(
      (2 * acquisition.space.pixel.u) / acquisition.space.pixel.value,
      acquisition.time.relativeU,
    ),
    halving: { light: remedy("light"), window: remedy("window"), spot: remedy("spot") },
    cautions: cautionsFor(scenario, precision),
  };
}

/** Widths where `spread` takes its headline from them, else the whole stack. */
export function roadOf({ medium, recording, kind }: Scenario): Forecast["road"] {
  const { period, responseSigma, pixelY } = recording;
  const slit = kind === "trace" && Number.isFinite(pixelY);
  const plain = medium.annihilation === 0 && medium.capture === 0 && medium.repulsion === 0;
  return plain && !slit && period === null && responseSigma === 0 ? "widths" : "whole_stack";
}

function precisionOf(scenario: Scenario, road: Forecast["road"]): StackPrecision | null {
  if (road === "whole_stack") return stackPrecision(scenario);
  const widths = widthsPrecision(scenario, expectation(scenario));
  return widths === null
    ? null
    : { ...widths, repulsion: null, annihilation: null, capture: null, trapLifetime: null };
}

/** Null where the changed plan is beyond the model. */
function quietly<T>(compute: () => T): T | null {
  try {
    return compute();
  } catch (error) {
    if (error instanceof InputFault || error instanceof RangeError) return null;
    throw error;
  }
}

/** The plan with one thing changed; null where that cannot be. */
const CHANGES: Readonly<Record<RemedyName, (scenario: Scenario, factor: number) => Scenario | null>> = {
  // longer exposure or better collection: the density of excitons stays
  light: (scenario, factor) => ({ ...scenario, photons: scenario.photons * factor }),
  // as many frames, further apart, from the same first one after the pulse
  window: (scenario, factor) => {
    const { recording } = scenario;
    const from = recording.delays.find((delay) => delay >= 0)!;
    const delays = recording.delays.map((delay) => (delay < from ? delay : from + factor * (delay - from)));
    return { ...scenario, recording: { ...recording, delays } };
  },
  // the same number of excitons on less room: k stays, and k n₀ rises as 1/σ₀²
  spot: (scenario, factor) => {
    const { start, recording } = scenario;
    const [xx, xy, yy] = start.covariance;
    if (Math.sqrt(Math.min(xx, yy)) * factor < NARROWEST_IN_PIXELS * recording.pixelX) return null;
    const area = factor ** 2;
    return {
      ...scenario,
      start: { ...start, covariance: [xx * area, xy * area, yy * area] },
      annihilationRate: scenario.annihilationRate / area,
      repulsion: scenario.repulsion / area,
    };
  },
};

/** Walks through the factors until the error is down to the aim, then closes in on the crossing. */
function search(
  factors: readonly number[],
  now: number,
  aim: number,
  errorAt: (factor: number) => number | null,
): Remedy {
  let best = { factor: 1, error_ratio: 1 };
  let before = 1;
  for (const factor of factors) {
    const error = errorAt(factor);
    if (error === null) break;
    if (error / now < best.error_ratio) best = { factor, error_ratio: error / now };
    if (error <= aim) {
      let [missed, reached] = [before, factor];
      while (Math.max(missed / reached, reached / missed) > CLOSE) {
        const middle = Math.sqrt(missed * reached);
        if ((errorAt(middle) ?? Number.POSITIVE_INFINITY) <= aim) reached = middle;
        else missed = middle;
      }
      return { factor: reached, best };
    }
    before = factor;
  }
  return { factor: null, best };
}

function withUnit(expected: Expected | null, unit: string): ForecastQuantity | null {
  return expected === null ? null : { ...expected, unit };
}

function cautionsFor({ medium }: Scenario, { diffusion, lifetime }: StackPrecision): string[] {
  const cautions = [
    "More laser power is not the same as more light: it brings annihilation, damage to the sample and a hazard to eyes. Longer exposure and better collection bring none of these. A smaller spot packs the same excitons more densely, which brings annihilation too. Your site's laser safety rules and its laser safety officer decide what power may be used.",
  ];
  if (diffusion.u > COARSE * Math.abs(diffusion.value) || lifetime.u > COARSE * lifetime.value) {
    cautions.push(
      "So little is known here that the forecast is a guide only: the real error bars will be wider and lopsided.",
    );
  }
  if (medium.capture > 0 && medium.trapLight !== 1) {
    cautions.push("Trapped excitons are taken to shine like free ones, as the whole-stack fit takes them.");
  }
  return cautions;
}
