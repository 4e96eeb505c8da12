import { deflateSync, inflateSync } from "node:zlib";
import { describe, expect, it } from "vitest";
import type { Analysis } from "../../src/outcome/analysis.ts";
import { viewerData } from "../../src/report/viewer-data.ts";
import { makeAnalysis } from "./fixture.ts";

/** The cells of one shown frame as the page reads them. */
function unpack(
  analysis: Analysis,
  place: number,
): { cells: number[]; view: ReturnType<typeof viewerData>["data"] } {
  const { data, cells } = viewerData(analysis, (bytes) => deflateSync(bytes).toString("base64"));
  const bytes = inflateSync(Buffer.from(cells, "base64"));
  const half = bytes.length / 2;
  const size = data.region.columns * data.region.rows;
  expect(half).toBe(size * data.frames.length);
  const level = (k: number) => (bytes[k] ?? 0) + 256 * (bytes[half + k] ?? 0);
  return {
    cells: Array.from({ length: size }, (_, k) => data.low + data.step * level(place * size + k)),
    view: data,
  };
}

/** Photons of one cell straight from the stack's counts. */
function photonsOf(
  analysis: Analysis,
  frame: number,
  view: ReturnType<typeof viewerData>["data"],
  cell: number,
): number {
  const { stack } = analysis;
  const { region } = view;
  const counts = new Float64Array(stack.width * stack.height);
  stack.read(frame, counts);
  const { offset, gain } = stack.acquisition.detector;
  let sum = 0;
  for (let dy = 0; dy < region.binDown; dy++) {
    for (let dx = 0; dx < region.bin; dx++) {
      const y = region.top + Math.floor(cell / region.columns) * region.binDown + dy;
      const x = region.left + (cell % region.columns) * region.bin + dx;
      sum += ((counts[y * stack.width + x] ?? 0) - offset) / gain;
    }
  }
  return sum;
}

/** The same recording several times over: long, and quickly made. */
function repeated(short: Analysis, times: number): Analysis {
  const repeat = <T>(items: readonly T[]): T[] => Array.from({ length: times }, () => items).flat();
  const { frames } = short.stack;
  return {
    ...short,
    spots: repeat(short.spots),
    stack: {
      ...short.stack,
      frames: frames * times,
      read: (index, into) => short.stack.read(index % frames, into),
    },
    result: { ...short.result, frames: repeat(short.result.frames).map((row, index) => ({ ...row, index })) },
  };
}

describe("viewerData", () => {
  it("gives counted photons back exactly", () => {
    const analysis = makeAnalysis("trapped");
    const { cells, view } = unpack(analysis, 5);
    cells.forEach((value, cell) => {
      expect(value).toBeCloseTo(photonsOf(analysis, 5, view, cell), 9);
    });
  });

  it("gives a camera's light back to within an eighth of its dark noise", () => {
    const analysis = makeAnalysis("good");
    const { cells, view } = unpack(analysis, 5);
    const noise = Math.sqrt(view.region.bin ** 2 * (2 * 0.4 + (6 / 8) ** 2));
    cells.forEach((value, cell) => {
      expect(Math.abs(value - photonsOf(analysis, 5, view, cell))).toBeLessThanOrEqual(noise / 8 + 1e-9);
    });
  });

  it("keeps 200 large frames well under 2 MB, at most 64 cells a side, centred on the spot", () => {
    const analysis = repeated(makeAnalysis("good", { frames: 40, side: 150 }), 5);
    const { data, cells } = viewerData(analysis, (bytes) =>
      deflateSync(bytes, { level: 3 }).toString("base64"),
    );
    expect(cells.length + JSON.stringify(data).length).toBeLessThan(1_500_000);
    expect(data.frames).toHaveLength(200);
    const { region } = data;
    expect(Math.max(region.columns, region.rows)).toBeLessThanOrEqual(64);
    const spot = analysis.spots[20];
    const middle = (region.left + (region.columns * region.bin) / 2) * 0.1;
    expect(Math.abs(middle - (spot?.centre[0] ?? 0))).toBeLessThan(0.5);
  });

  it("shows one in so many frames of a very long recording", () => {
    const analysis = repeated(makeAnalysis("good", { frames: 100, side: 64 }), 16);
    const { data } = viewerData(analysis, (bytes) => deflateSync(bytes, { level: 1 }).toString("base64"));
    expect(data.stride).toBeGreaterThan(1);
    expect(data.frames).toHaveLength(Math.ceil(1600 / data.stride));
  });

  it("describes each frame with its numbers in concise notation and its flags in words", () => {
    const { view } = unpack(makeAnalysis("trapped"), 0);
    expect(view.frames[0]).toMatchObject({
      title: "Frame 0 (0 to 49), −1 ns",
      spot: null,
      flags: "before the pulse, spot fit failed",
    });
    expect(view.frames[30]?.flags).toBe("trap-dominated");
    expect(view.frames[2]?.numbers).toContainEqual(["Delay", "0 ns"]);
    expect(view.frames[2]?.numbers.find(([label]) => label === "Light")?.[1]).toMatch(
      /^\d\.\d+\(\d+\)×10⁴ photons$/,
    );
  });
});
