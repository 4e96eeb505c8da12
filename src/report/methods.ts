import type { Analysis } from "../outcome/analysis.ts";
import type { Result } from "../outcome/result.ts";
import { concise, plain, symbols } from "./notation.ts";
import { fieldUncertaintyText, rangedText, startText } from "./ranged-text.ts";
import {
  baseName,
  CANDIDATE,
  counted,
  DECAY_LAW,
  flagCounts,
  probability,
  quantityText,
  TRANSPORT_LAW,
  unitText,
} from "./wording.ts";

/**
 * The methods text for a supplement, one string a paragraph, built from what this analysis did and found. It states
 * the model, the estimator, the window, the formulas and the version; it claims nothing that was not done.
 */
export function methodsText(analysis: Analysis): string[] {
  return [
    spotText(analysis),
    spreadMethod(analysis.result),
    decayMethod(analysis),
    fieldMethod(analysis.result),
    outcomeText(analysis),
  ].filter((text) => text !== "");
}

function spotText({ stack, result }: Analysis): string {
  const { detector, space } = stack.acquisition;
  const dark = stack.dark === null ? "" : " after subtraction of a dark frame";
  const shape =
    stack.kind === "map"
      ? "a two-dimensional Gaussian with free centre, covariance matrix Σ, volume and background (seven parameters)"
      : "a one-dimensional Gaussian with free centre, variance Σ, area and background (four parameters)";
  const noise =
    detector.readNoise > 0 || detector.excessNoise > 1
      ? `the camera's noise (variance ${plain(detector.excessNoise)}·gain·signal + (${plain(detector.readNoise)} counts)², gain ${plain(detector.gain)} counts per photon, taken from the model)`
      : "counting (Poisson) noise";
  return (
    `Each of the ${counted(stack.frames, "frame")} of ${baseName(result.input.file)} (${result.input.shape.join(" × ")}, pixel ${plain(space.pixel.value)} µm at the sample) ` +
    `was fitted with ${shape} by maximum likelihood for ${noise}${dark}; uncertainties are from the inverse Fisher matrix.${asideText(result)}`
  );
}

function asideText(result: Result): string {
  const flags = flagCounts(result.frames);
  if (flags.length === 0) return "";
  const counts = flags.map(([flag, count]) => `${count} ${flag}`).join(", ");
  // trapping alone is judged by how the spot moves, so there the claim would be false
  const blind = flags.every(([flag]) => flag !== "trap-dominated");
  return ` Frames set aside: ${counts}${blind ? "; the width itself played no part in that choice" : ""}.`;
}

function spreadMethod({ transport, quantities, tensor }: Result): string {
  const { window, preferred, models } = transport;
  const law = models[preferred] ?? null;
  const others = Object.entries(models).filter(
    ([name, model]) => model !== null && name !== preferred,
  ).length;
  const choice =
    others > 0 && law !== null
      ? ` It was chosen among ${others + 1} laws by corrected Akaike weight (${law.weight.toFixed(2)}) together with goodness of fit`
      : " It was the only law tried";
  const fit =
    law !== null && law.degrees_of_freedom > 0
      ? ` (χ²/dof = ${(law.chi2 / law.degrees_of_freedom).toFixed(2)}, p ${equalsText(law.p_value)})`
      : "";
  const birge =
    transport.birge_factor > 1
      ? ` Uncertainties were widened by the Birge factor ${transport.birge_factor.toFixed(2)}.`
      : "";
  const D = quantities.diffusion_coefficient;
  return (
    `The ${tensor === null ? "variance" : "covariance matrix"} over delay t, from ${plain(window.from_ns)} to ${plain(window.to_ns)} ns (${counted(window.frames, "frame")}), ` +
    `was fitted with a ${TRANSPORT_LAW[preferred]}${law === null ? "" : `, ${symbols(law.formula)},`} with a free intercept Σ₀, which takes up the excitation spot, ` +
    "the point-spread function and the pixel; weights are from the fitted law and the fitted decay, not from single frames." +
    `${choice}${fit}.${birge} This gives D = ${quantityText(D)} ${unitText(D.unit)}.`
  );
}

function decayMethod(analysis: Analysis): string {
  const { decay, quantities } = analysis.result;
  const { lifetime } = quantities;
  if (decay === null || lifetime === null) return "";
  const law = decay.models[decay.preferred] ?? null;
  return (
    `The light N(t) under the fitted spot (its volume, not the sum over the picture) was fitted with ${DECAY_LAW[decay.preferred]}` +
    `${law === null ? "" : `, ${symbols(law.formula)}${instrumentText(analysis)}`}; τ = ${quantityText(lifetime)} ns.`
  );
}

/** What the law of decay was seen through, as far as the acquisition tells. */
function instrumentText({ stack }: Analysis): string {
  const { time, response, period, slit } = stack.acquisition;
  const parts: string[] = [];
  if (time.gate > 0) parts.push(`averaged over the gate of ${plain(time.gate)} ns`);
  if (response !== null) parts.push("convolved with the instrument's response");
  if (period !== null) parts.push(`summed over earlier pulses (period ${plain(period)} ns)`);
  if (slit !== null) parts.push(`corrected for light beside the slit of ${plain(slit.width.value)} µm`);
  return parts.length === 0 ? "" : `, ${parts.join(", ")}`;
}

function fieldMethod({ field }: Result): string {
  if (field === null) return "";
  const rates = [
    ...(field.repulsion === null
      ? []
      : [`β = ${rangedText(field.repulsion, "")} at the centre right after the pulse`]),
    ...(field.k_n0 === null
      ? []
      : [`k·n₀ = ${rangedText(field.k_n0, "/ns")} at the centre right after the pulse`]),
    ...(field.capture === null
      ? []
      : [`capture at ${rangedText(field.capture, "/ns")}, trapped excitons taken to shine like free ones`]),
    ...(field.trap_lifetime === null ? [] : [`lifetime in traps ${rangedText(field.trap_lifetime, "ns")}`]),
  ];
  const found = [`D = ${rangedText(field.D, "cm²/s")}`, `τ = ${rangedText(field.tau, "ns")}`, ...rates];
  return (
    `The reaction–diffusion model ∂n/∂t = ∇·D${field.repulsion === null ? "" : "(1 + β n/n₀)"}∇n − n/τ − k n² − c n for free and ∂m/∂t = c n − m/τ_m for trapped excitons was fitted to all pixels of all frames at once by maximum likelihood (damped Fisher scoring), ` +
    `with its terms chosen by corrected Akaike weight and goodness of fit: ${CANDIDATE[field.preferred]} (${found.join(", ")}; χ²/dof = ${(field.chi2 / field.degrees_of_freedom).toFixed(2)} over rings of groups of frames, p ${equalsText(field.p_value)}). ` +
    startText(field) +
    fieldUncertaintyText(field) +
    (field.adopted
      ? "D, τ and L are from this fit."
      : "D, τ and L are from the widths and the decay; this fit stands beside them.")
  );
}

function outcomeText({ stack, result }: Analysis): string {
  const { diffusion_length: L, mobility } = result.quantities;
  const { temperature, emissionOrder } = stack.acquisition.sample;
  const parts: string[] = [];
  if (emissionOrder === 2) {
    parts.push(
      "The light was taken as proportional to the density squared; D, τ and L are those of the density.",
    );
  }
  if (L !== null) {
    parts.push(
      `The diffusion length is the root of L² = ∫ ½·MSD₁(t)·(−dN/dt) dt / N₀ per axis, which is √(Dτ) for normal diffusion and one exponential: L ${L.upper_limit === true ? "" : "= "}${quantityText(L)} µm.`,
    );
  }
  if (mobility !== null && temperature !== null) {
    parts.push(
      `The equivalent mobility is μ = eD/(k_B\u00a0T) at T = ${concise(temperature.value, temperature.u)} K: μ ${mobility.upper_limit === true ? "" : "= "}${quantityText(mobility)} cm²/(V s).`,
    );
  }
  parts.push(
    "Numbers in parentheses are combined standard uncertainties (k = 1) in the last digits, from counting statistics (type A) and calibration (type B), combined as in JCGM 100:2008.",
    `The analysis was made with gleamwalk ${result.provenance.version}.`,
  );
  return parts.join(" ");
}

function equalsText(p: number): string {
  const text = probability(p);
  return text.startsWith("<") ? text : `= ${text}`;
}
