import { describe, expect, it } from "vitest";
import { readScenario } from "../../src/field/scenario.ts";
import { InputFault } from "../../src/stack/fault.ts";

const LINES: Readonly<Record<string, readonly string[]>> = {
  recording: ["frames = 5", "width = 20", "height = 16", "photons = 1e4", "background = 0.2"],
  space: ['pixel = "0.1 um"'],
  time: ['step = "1 ns"'],
  motion: ['diffusion_coefficient = "0.5 cm^2/s"', 'sigma0 = "0.3 um"'],
  life: ['lifetime = "6 ns"'],
};

/** The plain scenario with lines of a section replaced or added, by their key. */
function toml(changes: Record<string, string[]> = {}, without: string[] = []): string {
  return Object.keys({ ...LINES, ...changes })
    .map((section) => {
      const changed = (changes[section] ?? []).map((line) => line.split(" ")[0]);
      const kept = (LINES[section] ?? []).filter((line) => {
        const key = line.split(" ")[0]!;
        return !changed.includes(key) && !without.includes(key);
      });
      return [`[${section}]`, ...kept, ...(changes[section] ?? [])].join("\n");
    })
    .join("\n");
}

function fault(text: string): InputFault {
  try {
    readScenario(text, "spot.toml");
  } catch (error) {
    if (error instanceof InputFault) return error;
    throw error;
  }
  throw new Error("no fault was raised");
}

describe("readScenario", () => {
  it("reads lengths in µm, times in ns and D in µm²/ns (1 cm²/s = 0.1 µm²/ns)", () => {
    const scenario = readScenario(toml(), "spot.toml");
    expect(scenario.kind).toBe("map");
    expect(scenario.medium.diffusion).toEqual([0.05, 0, 0.05]);
    expect(scenario.medium.lifetime).toBe(6);
    expect(scenario.start.covariance[0]).toBeCloseTo(0.09, 12);
    expect(scenario.recording.delays).toEqual([0, 1, 2, 3, 4]);
  });

  it("puts the spot in the middle of the picture where no place is given", () => {
    const { centre } = readScenario(toml(), "spot.toml").recording;
    expect(centre[0]).toBeCloseTo(0.95, 12);
    expect(centre[1]).toBeCloseTo(0.75, 12);
  });

  it("turns the principal values of a tensor by its angle", () => {
    const motion = ['major = "0.6 cm^2/s"', 'minor = "0.2 cm^2/s"', 'angle = "90 deg"'];
    const { diffusion } = readScenario(toml({ motion }, ["diffusion_coefficient"]), "spot.toml").medium;
    expect(diffusion[0]).toBeCloseTo(0.02, 12);
    expect(diffusion[1]).toBeCloseTo(0, 12);
    expect(diffusion[2]).toBeCloseTo(0.06, 12);
  });

  it("takes annihilation as k n₀ of one pulse's peak, 1/(2πσ₀²) for one exciton", () => {
    const { medium } = readScenario(toml({ life: ['annihilation = "0.4 /ns"'] }), "spot.toml");
    expect(medium.annihilation / (2 * Math.PI * 0.09)).toBeCloseTo(0.4, 12);
  });

  it("reads rates per ps, ns, µs and s in either spelling", () => {
    for (const [text, rate] of [
      ["0.2 /ns", 0.2],
      ["0.2 ns^-1", 0.2],
      ["2e8 s^-1", 0.2],
      ["200 /us", 0.2],
    ] as const) {
      const life = [`capture = "${text}"`, 'trap_lifetime = "20 ns"'];
      expect(readScenario(toml({ life }), "spot.toml").medium.capture).toBeCloseTo(rate, 12);
    }
  });

  it("makes a trace of one line of pixels where no height is given, behind the slit where one is", () => {
    const scenario = readScenario(toml({ slit: ['width = "0.32 um"'] }, ["height"]), "spot.toml");
    expect(scenario.kind).toBe("trace");
    expect(scenario.recording.rows).toBe(1);
    expect(scenario.recording.pixelY).toBe(0.32);
    expect(scenario.acquisitionSettings.axes).toBe("TX");
  });

  it.each([
    [
      "a misspelt key, with the nearest known one",
      toml({ life: ['captur = "0.1 /ns"'] }),
      "life.captur",
      "life.capture",
    ],
    [
      "a missing key, with an example",
      toml({}, ["sigma0"]),
      "motion.sigma0",
      'sigma0 = "0.35 um" under [motion]',
    ],
    ["a number without its unit", toml({ life: ["lifetime = 6"] }), "life.lifetime", "no unit (ns, fs, ps"],
    [
      "a unit of another kind",
      toml({ motion: ['diffusion_coefficient = "0.5 um"'] }),
      "motion.diffusion_coefficient",
      "unit um",
    ],
    ["a negative light", toml({ recording: ["photons = -3"] }), "recording.photons", "not above zero"],
    ["half a frame", toml({ recording: ["frames = 2.5"] }), "recording.frames", "whole number"],
    ["an uncertain truth", toml({ life: ['lifetime = "6 ns ± 1 ns"'] }), "life.lifetime", "uncertainty"],
    [
      "trap light without capture",
      toml({ life: ["trap_light = 1"] }),
      "life.trap_light",
      "without life.capture",
    ],
    [
      "both D and a tensor",
      toml({ motion: ['major = "1 cm^2/s"'] }),
      "motion.diffusion_coefficient",
      "contradicts motion.major",
    ],
    ["a slit before a map", toml({ slit: ['width = "0.3 um"'] }), "slit.width", "a map has no slit"],
    [
      "a response it cannot simulate",
      toml({ instrument: ['response = "irf.csv"'] }),
      "instrument.response",
      "cannot be simulated",
    ],
    [
      "a pixel without unit, as in an acquisition file",
      toml({ space: ["pixel = 0.1"] }),
      "space.pixel",
      "no unit",
    ],
    [
      "a recording that ends before the pulse",
      toml({ time: ['first = "-9 ns"'] }),
      "time.first",
      "before the pulse",
    ],
  ])("refuses %s", (_, text, where, words) => {
    const { message, where: key } = fault(text);
    expect(key).toBe(where);
    expect(message).toContain("spot.toml");
    expect(message).toContain(words);
  });

  it.each([
    ["life.annihilation", { life: ['annihilation = "500 /ns"'] }],
    ["life.capture", { life: ['capture = "1e9 /ns"', 'trap_lifetime = "5 ns"'] }],
    ["motion.sigma0", { motion: ['sigma0 = "0.3 nm"'] }],
    ["motion.sigma0", { motion: ['sigma0 = "30 mm"'] }],
    ["recording.photons", { recording: ["photons = 1e300"] }],
    ["excitation.period", { excitation: ['period = "1 fs"'] }],
  ])("refuses a slip in a unit that no solver could follow: %s", (where, changes) => {
    expect(fault(toml(changes)).where).toBe(where);
  });

  it("names the line of a syntax error", () => {
    expect(fault("[recording]\nframes = = 3").message).toContain("line 2");
  });
});
