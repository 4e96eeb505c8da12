import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { gleamwalk, scratchFolder } from "./command-line.ts";

const folder = scratchFolder();
const SCENARIO = `
[recording]
frames = 6
width = 20
height = 16
photons = 1e4
background = 0.5
[space]
pixel = "0.2 um ± 1 %"
[time]
first = "0 ns"
step = "1 ns"
[motion]
diffusion_coefficient = "0.5 cm^2/s"
sigma0 = "0.5 um"
[life]
lifetime = "5 ns"
[sample]
temperature = "295 K ± 2 K"
`;
const scenario = join(folder, "spot.toml");
writeFileSync(scenario, SCENARIO);

describe("synth", () => {
  test("writes the stack, its acquisition file and the truth, and says so", () => {
    const home = join(folder, "all three");
    const { code, out } = gleamwalk(["synth", scenario, "-o", join(home, "a.tif")]);
    expect({ code, out: out.trim().split("\n") }).toEqual({
      code: 0,
      out: ["a.tif", "a.toml", "a.truth.json"].map((name) => join(home, name)),
    });
    expect(readdirSync(home).sort()).toEqual(["a.tif", "a.toml", "a.truth.json"]);
  });

  test("the stack can be inspected at once, with nothing missing", () => {
    const file = join(folder, "whole.tif");
    gleamwalk(["synth", scenario, "-o", file]);
    expect(JSON.parse(gleamwalk(["inspect", file, "--json"]).out)).toMatchObject({
      shape: [6, 16, 20],
      pixel_um: 0.2,
      delays_ns: [0, 1, 2, 3, 4, 5],
      missing: null,
    });
  });

  test("the truth is the scenario's: D, τ, and L = √(Dτ)", () => {
    const file = join(folder, "true.tif");
    gleamwalk(["synth", scenario, "-o", file]);
    const truth = JSON.parse(readFileSync(join(folder, "true.truth.json"), "utf8"));
    // √(0.5 cm²/s · 5 ns) = √(0.25 µm²)
    expect(truth.diffusion_coefficient_cm2_per_s).toBeCloseTo(0.5, 12);
    expect(truth.lifetime_ns).toBe(5);
    expect(truth.diffusion_length_um).toBeCloseTo(0.5, 6);
  });

  test("the same seed gives the same bytes, another seed others", () => {
    const [a, b, c] = ["seed-a", "seed-b", "seed-c"].map((name) => join(folder, `${name}.tif`)) as [
      string,
      string,
      string,
    ];
    gleamwalk(["synth", scenario, "-o", a, "--seed", "5"]);
    gleamwalk(["synth", scenario, "-o", b, "--seed", "5"]);
    gleamwalk(["synth", scenario, "-o", c, "--seed", "6"]);
    expect(readFileSync(a).equals(readFileSync(b))).toBe(true);
    expect(readFileSync(a).equals(readFileSync(c))).toBe(false);
  });

  test.each<[string, string, string, RegExp]>([
    ["a scenario without a lifetime", SCENARIO.replace(/lifetime.*/, ""), "no.tif", /life\.lifetime/],
    ["an unknown key", SCENARIO.replace("background", "backgrund"), "no.tif", /recording\.background/],
    ["an output that is no .tif", SCENARIO, "no.png", /-o .*no\.png/],
    ["an output below a file", SCENARIO, "spot.toml/no.tif", /spot\.toml is a file/],
  ])("refuses %s and writes nothing", (_, text, output, says) => {
    const wrong = join(folder, "wrong.toml");
    writeFileSync(wrong, text);
    const { code, err, out } = gleamwalk(["synth", wrong, "-o", join(folder, output)]);
    expect({ code, out }).toEqual({ code: 2, out: "" });
    expect(err).toMatch(/^gleamwalk: [^\n]+\n$/);
    expect(err).toMatch(says);
    expect(readdirSync(folder).filter((name) => name.startsWith("no."))).toEqual([]);
  });

  test("a name taken by a folder stops all three files", () => {
    const home = join(folder, "taken");
    gleamwalk(["synth", scenario, "-o", join(home, "b.toml", "inner.tif")]);
    const { code } = gleamwalk(["synth", scenario, "-o", join(home, "b.tif")]);
    expect(code).toBe(2);
    expect(existsSync(join(home, "b.tif"))).toBe(false);
  });
});
