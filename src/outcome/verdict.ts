import { perAxis } from "../transport/width.ts";
import type { Evidence, Sign } from "./evidence.ts";
import type { Joint } from "./joint.ts";
import type { Quantities } from "./quantities.ts";
import { CM2_PER_S } from "./quantities.ts";
import type { Reading } from "./reading.ts";
import type { Result } from "./result.ts";
import { levelOf, plusMinus, type Reason, reason } from "./verdict-reason.ts";

/** A departure this many standard deviations long is no chance; some ten signs are looked at in every recording. */
const SURE = 4;

/** A shape q below this moves no width by a noticeable amount, however sure it is. */
const HARMLESS = 0.01;

/**
 * A flat top that is no trifle: density that pushes itself apart or annihilates makes D too large by more than the |q|
 * that it leaves, as a share of D (some three times, on synthetic recordings with weak repulsion).
 */
function isHarmful({ evidence, quantities }: Case): boolean {
  const { value, u } = quantities.quantities.diffusion_coefficient;
  const { shape } = evidence;
  const least = shape.value < 0 && value > 0 ? Math.min(HARMLESS, u / value) : HARMLESS;
  return Math.abs(shape.value) > least;
}

/** Everything the judges look at. */
interface Case {
  readonly reading: Reading;
  readonly joint: Joint;
  readonly evidence: Evidence;
  readonly quantities: Quantities;
}

/**
 * Judges a recording: every reason found, the worst first, and the worst one's level as the verdict's. "note" leaves a
 * result sound, "caution" asks for a look, "unsound" means that the headline numbers should not be used.
 */
export function judge(seen: Case): Result["verdict"] {
  return levelOf(JUDGES.flatMap((look) => look(seen) ?? []));
}

const z = ({ value, u }: Sign): number => value / u;

/** Two digits, never in powers of ten where it can be helped. */
const short = (value: number): string => String(Number(value.toPrecision(2)));

const percent = (share: number): string => `${short(100 * share)} %`;

const chance = (p: number): string => (p < 1e-9 ? "below 1e-9" : p.toExponential(0));

/** Whether the later half of the window moves less than the earlier one, surely. */
function slowsDown({ early, late }: Evidence): boolean {
  return early.value - late.value > SURE * Math.hypot(early.u, late.u);
}

function bends({ reading, evidence }: Case): boolean {
  return reading.preferredLaw !== "line" || slowsDown(evidence) || evidence.lawP < 1e-4;
}

function lawOfSpread(seen: Case): Reason | null {
  const { reading, evidence } = seen;
  if (evidence.lawP < 1e-4 && seen.joint.spreadBirge > 1.3) {
    return reason(
      "unsound",
      "line-does-not-fit",
      `no law of spread describes the widths (probability ${chance(evidence.lawP)} for the ${named(reading.preferredLaw)}); the uncertainties are widened by ${seen.joint.spreadBirge.toFixed(1)}, which cannot make up for a wrong law`,
      "look at the residuals over delay; restrict the window with --from and --to to where the spread is regular, or repeat at lower excitation",
    );
  }
  if (reading.preferredLaw === "line") return null;
  return reason(
    "caution",
    "line-does-not-fit",
    `the widths do not grow on a straight line; a ${named(reading.preferredLaw)} describes them better, and D is ${meaning(reading.preferredLaw)}`,
    "quote D with its law and window, and look for annihilation, traps or heating before comparing it with other samples",
  );
}

function named(law: Reading["preferredLaw"]): string {
  return {
    line: "straight line",
    power_law: "power law",
    arrest: "motion that comes to rest",
    broken_line: "line with a break",
  }[law];
}

function meaning(law: Reading["preferredLaw"]): string {
  return {
    line: "its slope",
    power_law: "the displacement reached within the lifetime, per time",
    arrest: "that of the beginning",
    broken_line: "that before the break",
  }[law];
}

/**
 * Annihilation flattens the top and fakes early motion; so does repulsion, but the light then falls as it does without;
 * traps leave a core on a foot and late frames that stand still.
 */
function annihilationOrTraps(seen: Case): Reason[] {
  const { reading, evidence, joint } = seen;
  const shape = z(evidence.shape);
  const slowing = bends(seen) && evidence.early.value > evidence.late.value;
  const decaysFastFirst = reading.decays !== null && reading.decays.preferred !== "exponential";
  const found: Reason[] = [];
  const flat = shape < -SURE;
  const peaked = shape > SURE;
  // the foot is then the old excitons', and earlier-pulses-glow says so
  if (peaked && leftOver(seen) > HARMFUL_GLOW) return found;
  if (flat && decaysFastFirst) found.push(annihilation(seen));
  else if (flat && slowing) found.push(reading.decays === null ? annihilation(seen) : repulsion(seen));
  else if (peaked && (slowing || decaysFastFirst)) found.push(traps(seen));
  else if (slowing && decaysFastFirst && slowsDown(evidence)) {
    const candidates = [joint.decay?.law, ...(reading.decays?.rivals ?? [])];
    found.push(candidates.includes("annihilation") ? annihilation(seen) : traps(seen));
  } else if ((flat || peaked) && isHarmful(seen)) found.push(notGaussian(evidence));
  return found;
}

function annihilation({ reading, evidence, quantities }: Case): Reason {
  const { value, u } = quantities.quantities.diffusion_coefficient;
  const fake = fakeDiffusion(reading);
  const share = fake === null || value <= 0 ? null : fake / value;
  const size = share === null ? "" : `; at the start that fakes about ${percent(share)} of the D given here`;
  const misses = fake !== null && fake > 2 * u;
  return reason(
    misses || fallsBy(evidence) > 0.3 ? "unsound" : "caution",
    "annihilation-suspected",
    `the spot has a flat top, the light falls faster at first, and the early motion dies out: excitons annihilate each other${size}`,
    "repeat at a tenth of the pulse energy, or extrapolate D to zero fluence; a larger spot at the same pulse energy does not help",
  );
}

function repulsion({ evidence }: Case): Reason {
  const { early, late } = evidence;
  return reason(
    fallsBy(evidence) > 0.3 ? "unsound" : "caution",
    "repulsion-suspected",
    `the spot has a flat top and its early motion dies out (late D ${short(CM2_PER_S * late.value)} after ${short(CM2_PER_S * early.value)} cm²/s) while the light falls as one exponential: excitons seem to push each other apart, as dipolar ones do`,
    "give [sample] layer_distance or blue_shift if they are dipolar, and the whole-stack fit allows for it; repeat at a tenth of the pulse energy or with a wider spot: D must stay",
  );
}

/**
 * What annihilation adds to the first frame's apparent D, k·n₀·σ²/8 for the second moment of a Gaussian spot (derived
 * from ∂n/∂t = −k·n²), with k·n₀ from the annihilation law of the light; cm²/s. Null where that law was not fitted.
 */
function fakeDiffusion({ decays, models, widths }: Reading): number | null {
  const fit = decays?.fits.annihilation ?? null;
  if (fit === null || !fit.converged) return null;
  const rate = fit.parameters[fit.names.indexOf("k_n0")]!;
  return (CM2_PER_S * rate * perAxis({ variance: models.variance(widths[0]!.frame) })) / 8;
}

/** The share of the early D that the late half has lost, 0 where that is not sure. */
function fallsBy(evidence: Evidence): number {
  return slowsDown(evidence) && evidence.early.value > 0 ? 1 - evidence.late.value / evidence.early.value : 0;
}

function traps({ evidence }: Case): Reason {
  const { early, late } = evidence;
  return reason(
    fallsBy(evidence) > 0.5 ? "unsound" : "caution",
    "traps-suspected",
    `a narrow core stands on a broad foot while the later frames move less (late D ${short(CM2_PER_S * late.value)} after ${short(CM2_PER_S * early.value)} cm²/s): trapped excitons light up and stay where they are`,
    "restrict the window to the early frames with --to, and compare spots, temperatures and excitation: traps fill at higher density and empty at higher temperature",
  );
}

function notGaussian({ shape }: Evidence): Reason {
  const peaked = shape.value > 0;
  return reason(
    "caution",
    "spot-not-gaussian",
    `the spot is ${peaked ? "more peaked" : "flatter"} than a Gaussian (shape ${shape.value.toFixed(3)} ± ${shape.u.toFixed(3)})`,
    peaked
      ? "check for scattered light and for traps; the width of a core on a foot follows the brighter of the two"
      : "check for annihilation, for dipolar excitons that push each other apart, a flat-topped excitation spot and a camera that saturates",
  );
}

function noMotion({ quantities, reading }: Case): Reason | null {
  const { value, u } = quantities.quantities.diffusion_coefficient;
  if (quantities.moved && value < 0) {
    return reason(
      "unsound",
      "spot-shrinks",
      `the spot becomes narrower with delay (D = ${plusMinus(value, u)} cm²/s)`,
      "look for trapped light, defocus drift, a background left in, or species of different lifetime and width",
    );
  }
  if (quantities.moved) return null;
  return reason(
    "caution",
    "no-motion-detected",
    `the spread of the spot is not told from none (${reading.widths.length} frames); the diffusion length is given as an upper limit`,
    "more light, longer delays or a smaller excitation spot would tell; quote the limit, not the value",
  );
}

/** Share of old excitons in the first frame, from the frames before the pulse or else from period and lifetime. */
function leftOver({ evidence, reading, joint }: Case): number {
  const { glow: seen } = evidence;
  if (seen !== null) return z(seen) > SURE ? seen.value : 0;
  const { period } = reading.stack.acquisition;
  const mean = joint.decay?.intensityAveraged.value ?? 0;
  return period === null || mean <= 0 ? 0 : Math.exp(-period / mean);
}

/** Old excitons under the new ones: a broad foot, which the width of one Gaussian cannot tell from traps. */
const HARMFUL_GLOW = 0.005;

function glow(seen: Case): Reason | null {
  const share = leftOver(seen);
  if (share < 0.003) return null;
  const modelled = seen.reading.stack.acquisition.period !== null;
  const harmful = share > HARMFUL_GLOW;
  return reason(
    harmful && bends(seen) ? "unsound" : modelled && !harmful ? "note" : "caution",
    "earlier-pulses-glow",
    `${percent(share)} of the first frame's light is left from earlier pulses${harmful ? "; old excitons have spread and put a broad foot under the new spot, so the widths mix the two" : ""}`,
    modelled
      ? "they are summed in the decay, not in the widths; a longer time between pulses would remove them"
      : "give [excitation] period so that earlier pulses are summed in the decay, or lengthen the time between pulses",
  );
}

function drift({ evidence }: Case): Reason | null {
  const { drift: way } = evidence;
  if (z(way) < SURE || way.value < 0.1) return null;
  return reason(
    way.value > 0.5 ? "caution" : "note",
    "spot-drifts",
    `the centre of the spot moves by ${way.value.toFixed(2)} of its standard deviation over the window`,
    "the centre is free in every frame, so the spread does not suffer; check the stage, and the sample for a gradient that pulls excitons",
  );
}

function cutOff({ evidence }: Case): Reason | null {
  if (evidence.clearance >= 3) return null;
  return reason(
    evidence.clearance < 1.2 ? "unsound" : evidence.clearance < 2.2 ? "caution" : "note",
    "spot-cut-off",
    `the border of the picture comes as close as ${Math.max(evidence.clearance, 0).toFixed(1)} standard deviations to the centre of the widest spot`,
    "centre the spot or record a larger field; what lies outside is taken from the model alone",
  );
}

function background({ evidence }: Case): Reason | null {
  const { p, swing } = evidence.background;
  if (p > 1e-5 || swing < 0.02) return null;
  return reason(
    "caution",
    "background-not-flat",
    `the background around the spot differs by up to ${percent(swing)} from side to side`,
    "record a dark frame and a frame without excitation, and shield stray light: a tilted background shifts widths",
  );
}

function noise(seen: Case): Reason | null {
  const { value, u } = seen.evidence.scatter;
  const off = Math.abs(value - 1);
  if (off < 0.1 || off < SURE * u) return null;
  // light that no spot accounts for scatters too: then the detector is not to blame, or not surely
  const otherwise = bends(seen) || leftOver(seen) > HARMFUL_GLOW || seen.evidence.background.p < 1e-5;
  if (otherwise && off < 1) return null;
  return reason(
    off > 0.5 && !otherwise ? "unsound" : "caution",
    "noise-not-as-stated",
    `pixels scatter ${value.toPrecision(3)} times the variance that the detector settings give`,
    "check gain, offset, read_noise and excess_noise in [detector]; every uncertainty rests on them",
  );
}

/** The brightest frame's light over its standard deviation, below which intervals are only approximate. */
const FAINT = 10;

function faint({ reading }: Case): Reason | null {
  const { light, widths } = reading;
  const brightest = Math.max(...widths.map(({ frame }) => light.value[frame]! / light.sigma[frame]!));
  if (brightest >= FAINT) return null;
  return reason(
    "caution",
    "hardly-any-light",
    `the brightest frame's light is ${brightest.toFixed(1)} of its standard deviations; at so little light the intervals, that of the lifetime above all, are too narrow`,
    "collect more light, or add neighbouring frames up before the analysis",
  );
}

function setAside({ reading }: Case): Reason | null {
  const saturated = reading.flags.filter((flags) => flags.includes("saturated")).length;
  if (saturated === 0) return null;
  return reason(
    "caution",
    "frames-saturated",
    `${saturated} of ${reading.stack.frames} frames reach the detector's saturation and are set aside`,
    "reduce the exposure of the early frames; their light is missing in the decay too",
  );
}

function failed({ reading }: Case): Reason | null {
  const count = reading.flags.filter((flags) => flags.includes("fit-failed")).length;
  if (count === 0) return null;
  return reason(
    count > reading.stack.frames / 10 ? "unsound" : "caution",
    "frames-without-spot",
    `in ${count} bright frames no spot could be fitted; they are set aside`,
    "look at them in the report: a second spot, a shutter or a shift of the stage",
  );
}

function decay({ reading, joint }: Case): Reason | null {
  const { decay: fit } = joint;
  if (fit === null) {
    return reason(
      "caution",
      "no-lifetime",
      "the light over delay gives no lifetime",
      "record longer delays or more light",
    );
  }
  if (fit.pValue < 1e-4 && joint.decayBirge > 1.3) {
    return reason(
      "caution",
      "decay-does-not-fit",
      `no decay law describes the light (probability ${chance(fit.pValue)}); the lifetime's uncertainty is widened by ${joint.decayBirge.toFixed(1)}`,
      "check that the laser power was steady from frame to frame, and give the response and the period if they matter",
    );
  }
  if (reading.decays?.preferred === "exponential") return null;
  return reason(
    "note",
    "decay-not-exponential",
    `the light is not one exponential; ${fit.law === "annihilation" ? "the lifetime is that without annihilation" : "the lifetime is amplitude-averaged, the one that belongs to the diffusion length"}`,
    "compare lifetimes of other samples under the same definition",
  );
}

function runs({ evidence }: Case): Reason | null {
  if (evidence.runsP > 1e-3) return null;
  return reason(
    "caution",
    "residuals-run",
    `the residuals of the widths keep their sign for longer than chance allows (runs test, probability ${chance(evidence.runsP)})`,
    "something varies slowly over delay: focus, laser power or a law that is not quite right",
  );
}

const JUDGES: readonly ((seen: Case) => Reason | readonly Reason[] | null)[] = [
  lawOfSpread,
  annihilationOrTraps,
  noMotion,
  noise,
  faint,
  failed,
  setAside,
  cutOff,
  background,
  glow,
  drift,
  decay,
  runs,
];
