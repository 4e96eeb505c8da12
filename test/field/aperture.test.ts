import { describe, expect, it } from "vitest";
import { lightPerPixel } from "../../src/field/aperture.ts";
import { normalShare } from "../../src/field/gaussian-light.ts";
import { coordinate, type Grid } from "../../src/field/grid.ts";
import type { Recording } from "../../src/field/recording.ts";
import { Transform } from "../../src/field/transform.ts";

const GRID: Grid = { nx: 64, ny: 32, hx: 0.1, hy: 0.2 };

/** Two Gaussians off the centre: a field without symmetry, whose pixel integrals are known. */
const SPOTS = [
  { amount: 2, x: 0.4, y: -0.3, variance: 0.2 },
  { amount: 1, x: -0.7, y: 0.6, variance: 0.25 },
];

function spectrumOfSpots(): Float64Array {
  const field = new Float64Array(GRID.nx * GRID.ny);
  for (let i = 0; i < field.length; i++) {
    const x = coordinate(i % GRID.nx, GRID.nx, GRID.hx);
    const y = coordinate(Math.floor(i / GRID.nx), GRID.ny, GRID.hy);
    for (const spot of SPOTS) {
      const r2 = (x - spot.x) ** 2 + (y - spot.y) ** 2;
      field[i] =
        field[i]! + (spot.amount / (2 * Math.PI * spot.variance)) * Math.exp((-0.5 * r2) / spot.variance);
    }
  }
  const transform = new Transform(GRID);
  const spectrum = transform.spectrum();
  transform.toSpectrum(field, spectrum);
  return spectrum;
}

function recording(parts: Partial<Recording>): Recording {
  return {
    columns: 17,
    rows: 11,
    pixelX: 0.13,
    pixelY: 0.21,
    delays: [0],
    gate: 0,
    period: null,
    responseSigma: 0,
    psfVariance: 0,
    centre: [0, 0],
    drift: [0, 0],
    ...parts,
  };
}

describe("lightPerPixel", () => {
  it.each([0, 0.05])(
    "gives the normal integrals of a lopsided field over pixels that do not fit the grid, blur variance %d",
    (psfVariance) => {
      const place = [1.11, 1.07] as const;
      const seen = recording({ psfVariance });
      const frame = lightPerPixel(GRID, spectrumOfSpots(), seen, place);
      for (let iy = 0; iy < seen.rows; iy++) {
        for (let ix = 0; ix < seen.columns; ix++) {
          let exact = 0;
          for (const { amount, x, y, variance } of SPOTS) {
            const sd = Math.sqrt(variance + psfVariance);
            const share = (i: number, size: number, at: number) =>
              normalShare((i - 0.5) * size - at, (i + 0.5) * size - at, sd);
            exact += amount * share(ix, 0.13, place[0] + x) * share(iy, 0.21, place[1] + y);
          }
          expect(frame[iy * seen.columns + ix]!).toBeCloseTo(exact, 7);
        }
      }
    },
  );

  it("sees nothing beyond the grid's border, where the field would repeat itself", () => {
    const frame = lightPerPixel(GRID, spectrumOfSpots(), recording({ columns: 2, pixelX: 6.4 }), [0, 1]);
    const row = 5 * 2;
    expect(frame[row]!).toBeGreaterThan(0);
    // the second pixel reaches from 3.2 to 9.6, the grid ends at 3.2
    expect(frame[row + 1]!).toBe(0);
  });
});

describe("Transform", () => {
  it("gives Σ f·exp(−i q·r) of a field, and the field back", () => {
    const field = Float64Array.from({ length: GRID.nx * GRID.ny }, (_, i) => Math.sin(i * i));
    const transform = new Transform(GRID);
    const spectrum = transform.spectrum();
    transform.toSpectrum(field, spectrum);
    for (const [kx, ky] of [
      [0, 0],
      [3, 5],
      [31, 30],
      [32, 16],
    ] as const) {
      let [re, im] = [0, 0];
      field.forEach((f, i) => {
        const angle =
          -2 * Math.PI * ((kx * (i % GRID.nx)) / GRID.nx + (ky * Math.floor(i / GRID.nx)) / GRID.ny);
        re += f * Math.cos(angle);
        im += f * Math.sin(angle);
      });
      expect(spectrum[2 * (kx * GRID.ny + ky)]!).toBeCloseTo(re, 8);
      expect(spectrum[2 * (kx * GRID.ny + ky) + 1]!).toBeCloseTo(im, 8);
    }
    const back = new Float64Array(field.length);
    transform.toField(spectrum, back);
    back.forEach((f, i) => {
      expect(Math.abs(f - field[i]!)).toBeLessThan(1e-12);
    });
  });
});
