import type { CandidateFit } from "../field/stack-fit/candidates.ts";
import { type Name, UNITS } from "../field/stack-fit/parameters.ts";
import type { Acquisition, Measured } from "../stack/acquisition.ts";
import type { Ranged } from "./field-intervals.ts";
import { birgeOf, type FieldQuantities } from "./field-quantities.ts";
import { CM2_PER_S } from "./quantities.ts";
import type { Result } from "./result.ts";
import { thermalEnergy } from "./thermal-energy.ts";
import type { WholeStack } from "./whole-stack.ts";

const MICRO_PER_MILLI = 1e3;
/** Correlations from here on are shown: the two parameters can hardly be told apart. */
const STRONG = 0.8;

/** The result's `field` block. */
export function fieldBlock(
  { fits }: WholeStack,
  field: FieldQuantities,
  acquisition: Acquisition,
  adopted: boolean,
): Result["field"] {
  const { preferred } = fits;
  const { goodness } = preferred;
  const length = Math.sqrt(Math.max(field.length2.value, 0));
  const determined = preferred.converged;
  const ranged = (
    name: Ranged,
    { value, u }: { value: number; u: number | null },
    factor = 1,
  ): RangedValue => {
    const { ends, profiled } = field.ranges.get(name) ?? { ends: [null, null], profiled: false };
    return {
      value: factor * value,
      u: determined && u !== null ? factor * u : null,
      interval95: [scaled(ends[0], factor), scaled(ends[1], factor)],
      interval_from: profiled ? "profile" : "covariance",
    };
  };
  const free = (name: Name & Ranged): RangedValue | null => {
    const i = preferred.names.indexOf(name);
    if (i < 0) return null;
    return ranged(name, { value: preferred.parameters[i]!, u: uncertaintyOf(preferred, i) });
  };
  const rate = free("k_n0");
  const { density, temperature } = acquisition.sample;
  const repulsion = free("repulsion");
  const shift =
    repulsion === null || temperature === null ? null : scaledBy(repulsion, thermalEnergy(temperature));
  return {
    preferred: preferred.candidate.name,
    adopted,
    D: ranged("D", field.diffusion, CM2_PER_S),
    tau: ranged("tau", field.lifetime),
    diffusion_length: {
      value: length,
      u: determined ? (length > 0 ? field.length2.u / (2 * length) : Math.sqrt(field.length2.u)) : null,
    },
    repulsion,
    u0_n0: shift,
    u0: shift === null || density === null ? null : perDensity(shift, density, MICRO_PER_MILLI),
    k_n0: rate,
    k: rate === null || density === null ? null : perDensity(rate, density, CM2_PER_S),
    capture: free("capture"),
    trap_lifetime: free("trap_lifetime"),
    chi2: goodness.chi2,
    degrees_of_freedom: goodness.degreesOfFreedom,
    p_value: goodness.pValue,
    correlations: correlationsOf(preferred),
    candidates: fits.fits.map((fit) => ({
      name: fit.candidate.name,
      parameters: Object.fromEntries(
        fit.names.map((name, i) => [
          name,
          { value: fit.parameters[i]!, u: uncertaintyOf(fit, i), unit: UNITS[name] },
        ]),
      ),
      p_value: fit.goodness.pValue,
      aicc: fit.aicc,
      weight: fit.weight,
      converged: fit.converged,
      reason: fit.reason,
    })),
  };
}

type RangedValue = NonNullable<Result["field"]>["D"];

function scaled(value: number | null, factor: number): number | null {
  return value === null ? null : factor * value;
}

type FittedValue = NonNullable<NonNullable<Result["field"]>["k"]>;

/** k = k·n₀/n₀ or u₀ = u₀n₀/n₀, n₀ in excitons per µm², times a factor for the unit. */
function perDensity(whole: FittedValue, density: Measured, factor: number): FittedValue {
  return scaledBy(whole, { value: factor / density.value, u: (factor * density.u) / density.value ** 2 });
}

function scaledBy({ value, u }: FittedValue, factor: Measured): FittedValue {
  return {
    value: factor.value * value,
    u: u === null ? null : Math.hypot(factor.value * u, factor.u * value),
  };
}

/** With the fit's own Birge factor; null where the data do not determine the fit's parameters. */
function uncertaintyOf(fit: CandidateFit, i: number): number | null {
  const variance = fit.covariance[i * fit.names.length + i]!;
  if (!fit.converged || fit.held.includes(fit.names[i]!) || !(variance >= 0 && Number.isFinite(variance)))
    return null;
  return birgeOf(fit) * Math.sqrt(variance);
}

function correlationsOf({
  names,
  covariance,
  converged,
}: CandidateFit): NonNullable<Result["field"]>["correlations"] {
  if (!converged) return [];
  const n = names.length;
  return names.flatMap((a, i) =>
    names.slice(0, i).flatMap((b, j) => {
      const r = covariance[i * n + j]! / Math.sqrt(covariance[i * n + i]! * covariance[j * n + j]!);
      return Math.abs(r) > STRONG ? [{ a: b, b: a, r }] : [];
    }),
  );
}
