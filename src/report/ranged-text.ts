import { birgeFactor } from "../numerics/model-choice.ts";
import type { Result } from "../outcome/result.ts";
import { concise, plain } from "./notation.ts";

type Field = NonNullable<Result["field"]>;
type Ranged = Field["D"];

/** Digits of a number whose uncertainty is not known, and of the ends of a lopsided interval. */
const DIGITS = 3;

/**
 * "0.80(2) /ns"; with the interval where u says too little, "0.020(3) /ns (95 %: 0.014 to 0.027 /ns)"; where the data set
 * one end only, "at least 12 /ns (95 %, not determined from above)".
 */
export function rangedText(
  { value, u, interval95: [low, high], interval_from }: Ranged,
  unit: string,
): string {
  const of = unit === "" ? "" : ` ${unit}`;
  const short = (x: number): string => plain(Number(x.toPrecision(DIGITS)));
  if (u === null && low === null && high === null) return `${short(value)}${of} (not determined)`;
  if (low === null && high === null) return `${short(value)}${of} (not determined from below or above)`;
  if (low === null) return `at most ${short(high!)}${of} (95 %, not determined from below)`;
  if (high === null) return `at least ${short(low)}${of} (95 %, not determined from above)`;
  const text = `${u === null ? short(value) : concise(value, u)}${of}`;
  return interval_from === "profile" ? `${text} (95 %: ${short(low)} to ${short(high)}${of})` : text;
}

const WORDS = {
  D: "D",
  tau: "τ",
  repulsion: "β",
  k_n0: "k·n₀",
  capture: "the rate of capture",
  trap_lifetime: "the lifetime in traps",
} as const;

/** How the whole-stack fit's uncertainties were found, as a sentence or two; none where it has none. */
export function fieldUncertaintyText(field: Field): string {
  if (field.D.u === null) return "The fit has no uncertainties: the data do not determine it. ";
  const birge = birgeFactor(field.chi2, field.degrees_of_freedom);
  const widened =
    birge > 1
      ? `, widened by √(χ²/dof) = ${birge.toFixed(2)} (Birge), as each candidate's by its own where that is significantly above 1`
      : "";
  const names = Object.keys(WORDS) as (keyof typeof WORDS)[];
  const profiled = names.filter((name) => field[name]?.interval_from === "profile");
  const profiles =
    profiled.length === 0
      ? ""
      : `The 95 % interval of ${profiled.map((name) => WORDS[name]).join(", ")} is where −2 ln L, refitted over all other parameters, rises by no more than 3.84${birge > 1 ? " times the square of that factor" : ""} (profile likelihood), because it is far from a parabola there. `;
  return `Uncertainties are those of the inverse Fisher matrix${widened}. ${profiles}`;
}

/** What the fit starts from, where that is no Gaussian. */
export function startText({ candidates, preferred }: Field): string {
  const { foot_share: share, foot_ratio: ratio } =
    candidates.find(({ name }) => name === preferred)?.parameters ?? {};
  if (share === undefined || ratio === undefined) return "";
  const text = ({ value, u }: typeof share): string =>
    u === null ? plain(value, DIGITS) : concise(value, u);
  return `The first frames are visibly not Gaussian: the starting density is the sum of two Gaussians of one centre, the wider one with ${text(ratio)} times the variance and ${text(share)} of the excitons${share.value > 1 ? ", the narrower one taken off it" : ""}. `;
}
