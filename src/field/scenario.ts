import type { Covariance } from "../frame/spot.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import { readAcquisitionText } from "../stack/acquisition-file.ts";
import { buildAcquisition } from "../stack/build-acquisition.ts";
import { InputFault } from "../stack/fault.ts";
import { mergeSettings, type SettingText } from "../stack/settings.ts";
import { type Medium, peakDensity, type Start, tensorFromAxes } from "./medium.ts";
import type { Recording } from "./recording.ts";
import { checkScenarioKey, isScenarioKey, ScenarioValues } from "./scenario-keys.ts";
import { checkLimits } from "./scenario-limits.ts";

/** Full width at half maximum of a Gaussian over its standard deviation: 2√(2 ln 2). */
const FWHM_PER_SIGMA = 2 * Math.sqrt(2 * Math.LN2);
const MOST_PIXELS = 2 ** 26;

/** A recording to be made up, with everything that is true about it. */
export interface Scenario {
  /** How messages call the scenario file. */
  readonly file: string;
  readonly kind: "map" | "trace";
  readonly frames: number;
  readonly height: number;
  readonly width: number;
  /** Detected photons of the spot expected in the first frame at or after the pulse. */
  readonly photons: number;
  /** Photons per pixel and frame, everywhere. */
  readonly background: number;
  readonly seed: number;
  /** In units of one pulse's excitons: the start's amount is 1. */
  readonly medium: Medium;
  readonly start: Start;
  /** k n₀ of one pulse, 1/ns. */
  readonly annihilationRate: number;
  /** β = u₀n₀/k_BT of one pulse. */
  readonly repulsion: number;
  readonly recording: Recording;
  readonly acquisition: Acquisition;
  /** The scenario's acquisition keys as written, by dotted name. */
  readonly acquisitionSettings: Readonly<Record<string, SettingText>>;
}

/**
 * Reads a scenario: the keys of an acquisition file ([space], [time], [detector], [slit], [excitation], [sample],
 * [conditions]), which are also written beside the recording, and what is true in [recording], [motion] and [life].
 *
 * @param text TOML
 * @param file how messages call it
 * @throws InputFault naming file and key, what is wrong and the mend
 */
export function readScenario(text: string, file: string): Scenario {
  const settings = readAcquisitionText(text, file);
  for (const key of Object.keys(settings)) checkScenarioKey(file, key);
  const values = new ScenarioValues(file, settings);
  const frames = values.need("recording.frames");
  const width = values.need("recording.width");
  const height = values.get("recording.height") ?? 1;
  if (frames * width * height > MOST_PIXELS)
    throw values.fault("recording.frames", "makes too large a recording");
  const kind = height === 1 ? "trace" : "map";
  const acquisitionSettings: Record<string, SettingText> = {
    axes: kind === "trace" ? "TX" : "TYX",
    ...Object.fromEntries(Object.entries(settings).filter(([key]) => !isScenarioKey(key))),
  };
  const acquisition = buildAcquisition(
    mergeSettings({ image: file, file: { name: file, settings: acquisitionSettings } }),
    frames,
    null,
  );
  if (kind === "map" && acquisition.slit !== null) {
    throw new InputFault(
      `${file}: slit.width stands beside recording.height; a map has no slit, take one out`,
      {
        file,
        where: "slit.width",
      },
    );
  }
  const start: Start = { amount: 1, covariance: startCovariance(values) };
  const annihilationRate = values.get("life.annihilation") ?? 0;
  const repulsion = values.get("motion.repulsion") ?? 0;
  const scenario: Scenario = {
    file,
    kind,
    frames,
    height,
    width,
    photons: values.need("recording.photons"),
    background: values.get("recording.background") ?? 0,
    seed: values.get("recording.seed") ?? 1,
    medium: mediumOf(values, annihilationRate / peakDensity(start), repulsion / peakDensity(start)),
    start,
    annihilationRate,
    repulsion,
    recording: recordingOf(values, acquisition, width, height),
    acquisition,
    acquisitionSettings,
  };
  checkLimits(scenario);
  if (acquisition.time.delays.every((delay) => delay < 0)) {
    throw new InputFault(
      `${file}: time.first lets every frame end before the pulse; start later or take more frames`,
      {
        file,
        where: "time.first",
      },
    );
  }
  return scenario;
}

function mediumOf(values: ScenarioValues, annihilation: number, repulsion: number): Medium {
  const capture = values.get("life.capture") ?? 0;
  for (const key of ["life.trap_light", "life.trap_lifetime"] as const) {
    if (values.has(key) && capture === 0) throw values.fault(key, "stands without life.capture");
  }
  return {
    diffusion: diffusionOf(values),
    lifetime: values.need("life.lifetime"),
    repulsion,
    annihilation,
    capture,
    trapLight: capture === 0 ? 0 : (values.get("life.trap_light") ?? 1),
    trapLifetime: capture === 0 ? Infinity : values.need("life.trap_lifetime"),
  };
}

function diffusionOf(values: ScenarioValues): Covariance {
  const tensor = (["motion.major", "motion.minor", "motion.angle"] as const).filter((key) => values.has(key));
  if (tensor.length === 0) {
    const d = values.need("motion.diffusion_coefficient");
    return [d, 0, d];
  }
  if (values.has("motion.diffusion_coefficient")) {
    throw values.fault("motion.diffusion_coefficient", `contradicts ${tensor[0]}; keep one of them`);
  }
  const major = values.need("motion.major");
  const minor = values.need("motion.minor");
  if (minor > major) throw values.fault("motion.minor", "is larger than motion.major");
  return tensorFromAxes(major, minor, values.get("motion.angle") ?? 0);
}

function startCovariance(values: ScenarioValues): Covariance {
  const fwhm = values.get("motion.fwhm");
  if (fwhm !== null && values.has("motion.sigma0")) {
    throw values.fault("motion.fwhm", "contradicts motion.sigma0; keep one of them");
  }
  const sigma = fwhm === null ? values.need("motion.sigma0") : fwhm / FWHM_PER_SIGMA;
  const minor = values.get("motion.sigma0_minor") ?? sigma;
  return tensorFromAxes(sigma ** 2, minor ** 2, values.get("motion.sigma0_angle") ?? 0);
}

function recordingOf(
  values: ScenarioValues,
  acquisition: Acquisition,
  width: number,
  height: number,
): Recording {
  const pixel = acquisition.space.pixel.value;
  const trace = height === 1;
  return {
    columns: width,
    rows: height,
    pixelX: pixel,
    pixelY: trace ? (acquisition.slit?.width.value ?? Infinity) : pixel,
    delays: acquisition.time.delays,
    gate: acquisition.time.gate,
    period: acquisition.period,
    responseSigma: acquisition.response?.kind === "gaussian" ? acquisition.response.fwhm / FWHM_PER_SIGMA : 0,
    psfVariance: ((acquisition.space.psfFwhm?.value ?? 0) / FWHM_PER_SIGMA) ** 2,
    centre: [
      values.get("motion.centre_x") ?? ((width - 1) / 2) * pixel,
      values.get("motion.centre_y") ?? (trace ? 0 : ((height - 1) / 2) * pixel),
    ],
    drift: [values.get("motion.drift_x") ?? 0, values.get("motion.drift_y") ?? 0],
  };
}
