import { describe, expect, it } from "vitest";
import { laguerreBasis } from "../../../src/field/similar/laguerre-basis.ts";

describe("the basis that spreads with the spot", () => {
  it("has the nodes and weights of Abramowitz and Stegun, table 25.9, n = 4, for round functions", () => {
    const { z, rootWeights } = laguerreBasis(0, 4);
    const nodes = [0.322547689619, 1.745761101158, 4.53662029692, 9.395070912301];
    const weights = [0.603154104342, 0.357418692438, 0.038887908515, 0.000539294705561];
    nodes.forEach((node, j) => {
      expect(z[j]! / node).toBeCloseTo(1, 11);
      expect(rootWeights[j]! ** 2 / weights[j]!).toBeCloseTo(1, 9);
    });
  });

  it("has the even Hermite polynomials He₂ = x² − 1 and He₄ = x⁴ − 6x² + 3 along an axis", () => {
    const row = new Float64Array(3);
    const x = 1.3;
    laguerreBasis(-0.5, 3).evaluate((x * x) / 2, 1, 3, row, 0);
    expect(row[1]).toBeCloseTo((x ** 2 - 1) / Math.sqrt(2), 12);
    expect(row[2]).toBeCloseTo((x ** 4 - 6 * x ** 2 + 3) / Math.sqrt(24), 12);
  });

  it("turns node values into coefficients orthogonally, far nodes with weights of 1e-60 too", () => {
    const { vectors, size } = laguerreBasis(0, 48);
    for (const [k, l] of [
      [0, 0],
      [3, 3],
      [47, 47],
      [0, 5],
      [20, 47],
    ] as const) {
      let sum = 0;
      for (let j = 0; j < size; j++) sum += vectors[k * size + j]! * vectors[l * size + j]!;
      expect(sum).toBeCloseTo(k === l ? 1 : 0, 11);
    }
  });
});
