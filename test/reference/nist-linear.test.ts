import { describe, expect, it } from "vitest";
import { fitLinear } from "../../src/numerics/linear-fit.ts";
import { digitsOf, readLinear } from "./nist-strd.ts";

const powers = (x: number[], from: number, to: number) =>
  Array.from({ length: to - from + 1 }, (_, k) => x.map((value) => value ** (from + k)));

function designOf(name: string, x: number[][]): number[][] {
  const [first] = x;
  if (name === "Longley") return [first!.map(() => 1), ...x];
  if (name.startsWith("NoInt")) return [first!];
  const degree = name === "Norris" ? 1 : name === "Pontius" ? 2 : name === "Filip" ? 10 : 5;
  return powers(first!, 0, degree);
}

const least = (values: readonly number[], certified: readonly number[]) =>
  Math.min(...certified.map((value, j) => (value === 0 ? 11 : digitsOf(values[j]!, value))));

/**
 * Digits reached of the certified parameters and standard deviations, rounded down. Filip is a polynomial of degree 10
 * whose scaled design has a condition number near 1e10.
 */
const reached: [name: string, parameters: number, deviations: number][] = [
  ["Norris", 11, 11],
  ["Pontius", 11, 11],
  ["NoInt1", 11, 11],
  ["NoInt2", 11, 11],
  ["Filip", 7, 7],
  ["Longley", 10, 11],
  ["Wampler1", 11, 11],
  ["Wampler2", 11, 11],
  ["Wampler3", 10, 11],
  ["Wampler4", 8, 11],
  ["Wampler5", 6, 11],
];

describe("the linear sets of NIST's Statistical Reference Datasets", () => {
  it.each(reached)(
    "%s: parameters to %i digits, standard deviations to %i",
    (name, digits, deviationDigits) => {
      const set = readLinear(name);
      const fit = fitLinear({ design: designOf(name, set.x), y: set.y });
      expect(fit.parameters).toHaveLength(set.certified.length);
      expect(least(fit.parameters, set.certified)).toBeGreaterThanOrEqual(digits);
      expect(least(fit.standardErrors, set.certifiedDeviations)).toBeGreaterThanOrEqual(deviationDigits);
      if (set.residualDeviation > 0) {
        const deviation = Math.sqrt(fit.chi2 / fit.degreesOfFreedom);
        expect(digitsOf(deviation, set.residualDeviation)).toBeGreaterThanOrEqual(deviationDigits);
      }
    },
  );
});
