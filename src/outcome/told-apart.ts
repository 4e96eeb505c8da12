import type { CandidateFit } from "../field/stack-fit/candidates.ts";
import type { Range, Ranged } from "./field-intervals.ts";
import { type Reason, reason } from "./verdict-reason.ts";

/** From here on two parameters trade against each other almost freely: r² is the share of one that the other explains. */
const ALIKE = 0.95;

/** Parameters that are quoted, by what they are called in a sentence; light, place and start are not. */
const WORDS: Readonly<Record<string, string>> = {
  D: "D",
  D_xx: "D_xx",
  D_xy: "D_xy",
  D_yy: "D_yy",
  tau: "τ",
  repulsion: "the repulsion",
  k_n0: "k·n₀",
  capture: "the rate of capture",
  trap_lifetime: "the lifetime in traps",
};

/** What the preferred whole-stack fit leaves open: pairs with |r| > 0.95, and ends of intervals that the data do not set. */
export function notToldApart(
  { names, covariance, converged }: CandidateFit,
  ranges: ReadonlyMap<Ranged, Range>,
): Reason[] {
  if (!converged) return [];
  const n = names.length;
  const quoted = names.flatMap((name, i) => (name in WORDS ? [{ word: WORDS[name]!, i }] : []));
  const alike = quoted.flatMap((a, k) =>
    quoted.slice(0, k).flatMap((b) => {
      const r =
        covariance[a.i * n + b.i]! / Math.sqrt(covariance[a.i * n + a.i]! * covariance[b.i * n + b.i]!);
      return Math.abs(r) > ALIKE ? [`${b.word} and ${a.word} (r = ${r.toFixed(2).replace("-", "−")})`] : [];
    }),
  );
  const open = [...ranges].flatMap(
    ([
      name,
      {
        ends: [low, high],
      },
    ]) => {
      const sides = [...(low === null ? ["below"] : []), ...(high === null ? ["above"] : [])];
      return sides.length === 0 ? [] : [`${WORDS[name]} is not determined from ${sides.join(" or ")}`];
    },
  );
  const found = [...(alike.length === 0 ? [] : [`cannot tell apart ${alike.join(", ")}`])];
  if (found.length + open.length === 0) return [];
  return [
    reason(
      "note",
      "parameters-not-told-apart",
      `the whole-stack fit ${[...found, ...open.map((text) => `finds that ${text}`)].join("; it ")}`,
      "quote such parameters together or as limits; a longer recording, more light or another pulse energy would part them",
    ),
  ];
}
