import { readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { type Quantity, resultSchema } from "../../src/outcome/result.ts";
import { gleamwalk, scratchFolder } from "./command-line.ts";

const SAMPLES = join(import.meta.dirname, "../../sample-data");
const folder = scratchFolder();

/** Recordings whose truth is plain diffusion and one lifetime: their numbers must hold. */
const PLAIN = ["alder-spot3", "alder-starved", "birch-cold", "birch-spot2", "streak-alder"];
/** Recordings that must not be called sound, with the suspicion to be named. */
const DOUBTFUL = { "alder-bright": "annihilation-suspected", "birch-trapped": "traps-suspected" };

function spread(name: string) {
  const args = ["spread", join(SAMPLES, `${name}.tif`), "--json", "-o", join(folder, name)];
  const { code, out, err } = gleamwalk(args);
  expect(err).toBe("");
  return { code, result: resultSchema.parse(JSON.parse(out)) };
}

const holds = (quantity: Quantity | null, truth: number): boolean =>
  quantity !== null && quantity.interval95[0] <= truth && truth <= quantity.interval95[1];

describe("the sample recordings", () => {
  test.each(PLAIN)("%s: the truth lies inside every interval, and the verdict is sound", (name) => {
    const truth = JSON.parse(readFileSync(join(SAMPLES, `${name}.truth.json`), "utf8"));
    const { code, result } = spread(name);
    const { diffusion_coefficient, lifetime, diffusion_length, mobility } = result.quantities;
    expect({ code, level: result.verdict.level }).toEqual({ code: 0, level: "sound" });
    expect(holds(diffusion_coefficient, truth.diffusion_coefficient_cm2_per_s)).toBe(true);
    expect(holds(lifetime, truth.lifetime_ns)).toBe(true);
    expect(holds(diffusion_length, truth.diffusion_length_um)).toBe(true);
    expect(holds(mobility, truth.mobility_cm2_per_v_s)).toBe(true);
  });

  test.each(Object.entries(DOUBTFUL))("%s is not called sound, and %s is named", (name, code) => {
    const { verdict } = spread(name).result;
    expect(verdict.level).not.toBe("sound");
    expect(verdict.reasons.map((reason) => reason.code)).toContain(code);
  });

  test("alder-cut, half a file, is refused", () => {
    const { code, err } = gleamwalk(["spread", join(SAMPLES, "alder-cut.tif"), "-o", join(folder, "cut")]);
    expect(code).toBe(2);
    expect(err).toMatch(/^gleamwalk: .*alder-cut\.tif is damaged or was cut/);
  });

  test("are all in one of these lists", () => {
    const names = readdirSync(SAMPLES).filter((name) => name.endsWith(".tif"));
    const known = [...PLAIN, ...Object.keys(DOUBTFUL), "alder-cut"];
    expect(names.map((name) => name.replace(".tif", "")).sort()).toEqual(known.sort());
  });
});
