import type { Acquisition, Condition, Detector, Measured, Response, Setting } from "./acquisition.ts";
import { readCondition } from "./conditions.ts";
import { PHOTON_COUNTING } from "./defaults.ts";
import { delaysOf } from "./delays.ts";
import { InputFault } from "./fault.ts";
import type { WrittenSettings } from "./settings.ts";
import { quantityOf, textOf, valueFault } from "./values.ts";

/**
 * The acquisition from everything written, in internal units, with every setting and where it came from.
 *
 * @param frames in the recording
 * @param sampled the instrument response that `instrument.response` points to, already read
 * @param largest counts at which the stored samples end, taken for the saturation where none is stated
 * @throws InputFault when something is missing, has no unit or the wrong one, or contradicts the recording
 */
export function buildAcquisition(
  settings: WrittenSettings,
  frames: number,
  sampled: Response | null,
  largest: number | null = null,
): Acquisition {
  const quantity = (key: string) => quantityOf(settings, key);
  const pixel = pixelOf(settings);
  if (pixel === null) throw missingPixel(settings);
  const delays = delaysOf(settings, frames);
  if (delays === null) {
    throw absent(settings, "time.step", "says no delays", 'first = "0 ns" and step = "0.25 ns" under [time]');
  }
  const slit = quantity("slit.width");
  const fwhm = quantity("instrument.fwhm");
  return {
    space: { pixel, calibration: textOf(settings, "space.calibration"), psfFwhm: quantity("space.psf_fwhm") },
    time: { delays: delays.delays, gate: quantity("time.gate")?.value ?? 0, relativeU: delays.relativeU },
    detector: detectorOf(settings, largest),
    slit: slit === null ? null : { width: slit },
    period: quantity("excitation.period")?.value ?? null,
    response: sampled ?? (fwhm === null ? null : { kind: "gaussian", fwhm: fwhm.value }),
    sample: sampleOf(settings),
    conditions: conditionsOf(settings),
    settings: describe(settings, largest),
  };
}

/** Side of a pixel, µm, or null where it is written nowhere. */
export function pixelOf(settings: WrittenSettings): Measured | null {
  return quantityOf(settings, "space.pixel");
}

function detectorOf(settings: WrittenSettings, largest: number | null): Detector {
  const value = (key: string) => quantityOf(settings, `detector.${key}`)?.value;
  return {
    offset: value("offset") ?? PHOTON_COUNTING.offset,
    gain: value("gain") ?? PHOTON_COUNTING.gain,
    readNoise: value("read_noise") ?? PHOTON_COUNTING.readNoise,
    excessNoise: value("excess_noise") ?? PHOTON_COUNTING.excessNoise,
    saturation: value("saturation") ?? largest,
  };
}

function sampleOf(settings: WrittenSettings): Acquisition["sample"] {
  const quantity = (key: string) => quantityOf(settings, `sample.${key}`);
  const order = quantity("emission_order")?.value ?? 1;
  if (order !== 1 && order !== 2) {
    throw valueFault(
      settings,
      "sample.emission_order",
      "is neither 1 (excitons) nor 2 (electrons and holes)",
    );
  }
  const distance = quantity("layer_distance");
  return {
    name: textOf(settings, "sample.name"),
    spot: textOf(settings, "sample.spot"),
    temperature: quantity("temperature"),
    emissionOrder: order,
    density: quantity("density"),
    blueShift: quantity("blue_shift"),
    layerDistance: distance === null ? null : { value: distance.value * 1000, u: distance.u * 1000 },
    permittivity: quantity("permittivity"),
    mass: quantity("mass"),
  };
}

function conditionsOf(settings: WrittenSettings): Record<string, Condition> {
  const conditions = [...settings.values].filter(([key]) => key.startsWith("conditions."));
  return Object.fromEntries(
    conditions.map(([key, { value }]) => [key.slice("conditions.".length), readCondition(value)]),
  );
}

/** What is said of a setting that nobody wrote, where the default bears on the result. */
const DEFAULTS: Readonly<Record<string, string>> = {
  "time.gate": "not stated: each frame taken as an instant",
  "time.uncertainty": "not stated: 0 %",
  "detector.offset": "0",
  "detector.gain": "1 count a photon",
  "detector.read_noise": "0",
  "detector.excess_noise": "1",
  "sample.emission_order": "1 (light as density: excitons)",
  "sample.temperature": "not stated: no mobility",
};

function describe(settings: WrittenSettings, largest: number | null): Record<string, Setting> {
  const described: Record<string, Setting> = {};
  for (const [key, { value, from }] of settings.values) {
    described[key] = { text: typeof value === "object" ? value.join(", ") : String(value), from };
  }
  const counting = ![...settings.values.keys()].some((key) => key.startsWith("detector."));
  for (const [key, text] of Object.entries(DEFAULTS)) {
    if (described[key] !== undefined) continue;
    const photonCounting = counting && key.startsWith("detector.");
    described[key] = { text: photonCounting ? `${text} (photon counting)` : text, from: "default" };
  }
  if (described["detector.saturation"] === undefined) {
    const text = largest === null ? "not stated" : `${largest} (the largest number stored)`;
    described["detector.saturation"] = { text, from: "default" };
  }
  if (described["time.delays"] === undefined && described["time.first"] === undefined) {
    described["time.first"] = { text: "0 ns", from: "default" };
  }
  return described;
}

function missingPixel(settings: WrittenSettings): InputFault {
  const why = settings.pixelFault === null ? "says no pixel size" : "says no pixel size of its own";
  const fault = absent(settings, "space.pixel", why, 'pixel = "0.100 um ± 1 %" under [space]');
  if (settings.pixelFault === null) return fault;
  return new InputFault(
    `${settings.image}: ${settings.pixelFault}; give the pixel size in the acquisition file`,
    {
      file: settings.image,
      where: "space.pixel",
    },
  );
}

function absent(settings: WrittenSettings, key: string, why: string, add: string): InputFault {
  const file = settings.acquisitionFile;
  if (file !== null) return new InputFault(`${file} ${why}; add ${add}`, { file, where: key });
  return new InputFault(
    `${settings.image} has no acquisition file beside it and ${why} itself; write ${tomlName(settings.image)} with ${add}`,
    { file: settings.image, where: key },
  );
}

/** NAME.toml for NAME.tif, NAME.tiff and NAME.ome.tif. */
export function tomlName(image: string): string {
  return `${image.replace(/(?:\.ome)?\.[^./\\]+$/i, "")}.toml`;
}
