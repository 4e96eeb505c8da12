import { describe, expect, it } from "vitest";
import type { Acquisition } from "../../src/stack/acquisition.ts";
import { readAcquisitionText } from "../../src/stack/acquisition-file.ts";
import { buildAcquisition } from "../../src/stack/build-acquisition.ts";
import { InputFault } from "../../src/stack/fault.ts";
import { mergeSettings, type SettingText } from "../../src/stack/settings.ts";

interface Told {
  readonly frames?: number;
  readonly overrides?: Record<string, string>;
  readonly metadata?: Record<string, SettingText>;
}

function acquisition(text: string | null, told: Told = {}): Acquisition {
  const settings = mergeSettings({
    image: "scan.tif",
    metadata: told.metadata,
    file: text === null ? undefined : { name: "scan.toml", settings: readAcquisitionText(text, "scan.toml") },
    overrides: told.overrides,
  });
  return buildAcquisition(settings, told.frames ?? 4, null);
}

function faultOf(action: () => unknown): InputFault {
  try {
    action();
  } catch (error) {
    if (error instanceof InputFault) return error;
    throw error;
  }
  throw new Error("no fault was raised");
}

const SPACE = '[space]\npixel = "0.100 um ± 1 %"\n';
const TIME = '[time]\nfirst = "-1 ns"\nstep = "0.25 ns"\n';

describe("an acquisition file", () => {
  it("gives every key in internal units, with its uncertainty", () => {
    const told = acquisition(`
      axes = "TYX"
      [space]
      pixel = "100 nm ± 1 %"
      calibration = "objective-50x"
      psf_fwhm = "0.45 um"
      [time]
      first = "-1 ns"
      step = "250 ps"
      gate = "0.25 ns"
      uncertainty = "0.5 %"
      [detector]
      offset = 100
      gain = 8.0
      read_noise = 6.0
      excess_noise = 2.0
      saturation = 65535
      [slit]
      width = "0.32 um"
      [excitation]
      period = "250 ns"
      [instrument]
      fwhm = "0.05 ns"
      [sample]
      name = "Alder"
      spot = 3
      temperature = "22 °C ± 2 K"
      emission_order = 2
      density = "2e11 cm^-2"
      blue_shift = "4 meV ± 0.5 meV"
      layer_distance = "0.65 nm"
      permittivity = 7
      mass = 1.0
      [conditions]
      fluence = "5 uJ/cm^2 ± 10 %"
      gate_voltage = "2 V"
      cap = "thin oxide"
      run = 12
    `);
    expect(told.space.pixel.value).toBeCloseTo(0.1, 12);
    expect(told.space.pixel.u).toBeCloseTo(0.001, 12);
    expect(told.space.calibration).toBe("objective-50x");
    expect(told.space.psfFwhm).toEqual({ value: 0.45, u: 0 });
    expect(told.time).toEqual({ delays: [-1, -0.75, -0.5, -0.25], gate: 0.25, relativeU: 0.005 });
    expect(told.detector).toEqual({ offset: 100, gain: 8, readNoise: 6, excessNoise: 2, saturation: 65535 });
    expect(told.slit).toEqual({ width: { value: 0.32, u: 0 } });
    expect(told.period).toBe(250);
    expect(told.response).toEqual({ kind: "gaussian", fwhm: 0.05 });
    expect(told.sample.spot).toBe("3");
    expect(told.sample.temperature).toEqual({ value: 295.15, u: 2 });
    expect(told.sample.emissionOrder).toBe(2);
    expect(told.sample.density?.value).toBeCloseTo(2000, 9);
    expect(told.sample.blueShift).toEqual({ value: 4, u: 0.5 });
    expect(told.sample.layerDistance?.value).toBeCloseTo(0.65, 12);
    expect(told.conditions).toEqual({
      fluence: { text: "5 uJ/cm^2 ± 10 %", value: 5, u: 0.5, unit: "uJ/cm^2" },
      gate_voltage: { text: "2 V", value: 2, u: 0, unit: "V" },
      cap: { text: "thin oxide", value: null, u: 0, unit: null },
      run: { text: "12", value: 12, u: 0, unit: null },
    });
    expect(told.settings["time.step"]).toEqual({ text: "250 ps", from: "acquisition file" });
  });

  it("needs pixel and delays alone, and says what the rest is taken for", () => {
    const told = acquisition(SPACE + TIME);
    expect(told.detector).toEqual({ offset: 0, gain: 1, readNoise: 0, excessNoise: 1, saturation: null });
    expect(told.sample.temperature).toBeNull();
    expect(told.settings["detector.gain"]).toEqual({
      text: "1 count a photon (photon counting)",
      from: "default",
    });
    expect(told.settings["sample.emission_order"]?.from).toBe("default");
  });

  it("takes uneven delays as a list with a unit", () => {
    const told = acquisition(`${SPACE}[time]\ndelays = [-500, 0, 250.5, 1000]\nunit = "ps"`);
    expect(told.time.delays).toEqual([-0.5, 0, 0.2505, 1]);
  });

  it("takes the uncertainty of the step as that of the time base", () => {
    const told = acquisition(`${SPACE}[time]\nstep = "0.5 ns ± 2 %"`);
    expect(told.time.delays).toEqual([0, 0.5, 1, 1.5]);
    expect(told.time.relativeU).toBeCloseTo(0.02, 12);
  });

  it("keeps a byte order mark and Windows line ends out of the way", () => {
    expect(acquisition(`\ufeff${(SPACE + TIME).replaceAll("\n", "\r\n")}`).space.pixel.value).toBe(0.1);
  });
});

describe("who is believed", () => {
  const metadata = { "space.pixel": "0.13 µm", "time.step": "1 ns" };

  it("the image's metadata where nothing else speaks", () => {
    const told = acquisition(null, { metadata });
    expect(told.space.pixel.value).toBe(0.13);
    expect(told.settings["space.pixel"]).toEqual({ text: "0.13 µm", from: "image metadata" });
    expect(told.time.delays).toEqual([0, 1, 2, 3]);
  });

  it("the acquisition file over the metadata, also where it gives delays another way", () => {
    const told = acquisition(`${SPACE}[time]\ndelays = [0, 1, 2, 4]\nunit = "ns"`, { metadata });
    expect(told.space.pixel.value).toBe(0.1);
    expect(told.time.delays).toEqual([0, 1, 2, 4]);
  });

  it("the command line over both, also where it gives delays another way", () => {
    const told = acquisition(`${SPACE}[time]\ndelays = [0, 1, 2, 4]\nunit = "ns"`, {
      metadata,
      overrides: {
        "space.pixel": "0.2 um",
        "time.step": "3 ns",
        "detector.offset": "90",
        "conditions.bath": "Birch",
      },
    });
    expect(told.space.pixel.value).toBe(0.2);
    expect(told.time.delays).toEqual([0, 3, 6, 9]);
    expect(told.detector.offset).toBe(90);
    expect(told.conditions.bath?.text).toBe("Birch");
    expect(told.settings["space.pixel"]).toEqual({ text: "0.2 um", from: "command line" });
  });

  it("a list of delays on the command line", () => {
    const overrides = { "time.delays": "0, 0.5, 2, 8", "time.unit": "ns" };
    expect(acquisition(SPACE + TIME, { overrides }).time.delays).toEqual([0, 0.5, 2, 8]);
  });
});

describe("a fault in the acquisition file names file, key and mend", () => {
  it.each<[string, string, string, RegExp]>([
    ["no pixel size", TIME, "space.pixel", /^scan\.toml says no pixel size; add pixel = "0.100 um ± 1 %"/],
    ["no delays", SPACE, "time.step", /^scan\.toml says no delays; add first = /],
    [
      "a bare pixel",
      `${TIME}[space]\npixel = 0.1`,
      "space.pixel",
      /pixel = 0\.1 has no unit; write for example pixel = "0.100/,
    ],
    ["no unit", `${TIME}[space]\npixel = "0.1"`, "space.pixel", /pixel = "0\.1" has no unit/],
    [
      "a unit of the wrong kind",
      `${TIME}[space]\npixel = "0.1 ns"`,
      "space.pixel",
      /unit ns, which is not a length \(um, nm, mm\)/,
    ],
    ["a pixel of no size", `${TIME}[space]\npixel = "0 um"`, "space.pixel", /is not above zero/],
    [
      "text for a number",
      `${SPACE}${TIME}[detector]\ngain = "high"`,
      "detector.gain",
      /gain = "high" is not a number/,
    ],
    [
      "a number with a unit",
      `${SPACE}${TIME}[detector]\ngain = "8 um"`,
      "detector.gain",
      /where a plain number is needed/,
    ],
    [
      "an infinite number",
      `${SPACE}${TIME}[detector]\ngain = inf`,
      "detector.gain",
      /is not a finite number/,
    ],
    [
      "too little excess noise",
      `${SPACE}${TIME}[detector]\nexcess_noise = 0.5`,
      "detector.excess_noise",
      /is below 1/,
    ],
    [
      "negative read noise",
      `${SPACE}${TIME}[detector]\nread_noise = -6`,
      "detector.read_noise",
      /is below zero/,
    ],
    [
      "temperature below 0 K",
      `${SPACE}${TIME}[sample]\ntemperature = "-5 K"`,
      "sample.temperature",
      /lies below 0 K/,
    ],
    [
      "temperature below -273.15 °C",
      `${SPACE}${TIME}[sample]\ntemperature = "-300 °C"`,
      "sample.temperature",
      /lies below 0 K/,
    ],
    ["temperature of 0 K", `${SPACE}${TIME}[sample]\ntemperature = "0 K"`, "sample.temperature", /is 0 K/],
    [
      "emission of order 3",
      `${SPACE}${TIME}[sample]\nemission_order = 3`,
      "sample.emission_order",
      /neither 1 .* nor 2/,
    ],
    [
      "an unknown key",
      `${SPACE}pixle = 1\n${TIME}`,
      "space.pixle",
      /space\.pixle is not a known key; did you mean space\.pixel\?/,
    ],
    [
      "an unknown section",
      `${SPACE}${TIME}[detecter]\ngain = 8`,
      "detecter.gain",
      /did you mean detector\.gain\?/,
    ],
    ["a key out of its section", `pixel = "0.1 um"\n${TIME}`, "pixel", /did you mean space\.pixel\?/],
    [
      "a key unlike any",
      `${SPACE}${TIME}[sample]\nqqqqqqqq = 1`,
      "sample.qqqqqqqq",
      /is not a known key; take it out/,
    ],
    ["a section as a value", `space = "0.1 um"\n${TIME}`, "space", /space is a section; write \[space\]/],
    ["a table as a value", `${SPACE}${TIME}[sample]\nname = { a = 1 }`, "sample.name", /holds a table/],
    ["an empty name", `${SPACE}${TIME}[sample]\nname = " "`, "sample.name", /is empty/],
    [
      "step with delays",
      `${SPACE}${TIME}delays = [0, 1]\nunit = "ns"`,
      "time.delays",
      /contradict each other; keep one/,
    ],
    [
      "response with fwhm",
      `${SPACE}${TIME}[instrument]\nresponse = "irf.csv"\nfwhm = "1 ns"`,
      "instrument.fwhm",
      /contradict/,
    ],
    [
      "step and uncertainty twice",
      `${SPACE}[time]\nstep = "1 ns ± 1 %"\nuncertainty = "2 %"`,
      "time.uncertainty",
      /contradicts the uncertainty/,
    ],
    [
      "an uncertainty without use",
      `${SPACE}${TIME}gate = "1 ns ± 0.1 ns"`,
      "time.gate",
      /carries an uncertainty, which is not used/,
    ],
    [
      "first without step",
      `${SPACE}[time]\nfirst = "0 ns"`,
      "time.step",
      /time\.first stands alone; add step/,
    ],
    [
      "delays without unit",
      `${SPACE}[time]\ndelays = [0, 1, 2, 3]`,
      "time.unit",
      /has no unit; add unit = "ns"/,
    ],
    ["unit without delays", `${SPACE}[time]\nunit = "ns"`, "time.delays", /stands alone; add delays/],
    [
      "delays in a length",
      `${SPACE}[time]\ndelays = [0, 1, 2, 3]\nunit = "um"`,
      "time.unit",
      /is not a time/,
    ],
    [
      "too few delays",
      `${SPACE}[time]\ndelays = [0, 1, 2]\nunit = "ns"`,
      "time.delays",
      /lists 3 delays for 4 frames/,
    ],
    [
      "repeated delays",
      `${SPACE}[time]\ndelays = [0, 1, 1, 2]\nunit = "ns"`,
      "time.delays",
      /repeats at frame 3 \(1 after 1\)/,
    ],
    [
      "falling delays",
      `${SPACE}[time]\ndelays = [0, 2, 1, 3]\nunit = "ns"`,
      "time.delays",
      /does not rise at frame 3/,
    ],
    [
      "delays that are no numbers",
      `${SPACE}[time]\ndelays = [0, 1, "x", 3]\nunit = "ns"`,
      "time.delays",
      /holds "x" in place 3/,
    ],
    ["a step of zero", `${SPACE}[time]\nstep = "0 ns"`, "time.step", /is not above zero/],
  ])("%s", (_, text, where, message) => {
    const fault = faultOf(() => acquisition(text));
    expect(fault.message).toMatch(message);
    expect(fault.message).toMatch(/scan\.toml/);
    expect(fault.message).not.toContain("\n");
    expect(fault.file).toBe("scan.toml");
    expect(fault.where).toBe(where);
  });

  it("a key or value with line breaks or of an inherited name, still in one line", () => {
    for (const text of ['"pix\\nel" = 1', "__proto__ = 1", "constructor = 1", '[space]\npixel = "x\\num"']) {
      expect(faultOf(() => acquisition(text)).message).toMatch(/^scan\.toml: [^\n]+$/);
    }
    expect(Object.keys(acquisition(`${SPACE}${TIME}[conditions]\n__proto__ = 1`).conditions)).toEqual([
      "__proto__",
    ]);
  });

  it("a step that first swallows, or that nobody can mean", () => {
    const message = (time: string) => faultOf(() => acquisition(`${SPACE}[time]\n${time}`)).message;
    expect(message('first = "1e5 s"\nstep = "1 fs"')).toMatch(/delays too close or too large/);
    expect(message('step = "1e299 s"')).toMatch(/time\.step .* is too large to be meant/);
  });

  it("a syntax error, with its line", () => {
    const fault = faultOf(() => acquisition(`${SPACE}[time]\nstep = 0.25 ns\n`));
    expect(fault.message).toMatch(/^scan\.toml, line 4: not valid TOML \(.+\); write key = "value"/);
    expect(fault.message).not.toContain("\n");
  });

  it("a fault on the command line says so", () => {
    const fault = faultOf(() => acquisition(SPACE + TIME, { overrides: { "space.pixel": "0.1" } }));
    expect(fault.message).toMatch(/^command line: space\.pixel = "0\.1" has no unit/);
    const unknown = faultOf(() => acquisition(SPACE + TIME, { overrides: { "space.pixl": "1 um" } }));
    expect(unknown.message).toMatch(
      /^command line: space\.pixl is not a known key; did you mean space\.pixel\?/,
    );
  });

  it("no acquisition file at all says which to write", () => {
    const fault = faultOf(() => acquisition(null));
    expect(fault.message).toMatch(
      /^scan\.tif has no acquisition file beside it .* write scan\.toml with pixel = /,
    );
  });
});
