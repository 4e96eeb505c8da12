import { readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { record } from "../../../src/field/detector.ts";
import { readScenario } from "../../../src/field/scenario.ts";
import type { CandidateFit } from "../../../src/field/stack-fit/candidates.ts";
import type { Values } from "../../../src/field/stack-fit/parameters.ts";
import { createRandom } from "../../../src/numerics/random.ts";
import { fieldQuantities } from "../../../src/outcome/field-quantities.ts";
import { joinFits } from "../../../src/outcome/joint.ts";
import { readRecording } from "../../../src/outcome/read-recording.ts";
import { fitWholeStack } from "../../../src/outcome/whole-stack.ts";
import type { Acquisition } from "../../../src/stack/acquisition.ts";
import { memoryStack } from "../../../src/stack/memory-stack.ts";
import type { Stack } from "../../../src/stack/stack.ts";

const FOLDER = join("test", "data", "field-stacks");

/** Seed of draw k of every case: SEED + k, fixed beforehand. */
const SEED = 40_000;

const COUNTING = "gain = 1\noffset = 0\nread_noise = 0";
/** Amplification doubles the variance; the read noise is 1.7 photons. */
const AMPLIFIED = "gain = 12\noffset = 100\nread_noise = 20\nexcess_noise = 2.0";

type CandidateName = CandidateFit["candidate"]["name"];

export interface Case {
  /** The mean stack, by scripts/make-field-stacks.py. */
  readonly stack: string;
  /** The candidate that it was made with. */
  readonly made: CandidateName;
  /** Detected photons of the whole recording, background aside. */
  readonly photons: number;
  /** Photons per pixel. */
  readonly background: number;
  readonly detector: string;
}

function of(stack: string, made: CandidateName, change: Partial<Case> = {}): Case {
  return { stack, made, photons: 1e6, background: 0.3, detector: COUNTING, ...change };
}

export const CASES: Readonly<Record<string, Case>> = {
  plain: of("plain", "diffusion"),
  "annihilation-weak": of("annihilation-weak", "annihilation"),
  annihilation: of("annihilation", "annihilation"),
  "annihilation-strong": of("annihilation-strong", "annihilation"),
  "capture-weak": of("capture-weak", "capture"),
  capture: of("capture", "capture"),
  "capture-strong": of("capture-strong", "capture"),
  both: of("both", "annihilation_and_capture"),
  "earlier-pulses-dense": of("earlier-pulses-dense", "annihilation"),
  "earlier-pulses": of("earlier-pulses", "annihilation"),
  "earlier-pulses-rare": of("earlier-pulses-rare", "annihilation"),
  "turned-tensor": of("turned-tensor", "annihilation"),
  // a trace's pixel holds the background of a column's four pixels
  slit: of("slit", "annihilation", { background: 1.2 }),
  amplified: of("annihilation", "annihilation", { detector: AMPLIFIED }),
  // the same with so little light that k·n₀ is five of its standard uncertainties, c four
  "annihilation-dim": of("annihilation-weak", "annihilation", { photons: 2.8e5 }),
  "capture-dim": of("capture-weak", "capture", { photons: 4e4 }),
  "both-dim": of("both", "annihilation_and_capture", { photons: 4e4 }),
};

/** What the script says of a stack; µm and ns. */
interface Made {
  readonly kind: "map" | "trace";
  readonly size: number;
  readonly pixel: number;
  readonly frames: number;
  readonly step: number;
  readonly gate: number;
  readonly psf_fwhm: number | null;
  readonly slit: number | null;
  readonly period: number | null;
  readonly s: number;
  readonly L: number;
}

/** A case's mean light with background, and its truth by the names of the fit. */
export interface Prepared {
  readonly made: CandidateName;
  readonly frames: readonly Float64Array[];
  readonly height: number;
  readonly width: number;
  readonly acquisition: Acquisition;
  readonly truth: Values & { readonly L: number };
}

export function prepare(name: string): Prepared {
  const { stack, made, photons, background, detector } = CASES[name]!;
  const listed = JSON.parse(readFileSync(join(FOLDER, "stacks.json"), "utf8"));
  const facts: Made = listed[stack];
  const bytes = new Uint8Array(gunzipSync(readFileSync(join(FOLDER, `${stack}.f32.gz`))));
  const light = new Float32Array(bytes.buffer);
  const height = facts.kind === "map" ? facts.size : 1;
  const area = height * facts.size;
  const amplitude = photons / light.reduce((sum, value) => sum + value, 0);
  const { acquisition } = readScenario(scenarioText(facts, detector), `${name}.toml`);
  return {
    made,
    frames: Array.from({ length: facts.frames }, (_, i) =>
      Float64Array.from(
        light.subarray(i * area, (i + 1) * area),
        (value) => amplitude * Math.max(value, 0) + background,
      ),
    ),
    height,
    width: facts.size,
    acquisition,
    truth: { ...facts, s_xx: facts.s, s_xy: 0, s_yy: facts.s, amplitude, background },
  };
}

function scenarioText(facts: Made, detector: string): string {
  const { kind, size, pixel, frames, step, gate, psf_fwhm, slit, period } = facts;
  return `
[recording]
frames = ${frames}
width = ${size}
${kind === "map" ? `height = ${size}` : ""}
photons = 1
background = 0
seed = 1
[space]
pixel = "${pixel} um"
${psf_fwhm === null ? "" : `psf_fwhm = "${psf_fwhm} um"`}
[time]
first = "0 ns"
step = "${step} ns"
gate = "${gate} ns"
[detector]
${detector}
${slit === null ? "" : `[slit]\nwidth = "${slit} um"`}
${period === null ? "" : `[excitation]\nperiod = "${period} ns"`}
[motion]
diffusion_coefficient = "0.3 cm^2/s"
sigma0 = "0.4 um"
[life]
lifetime = "5 ns"
`;
}

/** Draw k of a case as a recording. */
export function draw({ frames, height, width, acquisition }: Prepared, k: number): Stack {
  const random = createRandom(SEED + k);
  const counts = frames.map((frame, i) => record(frame, acquisition.detector, random.spawn(i)));
  return memoryStack({ frames: counts, height, width, acquisition });
}

/** The mean itself as a recording: what is found off the truth is the solver's or the fit's doing. */
export function noiseless({ frames, height, width, acquisition }: Prepared): Stack {
  const { offset, gain } = acquisition.detector;
  const counts = frames.map((frame) => frame.map((photons) => offset + gain * photons));
  return memoryStack({ frames: counts, height, width, acquisition });
}

export interface Answer {
  readonly preferred: CandidateName | "none";
  /** (fit − truth)/u of every parameter of the candidate that the stack was made with, and of L by it. */
  readonly pulls: Readonly<Record<string, number>>;
  /** Goodness of fit of that candidate. */
  readonly p: number | null;
  /** Corrected Akaike criterion of each candidate over the lowest. */
  readonly aicc: Readonly<Record<string, number>>;
  readonly converged: boolean;
}

/** Reads a recording and fits it whole, on the road that the command line takes. */
export function answer(prepared: Prepared, stack: Stack): Answer {
  const reading = readRecording(stack);
  const whole = fitWholeStack(reading, joinFits(reading));
  if (whole === null) return { preferred: "none", pulls: {}, p: null, aicc: {}, converged: false };
  const { fits, preferred } = whole.fits;
  const fit = fits.find((each) => each.candidate.name === prepared.made);
  const lowest = Math.min(...fits.map((each) => each.aicc));
  return {
    preferred: preferred.candidate.name,
    pulls: fit?.converged ? pullsOf(prepared, whole, fit) : {},
    p: fit?.goodness.pValue ?? null,
    aicc: Object.fromEntries(fits.map((each) => [each.candidate.name, each.aicc - lowest])),
    converged: fit?.converged ?? false,
  };
}

function pullsOf(
  { truth }: Prepared,
  { data, fits }: NonNullable<ReturnType<typeof fitWholeStack>>,
  fit: CandidateFit,
): Record<string, number> {
  const { names, parameters, covariance } = fit;
  const pulls = names.map((name, i) => {
    const u = Math.sqrt(covariance[i * names.length + i]!);
    return [name, (parameters[i]! - truth[name]!) / u];
  });
  const { length2 } = fieldQuantities(data, { ...fits, preferred: fit });
  const length = Math.sqrt(Math.max(length2.value, 0));
  return { ...Object.fromEntries(pulls), L: (length - truth.L) / (length2.u / (2 * length)) };
}
