import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { between, concise, plain, powerOfTen, symbols, upperLimit } from "../../src/report/notation.ts";

describe("concise", () => {
  it("writes the example of JCGM 100, 7.2.2 (from memory): 100.021 47 g with u = 0.35 mg", () => {
    expect(concise(100.02147, 0.00035)).toBe("100.02147(35)");
  });

  it("writes line parameters as the MSL's calculator prints GUM H.3: -0.1712(29) and 0.00218(67)", () => {
    expect(concise(-0.17120379, 0.0029)).toBe("−0.1712(29)");
    expect(concise(0.0021826977, 0.00066794)).toBe("0.00218(67)");
  });

  it("writes CODATA 2018's constant of gravitation and electron mass (from memory) with powers of ten", () => {
    expect(concise(6.6743e-11, 0.00015e-11)).toBe("6.67430(15)×10⁻¹¹");
    expect(concise(9.1093837015e-31, 0.0000000028e-31)).toBe("9.1093837015(28)×10⁻³¹");
  });

  it.each([
    [0.5123, 0.0341, "0.512(34)"],
    [12.34, 1.234, "12.3(1.2)"],
    [512.4, 34.2, "512(34)"],
    [51234, 341, "5.123(34)×10⁴"],
    [120, 250, "1.2(2.5)×10²"],
    [-0.004, 0.011, "−0.004(11)"],
    [0, 0.011, "0.000(11)"],
    [-0.0001, 0.011, "0.000(11)"],
    [0.00051, 0.00003, "5.10(30)×10⁻⁴"],
    [99_999.7, 12, "100000(12)"],
  ])("writes %d with u = %d as %s", (value, u, text) => {
    expect(concise(value, u)).toBe(text);
  });

  it("carries where rounding u to two digits makes it longer: 0.0996 is 0.10", () => {
    expect(concise(0.5123, 0.0996)).toBe("0.51(10)");
  });

  it("writes the value alone where nothing is known to be uncertain", () => {
    expect(concise(8.21, 0)).toBe("8.21");
  });

  it("refuses what is not a number, and a negative u", () => {
    expect(() => concise(Number.NaN, 1)).toThrow(/not finite/);
    expect(() => concise(1, Number.POSITIVE_INFINITY)).toThrow(/not finite/);
    expect(() => concise(1, -1)).toThrow(/cannot be negative/);
  });

  it("reads back to within half of the last digit, for any value and u", () => {
    const size = fc.double({ min: -12, max: 12, noNaN: true });
    fc.assert(
      fc.property(size, size, fc.boolean(), (a, b, negative) => {
        const value = (negative ? -1 : 1) * 10 ** a;
        const u = 10 ** b;
        // beyond fifteen digits between value and u the number itself holds no more
        fc.pre(a - b < 12);
        const read = readBack(concise(value, u));
        expect(Math.abs(read.u - u)).toBeLessThanOrEqual(0.0501 * u);
        expect(Math.abs(read.value - value)).toBeLessThanOrEqual(0.0501 * u + 1e-12 * Math.abs(value));
      }),
    );
  });
});

/** A reader of the notation that shares nothing with the writer. */
function readBack(text: string): { value: number; u: number } {
  const match = /^(−?)(\d+)(?:\.(\d+))?\(([\d.]+)\)(?:×10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+))?$/.exec(text);
  if (match === null) throw new Error(`not in concise notation: ${text}`);
  const [, sign, whole, fraction = "", digits = "", power = ""] = match;
  const exponent = Number([...power].map((c) => (c === "⁻" ? "-" : "⁰¹²³⁴⁵⁶⁷⁸⁹".indexOf(c))).join("") || "0");
  const u = digits.includes(".") ? Number(digits) : Number(`${digits}e-${fraction.length}`);
  const value = Number(`${whole}.${fraction || "0"}`) * (sign === "−" ? -1 : 1);
  return { value: value * 10 ** exponent, u: u * 10 ** exponent };
}

describe("between", () => {
  it("gives both ends to the place of u's second digit", () => {
    expect(between(0.44502, 0.57898, 0.0342)).toBe("0.445 to 0.579");
    expect(between(-0.0171, 0.0254, 0.0108)).toBe("−0.017 to 0.025");
  });

  it("shares one power of ten", () => {
    expect(between(51_000, 52_346, 341)).toBe("(5.100 to 5.235)×10⁴");
  });
});

describe("upperLimit", () => {
  it("rounds up, so that the limit still holds", () => {
    expect(upperLimit(0.2081)).toBe("< 0.21");
    expect(upperLimit(0.2101)).toBe("< 0.22");
    expect(upperLimit(0.21)).toBe("< 0.21");
    expect(upperLimit(0.000123)).toBe("< 1.3×10⁻⁴");
  });
});

describe("plain", () => {
  it("keeps six digits, and uses powers of ten for the very large and small", () => {
    expect(plain(12.3456789)).toBe("12.3457");
    expect(plain(-2.5)).toBe("−2.5");
    expect(plain(0)).toBe("0");
    expect(plain(2e11)).toBe("2×10¹¹");
    expect(plain(0.00012, 2)).toBe("1.2×10⁻⁴");
  });
});

describe("symbols", () => {
  it("sets Greek letters, indices, powers and minus signs, and leaves other words alone", () => {
    expect(symbols("A (f exp(-t/tau_1) + (1 - f) exp(-t/tau_2))^2")).toBe(
      "A (f exp(−t/τ₁) + (1 − f) exp(−t/τ₂))²",
    );
    expect(symbols("A exp(-(t/tau)^beta)")).toBe("A exp(−(t/τ)^β)");
    expect(symbols("constructor D_late")).toBe("constructor D_late");
  });
});

describe("powerOfTen", () => {
  it("is empty for the zeroth", () => {
    expect(powerOfTen(0)).toBe("");
    expect(powerOfTen(-12)).toBe("×10⁻¹²");
  });
});
