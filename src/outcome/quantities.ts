import { boltzmann, elementaryCharge } from "../numerics/constants.ts";
import type { Input } from "../numerics/propagate.ts";
import { propagate, propagateByMonteCarlo } from "../numerics/propagate.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { Range } from "./field-intervals.ts";
import type { FieldQuantities } from "./field-quantities.ts";
import type { Derived, Joint } from "./joint.ts";
import { diffusionOf, quadratic } from "./joint.ts";
import { squaredLength } from "./length.ts";
import type { Reading } from "./reading.ts";
import type { Quantity, Result } from "./result.ts";

/** 1 µm²/ns in cm²/s. */
export const CM2_PER_S = 10;

/** D below this many standard uncertainties is no motion that could be told from none. */
const DETECTABLE = 2;
/** One-sided 95 % of the normal distribution. */
const ONE_SIDED = 1.6448536269514722;
const TWO_SIDED = 1.959963984540054;

export interface Quantities {
  readonly quantities: Result["quantities"];
  readonly lengths: Result["lengths"];
  readonly budget: Result["budget"];
  /** Whether the spot is seen to spread (or, with a negative D, to shrink). */
  readonly moved: boolean;
}

/** The three things counted, with what they share. */
interface Counted {
  /** cm²/s, of the density. */
  readonly diffusion: Input;
  /** ns */
  readonly lifetime: Input | null;
  /** µm²: L² by its definition. */
  readonly length2: Input | null;
  /** Between diffusion and ∫survival dt where L² is their product (a line), else null. */
  readonly product: { readonly meanLifetime: Input; readonly correlation: number } | null;
}

/**
 * D, τ, L and μ with their uncertainties: counting statistics (type A) from the joint fit, the pixel size, time base
 * and temperature (type B), combined as in JCGM 100:2008, section 5, with a budget; the intervals of L by Monte Carlo
 * (JCGM 101:2008) because a square root is far from linear where D is uncertain.
 */
export function quantitiesOf(reading: Reading, joint: Joint, seed: number): Quantities {
  const { acquisition } = reading.stack;
  const counted = count(reading, joint, acquisition);
  return finish(counted, acquisition, reading.preferredLaw, "decay", seed);
}

/** The same from the whole-stack fit. */
export function quantitiesOfField(
  field: FieldQuantities,
  acquisition: Acquisition,
  seed: number,
): Quantities {
  const diffusion = { value: CM2_PER_S * field.diffusion.value, u: CM2_PER_S * field.diffusion.u };
  const counted = { diffusion, lifetime: field.lifetime, length2: field.length2, product: null };
  const found = finish(counted, acquisition, "field", "field", seed);
  const { diffusion_coefficient: d, lifetime } = found.quantities;
  return {
    ...found,
    quantities: {
      ...found.quantities,
      diffusion_coefficient: lopsided(d, field.ranges.get("D"), CM2_PER_S),
      lifetime: lifetime === null ? null : lopsided(lifetime, field.ranges.get("tau"), 1),
    },
  };
}

/** A profile's interval with the systematic part added to both its sides in quadrature. */
function lopsided(quantity: Quantity, range: Range | undefined, unit: number): Quantity {
  const [low, high] = range?.ends ?? [null, null];
  if (range?.profiled !== true || low === null || high === null) return quantity;
  const { value, u_systematic } = quantity;
  const side = (end: number): number => Math.hypot(unit * end - value, TWO_SIDED * u_systematic);
  return { ...quantity, interval95: [value - side(low), value + side(high)] };
}

function finish(
  counted: Counted,
  acquisition: Acquisition,
  lawSource: Quantity["from"],
  lifeSource: Quantity["from"],
  seed: number,
): Quantities {
  const scales = scalesOf(acquisition);
  const moved = Math.abs(counted.diffusion.value) >= DETECTABLE * counted.diffusion.u;
  const budget: Result["budget"] = [];

  const diffusion = combine(
    "diffusion_coefficient",
    ["D from counting", "pixel size", "time base"],
    (x) => (x[0]! * x[1]! ** 2) / x[2]!,
    [counted.diffusion, scales.pixel, scales.time],
    "cm^2/s",
    budget,
  );
  const lifetime =
    counted.lifetime === null
      ? null
      : combine(null, [], (x) => x[0]! * x[1]!, [counted.lifetime, scales.time], "ns", budget);
  const mobility = mobilityOf(counted, scales, acquisition, budget);
  const length = lengthOf(counted, scales, moved, seed, budget);
  return {
    moved,
    budget,
    lengths: lengthsOf(counted, length, moved, lawSource === "line"),
    quantities: {
      diffusion_coefficient: { ...diffusion, from: lawSource },
      lifetime: lifetime === null ? null : { ...lifetime, from: lifeSource },
      diffusion_length:
        length === null ? null : { ...length, from: lifeSource === "field" ? "field" : "outcome" },
      mobility: mobility === null ? null : { ...mobility, from: "outcome" },
    },
  };
}

function count(reading: Reading, joint: Joint, acquisition: Acquisition): Counted {
  // light ∝ n²: the spot's variance is half the density's
  const order = acquisition.sample.emissionOrder;
  const d: Derived = diffusionOf(reading, joint);
  const diffusion = {
    value: CM2_PER_S * order * d.value,
    u: CM2_PER_S * order * Math.sqrt(Math.max(quadratic(d.gradient, joint.thetaCovariance), 0)),
  };
  const { decay } = joint;
  if (decay === null) return { diffusion, lifetime: null, length2: null, product: null };
  const spreadOf = (gradient: ArrayLike<number>): number =>
    Math.sqrt(Math.max(quadratic(gradient, joint.decayCovariance), 0));
  const mean = decay.amplitudeAveraged;
  // where rival laws describe the light as well, their disagreement about the mean lifetime is part of its uncertainty
  const between = reading.decays?.lawSpread ?? 0;
  const meanLifetime = { value: mean.value, u: Math.hypot(spreadOf(mean.gradient), between) };
  const isMean = decay.law === "two_exponentials" || decay.law === "stretched";
  const lifetime = isMean
    ? meanLifetime
    : { value: decay.lifetime.value, u: spreadOf(decay.lifetime.gradient) };
  const n = d.gradient.length;
  let covariance = 0;
  for (let j = 0; j < mean.gradient.length; j++) {
    for (let k = 0; k < n; k++) covariance += mean.gradient[j]! * joint.cross[j * n + k]! * d.gradient[k]!;
  }
  if (reading.preferredLaw === "line") {
    const product = order * d.value * mean.value;
    const uD = diffusion.u / CM2_PER_S;
    const correlation = clampCorrelation((order * covariance) / (uD * meanLifetime.u));
    const u = propagate(
      (x) => x[0]! * x[1]!,
      [{ value: order * d.value, u: uD }, meanLifetime],
      [1, correlation, correlation, 1],
    ).u;
    return { diffusion, lifetime, length2: { value: product, u }, product: { meanLifetime, correlation } };
  }
  return {
    diffusion,
    lifetime,
    length2: squaredLength(reading, joint, decay, order, meanLifetime),
    product: null,
  };
}

function clampCorrelation(r: number): number {
  return Number.isFinite(r) ? Math.min(Math.max(r, -1), 1) : 0;
}

interface Scales {
  readonly pixel: Input;
  readonly time: Input;
}

/** Calibrations as factors of one with their relative uncertainty. */
function scalesOf({ space, time }: Acquisition): Scales {
  return { pixel: { value: 1, u: space.pixel.u / space.pixel.value }, time: { value: 1, u: time.relativeU } };
}

type Unfinished = Omit<Quantity, "from">;

/** One quantity by the law of propagation; its first input is the counted one (type A), the others are type B. */
function combine(
  quantity: Result["budget"][number]["quantity"] | null,
  names: readonly string[],
  f: (x: readonly number[]) => number,
  inputs: readonly Input[],
  unit: string,
  budget: Result["budget"],
  units: readonly string[] = ["cm^2/s", "", ""],
): Unfinished {
  const { value, u, rows } = propagate(f, inputs);
  const statistical = rows[0]!.contribution;
  const systematic = Math.hypot(...rows.slice(1).map((row) => row.contribution));
  if (quantity !== null) {
    for (const [i, row] of rows.entries()) {
      budget.push({
        quantity,
        input: names[i]!,
        type: i === 0 ? "A" : "B",
        u: inputs[i]!.u,
        unit: units[i]!,
        sensitivity: row.sensitivity,
        contribution: row.contribution,
      });
    }
  }
  return {
    value,
    u,
    u_statistical: statistical,
    u_systematic: systematic,
    interval95: [value - TWO_SIDED * u, value + TWO_SIDED * u],
    unit,
  };
}

/** μ = eD/(k_B T), the Einstein relation; e/k_B exact since the SI of 2019. cm²/(V s). */
function mobilityOf(counted: Counted, scales: Scales, acquisition: Acquisition, budget: Result["budget"]) {
  const { temperature } = acquisition.sample;
  if (temperature === null) return null;
  return combine(
    "mobility",
    ["D from counting", "pixel size", "time base", "temperature"],
    (x) => ((elementaryCharge / boltzmann) * (x[0]! * x[1]! ** 2)) / (x[2]! * x[3]!),
    [counted.diffusion, scales.pixel, scales.time, temperature],
    "cm^2/(V s)",
    budget,
    ["cm^2/s", "", "", "K"],
  );
}

/**
 * L = √(L²), L² = ½⟨x²⟩ at recombination. The time base cancels: D goes with its inverse, τ with itself. Where nothing
 * moved, an upper limit from the one-sided 95 % limit of L², never below zero.
 */
function lengthOf(
  counted: Counted,
  scales: Scales,
  moved: boolean,
  seed: number,
  budget: Result["budget"],
): Quantity | null {
  const { length2, product } = counted;
  if (length2 === null) return null;
  const pixelU = scales.pixel.u;
  if (!moved || length2.value <= 0) {
    const limit = Math.sqrt(Math.max(length2.value, 0) + ONE_SIDED * length2.u) * (1 + ONE_SIDED * pixelU);
    return {
      value: limit,
      u: limit / ONE_SIDED,
      u_statistical: limit / ONE_SIDED,
      u_systematic: limit * pixelU,
      interval95: [0, limit],
      unit: "um",
      from: "outcome",
      upper_limit: true,
    };
  }
  const value = Math.sqrt(length2.value);
  const statistical = length2.u / (2 * value);
  const systematic = value * pixelU;
  const draws =
    product === null ? drawLength2(length2, scales, seed) : drawProduct(counted, product, scales, seed);
  for (const row of lengthRows(counted, scales, value)) budget.push(row);
  return {
    value,
    u: Math.hypot(statistical, systematic),
    u_statistical: statistical,
    u_systematic: systematic,
    interval95: [draws.interval95[0], draws.interval95[1]],
    unit: "um",
    from: "outcome",
  };
}

const DRAWS = 20_000;
const root = (square: number): number => Math.sqrt(Math.max(square, 0));

function drawLength2(length2: Input, scales: Scales, seed: number) {
  return propagateByMonteCarlo((x) => root(x[0]!) * x[1]!, [length2, scales.pixel], { draws: DRAWS, seed });
}

function drawProduct(
  counted: Counted,
  product: NonNullable<Counted["product"]>,
  scales: Scales,
  seed: number,
) {
  const diffusion = { value: counted.diffusion.value / CM2_PER_S, u: counted.diffusion.u / CM2_PER_S };
  const r = product.correlation;
  return propagateByMonteCarlo(
    (x) => root(x[0]! * x[1]!) * x[2]!,
    [diffusion, product.meanLifetime, scales.pixel],
    {
      correlation: [1, r, 0, r, 1, 0, 0, 0, 1],
      draws: DRAWS,
      seed,
    },
  );
}

function lengthRows(
  { diffusion, length2, product }: Counted,
  scales: Scales,
  length: number,
): Result["budget"] {
  const quantity = "diffusion_length" as const;
  const pixel = {
    quantity,
    input: "pixel size",
    type: "B" as const,
    u: scales.pixel.u,
    unit: "",
    sensitivity: length,
    contribution: length * scales.pixel.u,
  };
  if (product === null) {
    const slope = 1 / (2 * length);
    return [
      {
        quantity,
        input: "L² from counting",
        type: "A",
        u: length2!.u,
        unit: "um^2",
        sensitivity: slope,
        contribution: slope * length2!.u,
      },
      pixel,
    ];
  }
  const byD = length / (2 * diffusion.value);
  const byTau = length / (2 * product.meanLifetime.value);
  return [
    {
      quantity,
      input: "D from counting",
      type: "A",
      u: diffusion.u,
      unit: "cm^2/s",
      sensitivity: byD,
      contribution: Math.abs(byD) * diffusion.u,
    },
    {
      quantity,
      input: "lifetime from counting",
      type: "A",
      u: product.meanLifetime.u,
      unit: "ns",
      sensitivity: byTau,
      contribution: Math.abs(byTau) * product.meanLifetime.u,
    },
    pixel,
  ];
}

/**
 * L by its definition and, beside a straight line, what papers quote under the same letter; without motion none. Where
 * D depends on delay √(Dτ) of its early value has no meaning.
 */
function lengthsOf(
  counted: Counted,
  length: Quantity | null,
  moved: boolean,
  isLine: boolean,
): Result["lengths"] {
  if (length === null || counted.lifetime === null || !moved || counted.diffusion.value <= 0) return [];
  const product = (counted.diffusion.value / CM2_PER_S) * counted.lifetime.value;
  const relative = length.u / length.value;
  const of = (formula: string, factor: number) => {
    const value = Math.sqrt(factor * product);
    return { formula, value_um: value, u_um: value * relative };
  };
  const own = { formula: "L = √(½⟨x²⟩ at recombination)", value_um: length.value, u_um: length.u };
  return isLine ? [own, of("√(Dτ)", 1), of("√(2Dτ)", 2), of("√(4Dτ)", 4)] : [own];
}
