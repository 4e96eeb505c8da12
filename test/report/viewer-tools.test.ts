import { runInNewContext } from "node:vm";
import { describe, expect, it } from "vitest";
import { colourRamps } from "../../src/report/viewer-colours.ts";
import { modelCells, residualCells } from "../../src/report/viewer-model.ts";

const region = { left: 3, top: 5, columns: 30, rows: 32, bin: 2, binDown: 2 };
const map = { kind: "map", region, pixel: 0.1, excessNoise: 2, darkVariance: 0.25 } as const;
/** N, x, y, Σxx, Σxy, Σyy, B: well inside the region, tilted. */
const spot = [5000, 3.31, 3.73, 0.16, 0.05, 0.12, 0.3];

/** Sum, mean and second moments of cells whose background is taken off, in µm. */
function moments(cells: Float64Array) {
  const light = cells.map((value) => value - 4 * 0.3);
  const total = light.reduce((a, b) => a + b, 0);
  const x = (k: number) => (region.left + (k % region.columns) * 2 + 0.5) * 0.1;
  const y = (k: number) => (region.top + Math.floor(k / region.columns) * 2 + 0.5) * 0.1;
  const mean = (f: (k: number) => number) => light.reduce((sum, value, k) => sum + value * f(k), 0) / total;
  const [cx, cy] = [mean(x), mean(y)];
  return {
    total,
    cx,
    cy,
    xx: mean((k) => (x(k) - cx) ** 2),
    xy: mean((k) => (x(k) - cx) * (y(k) - cy)),
    yy: mean((k) => (y(k) - cy) ** 2),
  };
}

describe("modelCells", () => {
  it("has the volume, centre and covariance of its spot, with the a²/4 that cells of two pixels add (closed form)", () => {
    const found = moments(modelCells(spot, map));
    expect(found.total).toBeCloseTo(5000, 3);
    expect(found.cx).toBeCloseTo(3.31, 5);
    expect(found.cy).toBeCloseTo(3.73, 5);
    // light at pixel centres, a/2 to either side of the middle of its cell, is counted at the middle: (a/2)² more
    expect(found.xx).toBeCloseTo(0.16 + 0.0025, 4);
    expect(found.xy).toBeCloseTo(0.05, 4);
    expect(found.yy).toBeCloseTo(0.12 + 0.0025, 4);
  });

  it("has the area of its spot on a trace", () => {
    const trace = { ...map, kind: "trace", region: { ...region, top: 0, rows: 1, binDown: 1 } } as const;
    const cells = modelCells([800, 3.3, 0, 0.2, 0, 0, 0.5], trace);
    expect(cells.reduce((a, b) => a + b, 0)).toBeCloseTo(800 + 60 * 0.5, 3);
  });
});

describe("residualCells", () => {
  it("divides by the detector's noise: √(excess·model + dark variance of four pixels)", () => {
    const residuals = residualCells(Float64Array.of(12, 0), Float64Array.of(4, 0), map);
    expect(residuals[0]).toBeCloseTo(8 / 3, 12);
    expect(residuals[1]).toBe(0);
  });
});

describe("colourRamps", () => {
  const { light, residual } = colourRamps();
  const lightness = (ramp: Uint8ClampedArray, i: number) =>
    cieLightness([...ramp.subarray(4 * i, 4 * i + 3)]);

  it("rise evenly in lightness from dark to bright (CIE 1976 L*)", () => {
    const values = Array.from({ length: 256 }, (_, i) => lightness(light, i));
    for (let i = 1; i < 256; i++) expect((values[i] ?? 0) - (values[i - 1] ?? 0)).toBeGreaterThan(-0.2);
    const quarters = [0, 64, 128, 191, 255].map((i) => values[i] ?? 0);
    for (let i = 1; i < 5; i++) expect((quarters[i] ?? 0) - (quarters[i - 1] ?? 0)).toBeGreaterThan(18);
  });

  it("fall alike to both sides of zero for residuals", () => {
    for (const i of [0, 40, 80, 120]) {
      expect(Math.abs(lightness(residual, i) - lightness(residual, 255 - i))).toBeLessThan(4);
      expect(lightness(residual, i)).toBeLessThan(lightness(residual, 127) - (127 - i) / 4);
    }
  });
});

describe("the text of each function", () => {
  it("works on its own, as it must in a page", () => {
    const alone = <T>(source: T): T => runInNewContext(`(${source})`, {});
    expect([...alone(modelCells)(spot, map)]).toEqual([...modelCells(spot, map)]);
    expect([...alone(colourRamps)().light]).toEqual([...colourRamps().light]);
    expect([...alone(residualCells)(Float64Array.of(12), Float64Array.of(4), map)]).toEqual([8 / 3]);
  });
});

/** CIE 1976 lightness of an sRGB colour (IEC 61966-2-1 transfer and luminance, from memory). */
function cieLightness(rgb: readonly number[]): number {
  const [r = 0, g = 0, b = 0] = rgb.map((byte) => {
    const c = byte / 255;
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4;
  });
  const luminance = 0.2126 * r + 0.7152 * g + 0.0722 * b;
  return luminance > 0.008856 ? 116 * Math.cbrt(luminance) - 16 : 903.3 * luminance;
}
