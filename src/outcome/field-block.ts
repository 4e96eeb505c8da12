import type { CandidateFit } from "../field/stack-fit/candidates.ts";
import { type Name, UNITS } from "../field/stack-fit/parameters.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { FieldQuantities } from "./field-quantities.ts";
import { CM2_PER_S } from "./quantities.ts";
import type { Result } from "./result.ts";
import type { WholeStack } from "./whole-stack.ts";

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
  const scaled = ({ value, u }: { value: number; u: number }, factor: number) => ({
    value: factor * value,
    u: factor * u,
  });
  const length = Math.sqrt(Math.max(field.length2.value, 0));
  const rate = parameterOf(preferred, "k_n0", field.birge);
  const { density } = acquisition.sample;
  return {
    preferred: preferred.candidate.name,
    adopted,
    D: scaled(field.diffusion, CM2_PER_S),
    tau: { ...field.lifetime },
    diffusion_length: {
      value: length,
      u: length > 0 ? field.length2.u / (2 * length) : Math.sqrt(field.length2.u),
    },
    k_n0: rate,
    k:
      rate === null || density === null
        ? null
        : {
            value: (CM2_PER_S * rate.value) / density.value,
            u:
              ((CM2_PER_S * rate.value) / density.value) *
              Math.hypot(rate.u / rate.value, density.u / density.value),
          },
    capture: parameterOf(preferred, "capture", field.birge),
    trap_lifetime: parameterOf(preferred, "trap_lifetime", field.birge),
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

/** Null where the data do not determine the fit's parameters. */
function uncertaintyOf(fit: CandidateFit, i: number): number | null {
  const variance = fit.covariance[i * fit.names.length + i]!;
  return fit.converged && variance >= 0 && Number.isFinite(variance) ? Math.sqrt(variance) : null;
}

function parameterOf(fit: CandidateFit, name: Name, birge: number): { value: number; u: number } | null {
  const i = fit.names.indexOf(name);
  return i < 0 ? null : { value: fit.parameters[i]!, u: birge * (uncertaintyOf(fit, i) ?? 0) };
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
