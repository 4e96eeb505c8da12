import { describe, expect, it } from "vitest";
import { fitLeastSquares, type LeastSquaresFit } from "../../src/numerics/least-squares.ts";
import { nistModels } from "./nist-models.ts";
import { digitsOf, type NonlinearSet, readDecimals, readNonlinear } from "./nist-strd.ts";

type Digits = [parameters: number, deviations: number];

/**
 * All 27 nonlinear sets of NIST's Statistical Reference Datasets from both of NIST's starts, with derivatives by
 * central differences and no setting that depends on the set.
 *
 * Digits reached of the worst certified parameter and of the worst certified standard deviation (11 are certified),
 * rounded down; [0, 0] is a fit that failed and says so. Two blemishes:
 * - MGH10 from start 1 creeps along a curved valley and runs into the iteration limit.
 * - Lanczos1 has residuals of 1e-13, which data and predictions in double precision hold to three digits, and its
 *   standard deviations hang on them. The second test below gives the same data more digits.
 */
const reached: [set: string, start1: Digits, start2: Digits][] = [
  ["Misra1a", [10, 9], [10, 9]],
  ["Chwirut2", [10, 10], [9, 9]],
  ["Chwirut1", [9, 9], [10, 9]],
  ["Lanczos3", [7, 7], [8, 7]],
  ["Gauss1", [10, 8], [10, 8]],
  ["Gauss2", [10, 8], [10, 8]],
  ["DanWood", [10, 10], [10, 10]],
  ["Misra1b", [10, 8], [10, 9]],
  ["Kirby2", [9, 9], [9, 9]],
  ["Hahn1", [8, 8], [8, 8]],
  ["Nelson", [8, 8], [8, 8]],
  ["MGH17", [8, 8], [8, 8]],
  ["Lanczos1", [10, 2], [10, 2]],
  ["Lanczos2", [8, 6], [8, 6]],
  ["Gauss3", [10, 8], [10, 8]],
  ["Misra1c", [10, 8], [10, 9]],
  ["Misra1d", [10, 9], [10, 10]],
  ["Roszman1", [9, 9], [9, 9]],
  ["ENSO", [8, 7], [7, 7]],
  ["MGH09", [8, 8], [7, 7]],
  ["Thurber", [7, 7], [9, 8]],
  ["BoxBOD", [9, 9], [9, 9]],
  ["Rat42", [10, 9], [10, 9]],
  ["MGH10", [0, 0], [9, 7]],
  ["Eckerle4", [9, 6], [9, 6]],
  ["Rat43", [9, 9], [8, 8]],
  ["Bennett5", [9, 7], [7, 7]],
];

function fitFrom(name: string, set: NonlinearSet, start: number[]): LeastSquaresFit {
  const model = nistModels[name]!;
  const rows = set.y.map((_, i) => set.x.map((column) => column[i]!));
  return fitLeastSquares({
    prediction: (p) => rows.map((x) => model(p, x)),
    y: name === "Nelson" ? set.y.map(Math.log) : set.y,
    start,
    maxIterations: 2000,
  });
}

const least = (values: readonly number[], certified: readonly number[]) =>
  Math.min(...certified.map((value, j) => digitsOf(values[j]!, value)));

describe("the nonlinear sets of NIST's Statistical Reference Datasets", () => {
  it("are all in the table", () => {
    expect(reached.map(([name]) => name).sort()).toEqual(Object.keys(nistModels).sort());
    expect(reached).toHaveLength(27);
  });

  it("reach six digits in parameters and standard deviations from start 2, but for the Lanczos1 deviations", () => {
    const short = reached.filter(([, , start2]) => Math.min(...start2) < 6).map(([name]) => name);
    expect(short).toEqual(["Lanczos1"]);
  });

  it.each(reached)("%s: digits from start 1 %j, from start 2 %j", (name, ...digits) => {
    const set = readNonlinear(name);
    digits.forEach(([parameters, deviations], k) => {
      const fit = fitFrom(name, set, set.starts[k]!);
      expect(fit.converged).toBe(parameters > 0);
      expect(least(fit.parameters, set.certified)).toBeGreaterThanOrEqual(parameters);
      expect(least(fit.standardErrors, set.certifiedDeviations)).toBeGreaterThanOrEqual(deviations);
    });
  });
});

describe("Lanczos1 with its data to more digits than double precision holds", () => {
  // The data are f(x) at c = (0.0951, 1, 0.8607, 3, 1.5576, 5), rounded at the 14th digit. In offsets from f(c) and from
  // c the problem is the same, but its residuals keep their digits: b₁e^(−b₂x) − c₁e^(−c₂x) is written with expm1.
  const centre = [0.0951, 1, 0.8607, 3, 1.5576, 5];
  const points = readDecimals("Lanczos1");
  const offsets = points.map(({ y, x }) => {
    const terms = ["0.0951", "0.8607", "1.5576"].map((b, k) =>
      times(fixed(b), expOfMinus(fixed(x), [1n, 3n, 5n][k]!)),
    );
    return Number(fixed(y) - terms.reduce((sum, term) => sum + term)) / Number(ONE);
  });
  const set = readNonlinear("Lanczos1");

  it.each([1, 2])(
    "reaches nine digits in parameters, deviations and sum of squares from start %i",
    (which) => {
      const fit = fitLeastSquares({
        prediction: (d) =>
          points.map(({ x }) => {
            let sum = 0;
            for (let j = 0; j < 6; j += 2) {
              const grown = (centre[j]! + d[j]!) * Math.expm1(-d[j + 1]! * Number(x));
              sum += Math.exp(-centre[j + 1]! * Number(x)) * (d[j]! + grown);
            }
            return sum;
          }),
        y: offsets,
        start: set.starts[which - 1]!.map((value, j) => value - centre[j]!),
        scale: centre,
      });
      expect(fit.reason).toBe("minimum reached");
      expect(
        least(
          fit.parameters.map((d, j) => centre[j]! + d),
          set.certified,
        ),
      ).toBeGreaterThanOrEqual(9);
      expect(least(fit.standardErrors, set.certifiedDeviations)).toBeGreaterThanOrEqual(9);
      expect(digitsOf(fit.chi2, set.residualSumOfSquares)).toBeGreaterThanOrEqual(9);
    },
  );
});

// Fixed-point arithmetic with 40 decimals.
const ONE = 10n ** 40n;

function fixed(decimal: string): bigint {
  const [, digits, exponent] = /^([\d.]+)(?:[eE]([+-]?\d+))?$/.exec(decimal)!;
  const [whole, fraction = ""] = digits!.split(".");
  const shift = 40 - fraction.length + Number(exponent ?? 0);
  return BigInt(whole! + fraction) * 10n ** BigInt(shift);
}

function times(a: bigint, b: bigint): bigint {
  return (a * b) / ONE;
}

/** e^(−rate·x) by the power series of e^(+…), which has no cancellation, inverted. */
function expOfMinus(x: bigint, rate: bigint): bigint {
  const power = x * rate;
  let sum = 0n;
  let term = ONE;
  for (let n = 1n; term > 0n; n++) {
    sum += term;
    term = times(term, power) / n;
  }
  return (ONE * ONE) / sum;
}
