import { describe, expect, it } from "vitest";
import { mean, standardDeviation } from "../../src/numerics/moments.ts";
import { digitsOf, readUnivariate } from "./nist-strd.ts";

// Digits reached of NIST's certified standard deviation. In NumAcc3 and 4 the data themselves, stored in double
// precision, are rounded at 1e-9 of their spread.
describe("the univariate sets of NIST's Statistical Reference Datasets", () => {
  it.each([
    ["Lew", 11],
    ["Lottery", 11],
    ["Mavro", 11],
    ["Michelso", 11],
    ["NumAcc1", 11],
    ["NumAcc2", 11],
    ["NumAcc3", 9],
    ["NumAcc4", 8],
  ])("%s: mean to 11 digits, standard deviation to %i", (name, digits) => {
    const set = readUnivariate(name);
    expect(digitsOf(mean(set.y), set.mean)).toBeGreaterThanOrEqual(11);
    expect(digitsOf(standardDeviation(set.y), set.standardDeviation)).toBeGreaterThanOrEqual(digits);
  });
});
