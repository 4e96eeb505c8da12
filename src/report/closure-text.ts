import type { Result } from "../outcome/result.ts";
import { concise } from "./notation.ts";
import { counted } from "./wording.ts";

type Closure = NonNullable<Result["closure"]>;

/** "98 of 100 stacks drawn from the fitted model, seed 1; 2 could not be analysed" */
export function closureText({ stacks, asked, failed, seed }: Closure): string {
  const many = stacks === asked ? counted(stacks, "stack") : `${stacks} of ${counted(asked, "stack")}`;
  const lost = failed === 0 ? "" : `; ${failed} could not be analysed`;
  return `${many} drawn from the fitted model, seed ${seed}${lost}`;
}

const SYMBOLS = { diffusion_coefficient: "D", lifetime: "τ", diffusion_length: "L" } as const;

/** Counting errors from which a coverage is called wrong: chance does that once in 400. */
const SURE = 3;

/** What the coverages say of the error bars, as a sentence. */
export function closureFinding({ quantities }: Closure): string {
  const names = Object.keys(SYMBOLS) as (keyof typeof SYMBOLS)[];
  const off = names.flatMap((name) => {
    const found = quantities[name];
    if (found === null || Math.abs(found.coverage - 0.95) <= SURE * found.u_coverage) return [];
    const size = found.coverage < 0.95 ? "too small" : "too large";
    return [`the one of ${SYMBOLS[name]} is ${size}, it holds in ${(100 * found.coverage).toFixed(0)} %`];
  });
  return off.length === 0
    ? "The 95 % intervals hold as often as they should, within counting error."
    : `Not every 95 % interval is right for this recording: ${off.join("; ")}.`;
}

/** The heading and one line a quantity. */
export function closureTexts(closure: Closure): string[] {
  const lines = (Object.keys(SYMBOLS) as (keyof typeof SYMBOLS)[]).flatMap((name) => {
    const found = closure.quantities[name];
    if (found === null) return [];
    const { mean_pull, u_mean_pull, coverage, u_coverage, upper_limits } = found;
    const bias =
      mean_pull === null || u_mean_pull === null ? "" : `bias ${concise(mean_pull, u_mean_pull)} u, `;
    const limits = upper_limits === 0 ? "" : ` (${upper_limits} upper limits)`;
    return `${SYMBOLS[name]}: ${bias}95 % interval holds in ${(100 * coverage).toFixed(0)} ± ${(100 * u_coverage).toFixed(0)} %${limits}`;
  });
  return [closureText(closure), ...lines];
}
