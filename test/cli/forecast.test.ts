import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { gleamwalk, place, scratchFolder, spotStack } from "./command-line.ts";

const folder = scratchFolder();
const SCENARIO = `
[recording]
frames = 12
width = 30
height = 30
photons = 1e4
background = 0.5
[space]
pixel = "0.2 um ± 1 %"
[time]
first = "-1 ns"
step = "0.5 ns"
uncertainty = "0.5 %"
[motion]
diffusion_coefficient = "0.5 cm^2/s"
sigma0 = "0.5 um"
[life]
lifetime = "5 ns"
`;

function file(name: string, text: string): string {
  const path = join(folder, name);
  writeFileSync(path, text);
  return path;
}

const scenario = file("plan.toml", SCENARIO);
const traps = file("traps.toml", `${SCENARIO}capture = "0.2 /ns"\ntrap_lifetime = "12 ns"\n`);

/** A result as of a recording whose spot stops spreading. */
function arrested(): string {
  const stack = place(folder, "arrested", spotStack());
  const result = JSON.parse(gleamwalk(["spread", stack, "-o", join(folder, "arrested"), "--json"]).out);
  result.quantities.diffusion_coefficient.from = "arrest";
  return JSON.stringify(result);
}

const told = (args: readonly string[]) => JSON.parse(gleamwalk(["forecast", ...args, "--json"]).out);

describe("forecast", () => {
  test("tells D, τ and L, three ways to halve the error, and the caution on laser power", () => {
    const { code, out, err } = gleamwalk(["forecast", scenario]);
    expect({ code, err }).toEqual({ code: 0, err: "" });
    for (const part of ["D    0.5", "τ    5.0", "L    0.5", "more light", "longer delays", "a smaller spot"])
      expect(out).toContain(part);
    expect(out.replace(/\s+/g, " ")).toMatch(/annihilation, damage .*hazard to eyes.*laser safety rules/);
    // 2 % of the pixel's 1 % and 0.5 % of the time base: √(2² + 0.5²)
    expect(out).toContain("add 2.1 % to D");
  });

  test("names the traps' rates where there are traps", () => {
    const { out } = gleamwalk(["forecast", traps]);
    expect(out).toMatch(/^ {2}c +0\.20/m);
    expect(out).toMatch(/^ {2}τ_m +12/m);
  });

  test.each([
    ["plain", scenario],
    ["with traps", traps],
  ])("keeps within 80 columns: %s", (_, path) => {
    const { out } = gleamwalk(["forecast", path]);
    expect(out.split("\n").filter((line) => [...line].length > 80)).toEqual([]);
  });

  test("--json prints one block of numbers with their units", () => {
    expect(told([scenario])).toMatchObject({
      schema: "gleamwalk.forecast/1",
      plan: scenario,
      road: "widths",
      photons: 10_000,
      frames: 12,
      quantities: {
        diffusion_coefficient: { unit: "cm^2/s" },
        lifetime: { value: 5, unit: "ns" },
        diffusion_length: { unit: "um" },
        k_n0: null,
        capture: null,
        trap_lifetime: null,
      },
    });
  });

  test("its options change the plan", () => {
    const changed = told([
      scenario,
      "--photons",
      "4e4",
      "--frames",
      "20",
      "--first",
      "0",
      "--step",
      "500 ps",
    ]);
    expect(changed).toMatchObject({ photons: 40_000, frames: 20, first_ns: 0, last_ns: 9.5 });
    expect(told([scenario, "--sigma0", "0.4"]).sigma0_um).toBeCloseTo(0.4, 12);
  });

  test("more frames take the place of listed delays", () => {
    const listed = SCENARIO.replace(/first = .*\nstep = .*\n/, 'delays = [0, 1, 2, 4]\nunit = "ns"\n');
    const path = file("listed.toml", listed.replace("frames = 12", "frames = 4"));
    expect(told([path, "--frames", "7"])).toMatchObject({ frames: 7, first_ns: 0, last_ns: 8 });
  });

  test("takes the result of a pilot recording, and agrees with its counting error", () => {
    const stack = place(folder, "pilot", spotStack());
    gleamwalk(["spread", stack, "-o", join(folder, "pilot")]);
    const path = join(folder, "pilot", "result.json");
    const result = JSON.parse(gleamwalk(["spread", stack, "-o", join(folder, "again"), "--json"]).out);
    const { diffusion_coefficient: d } = told([path]).quantities;
    expect(Math.abs(d.u / result.quantities.diffusion_coefficient.u_statistical - 1)).toBeLessThan(0.1);
    // the recording itself is analysed first
    expect(told([stack]).quantities).toEqual(told([path]).quantities);
  });

  test.each<[string, string[], RegExp]>([
    ["a plan that is not there", ["none.toml"], /none\.toml/],
    ["a scenario without a lifetime", [file("a.toml", SCENARIO.replace(/lifetime.*/, ""))], /life\.lifetime/],
    ["a JSON file that is no result", [file("a.json", '{"schema": 1}')], /a\.json .*result\.json/],
    ["a JSON file that is broken", [file("b.json", "{")], /b\.json is not valid JSON/],
    ["a pilot whose spot stops", [file("c.json", arrested())], /c\.json: .*--field/],
    ["photons that are no number", [scenario, "--photons", "many"], /--photons "many"/],
    ["half a frame", [scenario, "--frames", "2.5"], /--frames "2\.5"/],
    ["no photons", [scenario, "--photons", "0"], /--photons "0"/],
    ["a step in metres", [scenario, "--step", "1 um"], /time\.step/],
    ["a step of nothing", [scenario, "--step", ""], /time\.step/],
    ["frames that end before the pulse", [scenario, "--first", "-90 ns"], /time\.first/],
    [
      "two frames after the pulse",
      [file("two.toml", SCENARIO.replace("frames = 12", "frames = 4"))],
      /too few frames/,
    ],
    ["an unknown option", [scenario, "--light", "3"], /--light/],
    ["no plan", [], /PLAN/],
  ])("refuses %s in one sentence, with exit code 2", (_, args, says) => {
    const { code, out, err } = gleamwalk(["forecast", ...args], folder);
    expect({ code, out }).toEqual({ code: 2, out: "" });
    expect(err).toMatch(/^gleamwalk: [^\n]+\n$/);
    expect(err).toMatch(says);
  });
});
