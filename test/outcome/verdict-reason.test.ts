import { describe, expect, it } from "vitest";
import { plusMinus } from "../../src/outcome/verdict-reason.ts";

describe("a value in a sentence", () => {
  // JCGM 100:2008 (GUM), 7.2.6: the value is rounded to the place of its uncertainty's last digit
  it.each([
    [0.569, 0.0104, "0.57 ± 0.01"],
    [0.2677, 0.00123, "0.268 ± 0.001"],
    [0.569, 0.0096, "0.57 ± 0.01"],
    [123.4, 5.6, "123 ± 6"],
    [0.1, 0.03, "0.10 ± 0.03"],
  ])("%d with u = %d is %s", (value, u, text) => {
    expect(plusMinus(value, u)).toBe(text);
  });
});
