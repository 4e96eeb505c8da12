import { inverse, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { invertSymmetric, solveSymmetric } from "../../src/numerics/linear-algebra.ts";

/** The Hilbert matrix h_ij = 1/(i+j+1): its inverse has integer entries (Choi, Am. Math. Mon. 90 (1983) 301). */
function hilbert(n: number): Float64Array {
  return Float64Array.from({ length: n * n }, (_, k) => 1 / (Math.floor(k / n) + (k % n) + 1));
}

describe("invertSymmetric", () => {
  it("inverts the 3×3 Hilbert matrix to its integer inverse", () => {
    const a = hilbert(3);
    expect(invertSymmetric(a, 3)).toBe(true);
    const exact = [9, -36, 30, -36, 192, -180, 30, -180, 180];
    exact.forEach((value, k) => {
      expect(a[k]!).toBeCloseTo(value, 9);
    });
  });

  it("agrees with ml-matrix for n from 1 to 8", () => {
    for (let n = 1; n <= 8; n++) {
      const b = Matrix.from1DArray(
        n,
        n,
        Array.from({ length: n * n }, (_, k) => Math.sin(1.7 * k * k + n)),
      );
      const symmetric = b.mmul(b.transpose()).add(Matrix.eye(n, n));
      const expected = inverse(symmetric).to1DArray();
      const a = Float64Array.from(symmetric.to1DArray());
      expect(invertSymmetric(a, n)).toBe(true);
      expected.forEach((value, k) => {
        expect(a[k]!).toBeCloseTo(value, 10);
      });
    }
  });

  it("keeps every digit with rows in very different units", () => {
    const a = Float64Array.from([4e200, 1e20, 1e20, 1e-160]);
    expect(invertSymmetric(a, 2)).toBe(true);
    // Closed form: 1/(ad − b²)·[d, −b; −b, a], with ad − b² = 3e40.
    expect(a[0]! / (1e-160 / 3e40)).toBeCloseTo(1, 12);
    expect(a[1]! / (-1e20 / 3e40)).toBeCloseTo(1, 12);
    expect(a[3]! / (4e200 / 3e40)).toBeCloseTo(1, 12);
  });

  it("refuses a matrix that is indefinite, singular or holds a NaN", () => {
    expect(invertSymmetric(Float64Array.from([1, 2, 2, 1]), 2)).toBe(false);
    expect(invertSymmetric(Float64Array.from([1, 1, 1, 1]), 2)).toBe(false);
    expect(invertSymmetric(Float64Array.from([0, 0, 0, 1]), 2)).toBe(false);
    expect(invertSymmetric(Float64Array.from([1, Number.NaN, Number.NaN, 1]), 2)).toBe(false);
  });
});

describe("solveSymmetric", () => {
  it("solves the 4×4 Hilbert system whose solution is all ones", () => {
    const a = hilbert(4);
    const b = Float64Array.from({ length: 4 }, (_, i) =>
      a.subarray(4 * i, 4 * i + 4).reduce((s, v) => s + v),
    );
    expect(solveSymmetric(a, 4, b)).toBe(true);
    for (const value of b) expect(value).toBeCloseTo(1, 11);
  });

  it("leaves the right-hand side alone where the matrix is not positive definite", () => {
    const b = Float64Array.from([1, 2]);
    expect(solveSymmetric(Float64Array.from([1, 2, 2, 1]), 2, b)).toBe(false);
    expect([...b]).toEqual([1, 2]);
  });
});
