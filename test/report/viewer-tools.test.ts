import { runInNewContext } from "node:vm";
import { randomPoisson } from "d3-random";
import { uniformFloat64 } from "pure-rand/distribution/uniformFloat64";
import { xoroshiro128plus } from "pure-rand/generator/xoroshiro128plus";
import { describe, expect, it } from "vitest";
import { colourRamps } from "../../src/report/viewer-colours.ts";
import { cutShapes, shortNumber } from "../../src/report/viewer-cut.ts";
import { modelCells, residualCells, wholeModelCells } from "../../src/report/viewer-model.ts";
import { overlayShapes } from "../../src/report/viewer-overlay.ts";
import { inGroups, residualSum } from "../../src/report/viewer-sum.ts";

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

describe("residualSum", () => {
  const small = { ...map, region: { left: 0, top: 0, columns: 5, rows: 3, bin: 1, binDown: 1 } };
  const flat = (value: number) => new Float64Array(15).fill(value);

  it("adds frames and cells: n cells that are d too bright give n·d / √(n·variance)", () => {
    const frames = [0, 1, 2].map(() => ({ light: flat(11), model: flat(10), struck: 0 }));
    const { columns, rows, cells } = residualSum(frames, small, 2);
    expect([columns, rows]).toEqual([3, 2]);
    const variance = 2 * 10 + 0.25;
    // 3 frames of 2 × 2 cells; at the ragged edges 3 frames of 2, and of one cell
    expect(cells[0]).toBeCloseTo(12 / Math.sqrt(12 * variance), 12);
    expect(cells[2]).toBeCloseTo(6 / Math.sqrt(6 * variance), 12);
    expect(cells[5]).toBeCloseTo(3 / Math.sqrt(3 * variance), 12);
  });

  it("has an rms of 1 where the model is right: 900 sums of Poisson counts, to four standard errors", () => {
    const generator = xoroshiro128plus(7);
    const draw = randomPoisson.source(() => uniformFloat64(generator))(6);
    const counting = {
      region: { left: 0, top: 0, columns: 60, rows: 60, bin: 1, binDown: 1 },
      excessNoise: 1,
      darkVariance: 0,
    };
    const frames = [0, 1, 2, 3].map(() => ({
      light: Float64Array.from({ length: 3600 }, () => draw()),
      model: new Float64Array(3600).fill(6),
      struck: 0,
    }));
    const { rms } = residualSum(frames, counting, 2);
    expect(Math.abs((rms ?? 0) - 1)).toBeLessThan(4 / Math.sqrt(2 * 900));
  });

  it("leaves out as many struck cells as the fits did, and no cell that does not stand out as they do", () => {
    const struck = flat(10);
    struck[7] = 900;
    const of = (count: number) => residualSum([{ light: struck, model: flat(10), struck: count }], small, 1);
    expect(of(1).cells[7]).toBe(0);
    // 5.5 √20.25 + 5 · 2 photons is what the fits ask for
    expect(of(0).cells[7]).toBeCloseTo(890 / Math.sqrt(20.25), 12);
    struck[7] = 10 + 5.5 * Math.sqrt(20.25) + 9.9;
    expect(of(1).cells[7]).toBeGreaterThan(5.5);
  });

  it("claims no rms where light is too dim to say", () => {
    const dark = { ...small, excessNoise: 1, darkVariance: 0 };
    expect(residualSum([{ light: flat(0), model: flat(0.1), struck: 0 }], dark, 2).rms).toBe(null);
    expect(residualSum([], dark, 2).rms).toBe(null);
  });
});

describe("inGroups", () => {
  it("cuts places into consecutive groups that differ by one at most, never an empty one", () => {
    expect(inGroups([3, 4, 5, 7, 8, 9, 10], 3)).toEqual([
      [3, 4],
      [5, 7, 8],
      [9, 10],
    ]);
    expect(inGroups([4, 6], 3)).toEqual([[4], [6]]);
    expect(inGroups([], 3)).toEqual([]);
  });
});

describe("overlayShapes", () => {
  it("turns the ellipse of a covariance R(30°) diag(0.25, 0.04) Rᵀ to 30° with half-axes 0.5 and 0.2 µm", () => {
    const [c, s] = [Math.cos(Math.PI / 6), Math.sin(Math.PI / 6)];
    const [xx, xy, yy] = [0.25 * c * c + 0.04 * s * s, (0.25 - 0.04) * c * s, 0.25 * s * s + 0.04 * c * c];
    const [ellipse, bar] = overlayShapes([1, 2.3, 3.1, xx, xy, yy, 0], map, 2);
    // cells of two pixels of 0.1 µm
    expect(Number(ellipse?.[1].rx)).toBeCloseTo(0.5 / 0.2, 9);
    expect(Number(ellipse?.[1].ry)).toBeCloseTo(0.2 / 0.2, 9);
    const [x, y, turn] = String(ellipse?.[1].transform)
      .match(/[-\d.]+/g)!
      .map(Number);
    expect(turn).toBeCloseTo(30, 9);
    // the centre of pixel 0 lies at 0 µm, half a pixel inside the picture
    expect(x).toBeCloseTo((23.5 - 3) / 2, 9);
    expect(y).toBeCloseTo((31.5 - 5) / 2, 9);
    expect(Number(bar?.[1].x2) - Number(bar?.[1].x1)).toBeCloseTo(2 / 0.2, 9);
  });

  it("draws nothing where there is neither spot nor bar", () => {
    expect(overlayShapes(null, map, null)).toEqual([]);
  });
});

describe("cutShapes", () => {
  const cut = { along: "x", points: [0, 5, 10, 5, 0], curve: [], ends: [1, 5] } as const;
  const dots = (shapes: ReturnType<typeof cutShapes>) =>
    shapes.flatMap(([name, { cx, cy }]) => (name === "circle" ? [[Number(cx), Number(cy)]] : []));

  it("places points evenly and in proportion, between axes with numbers at round places", () => {
    const shapes = cutShapes(cut, shortNumber);
    const [first, second, third] = dots(shapes);
    expect((second?.[0] ?? 0) - (first?.[0] ?? 0)).toBeCloseTo((third?.[0] ?? 0) - (second?.[0] ?? 0), 9);
    expect((first?.[1] ?? 0) - (second?.[1] ?? 0)).toBeCloseTo((second?.[1] ?? 0) - (third?.[1] ?? 0), 9);
    const label = shapes.find(([name, , text]) => name === "text" && text === "3");
    expect(Number(label?.[1].x)).toBeCloseTo(third?.[0] ?? 0, 9);
    expect(shapes.some(([name]) => name === "polyline")).toBe(false);
  });

  it("draws the model through the points that it meets", () => {
    const shapes = cutShapes({ ...cut, curve: cut.points }, shortNumber);
    const line = shapes.find(([name]) => name === "polyline")?.[1].points;
    expect(line).toBe(
      dots(shapes)
        .map(([x, y]) => `${x},${y}`)
        .join(" "),
    );
  });
});

describe("shortNumber", () => {
  it.each([
    [0.30000000000000004, "0.3"],
    [-2, "−2"],
    [12_345.6, "12346"],
    [2_500_000, "2.5e+6"],
    [0.0004, "4.0e−4"],
    [0, "0"],
  ])("%d is %s", (value, text) => {
    expect(shortNumber(value)).toBe(text);
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
    const compared = [{ light: Float64Array.of(900), model: Float64Array.of(4), struck: 0 }];
    expect(alone(residualSum)(compared, map, 2).cells[0]).toBe(residualSum(compared, map, 2).cells[0]);
    expect(alone(inGroups)([1, 2], 2)).toEqual([[1], [2]]);
    expect(alone(overlayShapes)(spot, map, 1)).toEqual(overlayShapes(spot, map, 1));
    const cut = { along: "y", points: [1, 2], curve: [1, 2], ends: [0, 1] } as const;
    expect(alone(cutShapes)(cut, alone(shortNumber))).toEqual(cutShapes(cut, shortNumber));
    const levels = Uint16Array.of(3);
    expect(alone(wholeModelCells)(levels, 0, 2, map)[0]).toBe(wholeModelCells(levels, 0, 2, map)[0]);
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
