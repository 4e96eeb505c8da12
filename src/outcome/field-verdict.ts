import type { CandidateFit } from "../field/stack-fit/candidates.ts";
import type { Name } from "../field/stack-fit/parameters.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { FieldQuantities } from "./field-quantities.ts";
import { birgeOf, describes } from "./field-quantities.ts";
import type { Quantities } from "./quantities.ts";
import { CM2_PER_S } from "./quantities.ts";
import type { Result } from "./result.ts";
import { thermalEnergy } from "./thermal-energy.ts";
import { notToldApart } from "./told-apart.ts";
import { levelOf, plusMinus, type Reason, reason } from "./verdict-reason.ts";
import type { WholeStack } from "./whole-stack.ts";

/** Reasons that say that widths and decay mislead, and that a model of the whole stack may do better. */
const MISLEADING = [
  "line-does-not-fit",
  "annihilation-suspected",
  "traps-suspected",
  "repulsion-suspected",
  "spot-not-gaussian",
  "spot-shrinks",
];
/** Reasons that speak of the same and are answered where a whole-stack model fits. */
const ANSWERED = [...MISLEADING, "residuals-run", "decay-does-not-fit", "decay-not-exponential"];

/** Whether the widths' answer is in doubt for a reason that a whole-stack model could explain. */
export function isMisled(verdict: Result["verdict"]): boolean {
  return verdict.reasons.some(
    ({ code, level }) => level !== "note" && (MISLEADING.includes(code) || code === "earlier-pulses-glow"),
  );
}

/**
 * Whether the headline quantities come from the whole-stack fit: widths misled, and a model describes the stack that says
 * why. Plain diffusion is no reason, unless it is the earlier pulses that it sums. Repulsion that the fit needs misleads
 * the widths even where they show no sign of it: they spread on a line that is only slightly bent.
 */
export function isAdopted(verdict: Result["verdict"], whole: WholeStack): boolean {
  const { preferred } = whole.fits;
  const explains =
    preferred.candidate.name !== "diffusion" || whole.data.period !== null || hasFoot(preferred);
  return (isMisled(verdict) || preferred.candidate.repulsion) && explains && describes(preferred);
}

/** The verdict with what the whole-stack fit found. */
export function judgeField(
  plain: Result["verdict"],
  whole: WholeStack,
  field: FieldQuantities,
  widths: Quantities,
): Result["verdict"] {
  const { preferred } = whole.fits;
  const open = notToldApart(preferred, field.ranges);
  const line = widths.quantities.diffusion_coefficient;
  const d = { value: CM2_PER_S * field.diffusion.value, u: CM2_PER_S * field.diffusion.u };
  if (isAdopted(plain, whole)) {
    const kept = plain.reasons
      .filter(({ code }) => !ANSWERED.includes(code))
      .map((each): Reason => (each.code === "earlier-pulses-glow" ? { ...each, level: "note" } : each));
    return levelOf([wouldMislead(preferred, line, d), ...confirmed(preferred), ...kept, ...open]);
  }
  if (!describes(preferred)) {
    return levelOf([
      reason(
        isMisled(plain) ? "unsound" : "caution",
        "no-model-fits",
        `no candidate for the whole stack (${tried(whole)}) describes the recording either`,
        "look at the residual maps frame by frame: another species, a moving focus, or a sample that is not uniform",
      ),
      ...plain.reasons,
    ]);
  }
  const apart = Math.abs(d.value - line.value) / Math.hypot(d.u, line.u_statistical);
  if (apart < 4) return levelOf([...plain.reasons, ...open]);
  return levelOf([
    reason(
      "caution",
      "whole-stack-disagrees",
      `the whole-stack fit gives D = ${d.value.toPrecision(3)} cm²/s, ${apart.toFixed(0)} standard deviations from the widths' ${line.value.toPrecision(3)}`,
      "look at the candidates in the report; quote neither number before the difference is understood",
    ),
    ...plain.reasons,
    ...open,
  ]);
}

function tried({ fits }: WholeStack): string {
  const repulsion = fits.fits.some(({ candidate }) => candidate.repulsion);
  return `diffusion, annihilation, capture, both${repulsion ? ", repulsion, repulsion and annihilation" : ""}`;
}

/** What is said of dipolar excitons' widths where no fit of the whole stack asks for repulsion. */
export function repulsionNotTested(verdict: Result["verdict"], { sample }: Acquisition): Result["verdict"] {
  const { blueShift, temperature } = sample;
  const share =
    blueShift === null || temperature === null
      ? null
      : blueShift.value / (4 * thermalEnergy(temperature).value);
  const size =
    share === null
      ? "by an unknown part"
      : `by up to ${Number((100 * share).toPrecision(2))} % (ΔE/4k_BT by the stated blue shift)`;
  return levelOf([
    reason(
      "caution",
      "repulsion-not-tested",
      `the excitons are dipolar and push each other apart, which makes D from the widths too large ${size}; no fit of the whole stack was made that would tell`,
      "let the whole stack be fitted, or repeat at a tenth of the pulse energy: D must stay",
    ),
    ...verdict.reasons,
  ]);
}

/** Two answers within this many standard uncertainties of each other do not contradict. */
const AGREES = 3;

function wouldMislead(
  fit: CandidateFit,
  line: Quantities["quantities"]["diffusion_coefficient"],
  d: { value: number; u: number },
): Reason {
  const claimed = `${plusMinus(line.value, line.u)} cm²/s`;
  const agrees = Math.abs(d.value - line.value) < AGREES * Math.hypot(d.u, line.u);
  const because = [
    whyNot(fit),
    ...(fit.candidate.name !== "diffusion" && hasFoot(fit) ? [startText(fit)] : []),
  ].join(", and ");
  return reason(
    "caution",
    "widths-would-mislead",
    `the widths alone would have claimed D = ${claimed}, which is ${agrees ? "near here but nothing to rely on" : "wrong"} because ${because}; the numbers come from the fit of the whole stack, which describes it`,
    "quote them with the model and its parameters, and confirm by a recording at another excitation density or temperature",
  );
}

function hasFoot({ names }: CandidateFit): boolean {
  return names.includes("foot_share");
}

/** "the spot starts as a core on a foot (…)" */
function startText({ names, parameters }: CandidateFit): string {
  const share = parameters[names.indexOf("foot_share")]!;
  const wide = Math.sqrt(parameters[names.indexOf("foot_ratio")]!).toPrecision(2);
  return share < 1
    ? `the spot is no Gaussian from the first frames on but a core on a foot ${wide} times as wide that holds ${(100 * share).toPrecision(2)} % of it`
    : "the spot is no Gaussian from the first frames on: its top is flat";
}

/** The suspicions that the whole-stack fit bears out. */
function confirmed(fit: CandidateFit): Reason[] {
  const found: Reason[] = [];
  if (fit.candidate.annihilation) {
    found.push(
      reason(
        "caution",
        "annihilation-suspected",
        `the whole-stack fit needs annihilation, k·n₀ = ${rate(fit, "k_n0")} at the centre right after the pulse`,
        "repeat at a tenth of the pulse energy: k·n₀ must follow it, and D and τ must stay",
      ),
    );
  }
  if (fit.candidate.repulsion) {
    found.push(
      reason(
        "caution",
        "repulsion-suspected",
        `the whole-stack fit needs repulsion between the excitons, u₀n₀/k_BT = ${quoted(fit, "repulsion")} at the centre right after the pulse; D is that of few excitons, and L how far this pulse's spot spreads`,
        "repeat at a tenth of the pulse energy or with a wider spot: u₀n₀ must follow the density, and D must stay",
      ),
    );
  }
  if (fit.candidate.capture) {
    found.push(
      reason(
        "caution",
        "traps-suspected",
        `the whole-stack fit needs traps that catch free excitons at ${rate(fit, "capture")}; τ and this rate take trapped excitons to shine like free ones, D and L do not depend on it`,
        "compare spots, temperatures and excitation: traps fill at higher density and empty at higher temperature",
      ),
    );
  }
  return found;
}

function rate(fit: CandidateFit, name: "k_n0" | "capture"): string {
  return `${quoted(fit, name)} /ns`;
}

function quoted(fit: CandidateFit, name: Name): string {
  const i = fit.names.indexOf(name);
  const u = birgeOf(fit) * Math.sqrt(Math.max(fit.covariance[i * fit.names.length + i]!, 0));
  return plusMinus(fit.parameters[i]!, u);
}

function whyNot(fit: CandidateFit): string {
  switch (fit.candidate.name) {
    case "annihilation":
      return `excitons annihilate each other (k·n₀ = ${rate(fit, "k_n0")})`;
    case "capture":
      return `traps catch excitons (at ${rate(fit, "capture")}) that then stand still`;
    case "annihilation_and_capture":
      return `excitons annihilate each other (k·n₀ = ${rate(fit, "k_n0")}) and traps catch them (at ${rate(fit, "capture")})`;
    case "annihilation_and_repulsion":
      return `excitons push each other apart (u₀n₀/k_BT = ${quoted(fit, "repulsion")} at the centre right after the pulse) and annihilate each other (k·n₀ = ${rate(fit, "k_n0")})`;
    case "repulsion":
      return `excitons push each other apart (u₀n₀/k_BT = ${quoted(fit, "repulsion")} at the centre right after the pulse)`;
    case "diffusion":
      if (hasFoot(fit)) return startText(fit);
      return "one Gaussian is no summary of a frame here, for instance because excitons of earlier pulses lie under the new ones";
  }
}
