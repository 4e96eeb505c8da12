import { deflateSync, inflateSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import type { Analysis } from "../../src/outcome/analysis.ts";
import { analysisOf, figureRequest } from "../../src/report/figure-request.ts";
import { viewerData } from "../../src/report/viewer-data.ts";
import { wholeModelCells } from "../../src/report/viewer-model.ts";
import { makeAnalysis } from "./fixture.ts";
import { roundLight, withField } from "./fixture-field.ts";

/** The whole-stack model's cells of one shown frame, as the page reads them. */
function unpack(analysis: Analysis, place: number) {
  const { data, wholeCells } = viewerData(analysis, (bytes) => deflateSync(bytes).toString("base64"));
  const bytes = inflateSync(Buffer.from(wholeCells, "base64"));
  const half = bytes.length / 2;
  const size = data.region.columns * data.region.rows;
  const levels = Uint16Array.from({ length: half }, (_, k) => (bytes[k] ?? 0) + 256 * (bytes[half + k] ?? 0));
  for (let k = size; k < half; k++) levels[k] = (levels[k] ?? 0) + (levels[k - size] ?? 0);
  return { data, cells: wholeModelCells(levels, place, data.whole?.step ?? Number.NaN, data) };
}

/** Photons in a cell straight from the model, pixel by pixel. */
function photons(analysis: Analysis, frame: number, { region, pixel }: ReturnType<typeof unpack>["data"]) {
  const { width, height } = analysis.stack;
  return (cell: number): number => {
    let sum = 0;
    for (let k = 0; k < region.bin * region.binDown; k++) {
      const x = region.left + (cell % region.columns) * region.bin + (k % region.bin);
      const y = region.top + Math.floor(cell / region.columns) * region.binDown + Math.floor(k / region.bin);
      sum += roundLight((x - width / 2) * pixel, (y - height / 2) * pixel, frame);
    }
    return sum;
  };
}

describe("the whole-stack model in the viewer", () => {
  it.each([
    ["counted photons", "trapped", 1, 0],
    ["an amplified camera", "good", 2, (6 / 8) ** 2],
  ] as const)(
    "comes back to within a hundredth of a standard deviation in every cell (%s)",
    (_, name, excess, dark) => {
      const analysis = withField(name);
      for (const place of [2, 30]) {
        const { data, cells } = unpack(analysis, place);
        const truth = photons(analysis, place, data);
        const area = data.region.bin * data.region.binDown;
        cells.forEach((value, cell) => {
          const sd = Math.sqrt(excess * truth(cell) + area * dark);
          // half a step in the root of the variance is a 40th; its square adds a little where a cell holds few photons
          expect(Math.abs(value - truth(cell))).toBeLessThan(sd / 40 + excess / 1600);
        });
      }
    },
  );

  it("is shown first where the headline comes from it, and names its candidate and the frames that it leaves out", () => {
    for (const adopted of [true, false]) {
      const { data } = viewerData(withField("good", { adopted }), () => "");
      expect(data.whole).toMatchObject({ name: "diffusion and annihilation", adopted, leftOut: [0, 1] });
    }
  });

  it("takes no room where none was fitted", () => {
    const { data, wholeCells } = viewerData(makeAnalysis("good"), () => "packed");
    expect(data.whole).toBe(null);
    expect(wholeCells).toBe("");
  });

  it("takes under 0.8 characters a cell, so that 800,000 cells stay well under 2 MB", () => {
    const { data, wholeCells } = viewerData(withField("trapped"), (bytes) =>
      deflateSync(bytes, { level: 3 }).toString("base64"),
    );
    const cells = data.frames.length * data.region.columns * data.region.rows;
    expect(wholeCells.length / cells).toBeLessThan(0.8);
  });

  it("is not sent to the drawing thread, which cannot be sent functions", () => {
    const sent = structuredClone(figureRequest(withField("good")));
    expect(analysisOf(sent).wholeLight).toBe(null);
    expect(analysisOf(sent).result.field?.preferred).toBe("annihilation");
  });
});
