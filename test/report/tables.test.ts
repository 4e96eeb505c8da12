import { describe, expect, it } from "vitest";
import { resultSchema } from "../../src/outcome/result.ts";
import { framesCsv } from "../../src/report/csv.ts";
import { resultJson } from "../../src/report/json.ts";
import { makeAnalysis } from "./fixture.ts";

const { result } = makeAnalysis("good");

describe("framesCsv", () => {
  const lines = framesCsv(result.frames).trimEnd().split("\n");

  it("names every column with its unit", () => {
    expect(lines[0]).toBe(
      "index,delay_ns,photons,u_photons,x_um,y_um,variance_um2,u_variance_um2,variance_xx_um2,variance_xy_um2," +
        "variance_yy_um2,msd_um2,u_msd_um2,background_photons_per_pixel,reduced_chi2,hot_pixels,used,used_in_decay,flags",
    );
  });

  it("has a line a frame, every line with as many fields as the heading", () => {
    expect(lines).toHaveLength(1 + result.frames.length);
    for (const line of lines) expect(line.split(",")).toHaveLength(19);
  });

  it("leaves a field empty where a frame has no such number, and joins flags by a space", () => {
    expect(lines[1]).toBe("0,-1,,,,,,,,,,,,,,0,false,false,before-pulse fit-failed");
  });

  it("keeps every digit", () => {
    expect(Number(lines[5]?.split(",")[6])).toBe(result.frames[4]?.variance_um2);
  });

  it("refuses a number that is not finite", () => {
    const broken = { ...result.frames[0]!, photons: Number.NaN };
    expect(() => framesCsv([broken])).toThrow(/not finite/);
  });
});

describe("resultJson", () => {
  it("reads back to the same result, which fits the published schema", () => {
    const read: unknown = JSON.parse(resultJson(result));
    expect(read).toEqual(result);
    expect(resultSchema.safeParse(read).success).toBe(true);
  });

  it("keeps a frame on one line", () => {
    const rows = resultJson(result)
      .split("\n")
      .filter((line) => line.startsWith('    {"index":'));
    expect(rows).toHaveLength(result.frames.length);
  });

  it("refuses a number that is not finite and names its key", () => {
    const broken = structuredClone(result);
    broken.quantities.diffusion_coefficient.u = Number.NaN;
    expect(() => resultJson(broken)).toThrow(
      "result.quantities.diffusion_coefficient.u is not a finite number",
    );
    const endless = structuredClone(result);
    endless.frames[3]!.photons = Number.POSITIVE_INFINITY;
    expect(() => resultJson(endless)).toThrow("result.frames.3.photons is not a finite number");
  });
});
