import type { UnitKind } from "./units.ts";

/** What may stand under one key of the acquisition file. */
export type KeyRule =
  | {
      readonly form: "quantity";
      readonly kind: UnitKind;
      readonly example: string;
      /** Values allowed; default positive. */
      readonly range?: "positive" | "not-negative" | "any" | "at-least-1";
      /** Whether an uncertainty is used; where it is not, stating one is refused rather than ignored. */
      readonly uncertain?: boolean;
    }
  | { readonly form: "text"; readonly example: string }
  | { readonly form: "delays"; readonly example: string };

/** Every key of the acquisition file but the free ones under [conditions] (design of the file: README). */
export const KEY_RULES: Readonly<Record<string, KeyRule>> = {
  axes: { form: "text", example: '"TYX"' },
  "space.pixel": { form: "quantity", kind: "length", example: '"0.100 um ± 1 %"', uncertain: true },
  "space.calibration": { form: "text", example: '"objective-50x"' },
  "space.psf_fwhm": { form: "quantity", kind: "length", example: '"0.45 um"', uncertain: true },
  "time.first": { form: "quantity", kind: "time", example: '"-1 ns"', range: "any" },
  "time.step": { form: "quantity", kind: "time", example: '"0.25 ns"' },
  "time.delays": { form: "delays", example: "[0, 0.5, 2]" },
  "time.unit": { form: "text", example: '"ns"' },
  "time.gate": { form: "quantity", kind: "time", example: '"0.25 ns"', range: "not-negative" },
  "time.uncertainty": { form: "quantity", kind: "fraction", example: '"0.5 %"', range: "not-negative" },
  "detector.offset": { form: "quantity", kind: "number", example: "100", range: "any" },
  "detector.gain": { form: "quantity", kind: "number", example: "8.0" },
  "detector.read_noise": { form: "quantity", kind: "number", example: "6.0", range: "not-negative" },
  "detector.excess_noise": { form: "quantity", kind: "number", example: "2.0", range: "at-least-1" },
  "detector.saturation": { form: "quantity", kind: "number", example: "65535" },
  "detector.dark": { form: "text", example: '"dark.tif"' },
  "slit.width": { form: "quantity", kind: "length", example: '"0.32 um"', uncertain: true },
  "excitation.period": { form: "quantity", kind: "time", example: '"250 ns"' },
  "instrument.response": { form: "text", example: '"irf.csv"' },
  "instrument.fwhm": { form: "quantity", kind: "time", example: '"0.05 ns"' },
  "sample.name": { form: "text", example: '"Alder"' },
  "sample.spot": { form: "text", example: '"3"' },
  "sample.temperature": { form: "quantity", kind: "temperature", example: '"295 K ± 2 K"', uncertain: true },
  "sample.emission_order": { form: "quantity", kind: "number", example: "1" },
  "sample.density": { form: "quantity", kind: "density", example: '"2e11 cm^-2"', uncertain: true },
  "sample.blue_shift": { form: "quantity", kind: "energy", example: '"4 meV ± 0.5 meV"', uncertain: true },
  "sample.layer_distance": { form: "quantity", kind: "length", example: '"0.65 nm"', uncertain: true },
  "sample.permittivity": { form: "quantity", kind: "number", example: "7", uncertain: true },
  "sample.mass": { form: "quantity", kind: "number", example: "1.0", uncertain: true },
};

/** Sections, for the message about a table that is none. */
export const SECTIONS: readonly string[] = [
  ...new Set(Object.keys(KEY_RULES).flatMap((key) => (key.includes(".") ? [key.split(".")[0]!] : []))),
  "conditions",
];

/** Keys of which one excludes the others: [time] first and step, or delays and unit; [instrument] one of the two. */
export const ALTERNATIVES: readonly (readonly [readonly string[], readonly string[]])[] = [
  [
    ["time.first", "time.step"],
    ["time.delays", "time.unit"],
  ],
  [["instrument.response"], ["instrument.fwhm"]],
];
