import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parseQuantity, QuantityFault, readQuantity } from "../../src/stack/quantity.ts";
import type { UnitKind } from "../../src/stack/units.ts";

describe("a quantity as text", () => {
  // Values and factors worked out by hand from the SI prefixes.
  it.each<[string, UnitKind, number, number]>([
    ["0.100 um", "length", 0.1, 0],
    ["100 nm", "length", 0.1, 0],
    ["0.1mm", "length", 100, 0],
    ["0.100 um ± 1 %", "length", 0.1, 0.001],
    ["0.100 um ± 0.002 um", "length", 0.1, 0.002],
    ["0.100 um +/- 2 nm", "length", 0.1, 0.002],
    ["0.100 um +- 2%", "length", 0.1, 0.002],
    ["0.100 ± 0.002 um", "length", 0.1, 0.002],
    ["(0.100 ± 0.002) um", "length", 0.1, 0.002],
    ["0.100 um ± 0.002", "length", 0.1, 0.002],
    ["0.13 \u00b5m", "length", 0.13, 0],
    ["0.13 \u03bcm", "length", 0.13, 0],
    ["-1 ns", "time", -1, 0],
    ["−1 ns", "time", -1, 0],
    ["250 ps", "time", 0.25, 0],
    ["40 fs", "time", 4e-5, 0],
    ["2 us", "time", 2000, 0],
    ["2 µs", "time", 2000, 0],
    ["1.5 ms", "time", 1.5e6, 0],
    ["1 s", "time", 1e9, 0],
    ["295 K ± 2 K", "temperature", 295, 2],
    // 0 °C = 273.15 K (SI brochure, 2.3.1); a step of 1 °C is one of 1 K.
    ["22 °C ± 1 K", "temperature", 295.15, 1],
    ["-269 °C", "temperature", 4.15, 0],
    ["4 meV ± 0.5 meV", "energy", 4, 0.5],
    ["0.004 eV", "energy", 4, 0],
    // 1 cm⁻² = 10⁻⁸ µm⁻².
    ["2e11 cm^-2", "density", 2000, 0],
    ["2e11 cm-2", "density", 2000, 0],
    ["2e11 cm⁻²", "density", 2000, 0],
    ["2e11 /cm^2", "density", 2000, 0],
    ["2e11 1/cm^2", "density", 2000, 0],
    ["2000 um^-2 ± 10 %", "density", 2000, 200],
    ["0.5 %", "fraction", 0.005, 0],
    ["0.005", "fraction", 0.005, 0],
    ["7 ± 0.5", "number", 7, 0.5],
    ["1.0(2)", "number", 1, 0.2],
  ])("%s as %s", (text, kind, value, u) => {
    const measured = parseQuantity(text, kind);
    expect(measured.value).toBeCloseTo(value, 12);
    expect(measured.u).toBeCloseTo(u, 12);
  });

  // JCGM 100:2008, 7.2.2: the same mass in four notations, three of them of this form.
  it.each(["100.02147(35)", "100.02147(0.00035)", "100.02147 ± 0.00035"])(
    "%s states a value of 100.021 47 with u = 0.000 35, as in the GUM",
    (text) => {
      const measured = parseQuantity(text, "number");
      expect(measured.value).toBe(100.02147);
      expect(measured.u).toBeCloseTo(0.00035, 15);
    },
  );

  it("puts digits in parentheses on the power of ten as well", () => {
    const { value, u } = parseQuantity("1.20(3)e11 cm^-2", "density");
    expect(value).toBeCloseTo(1200, 9);
    expect(u).toBeCloseTo(30, 9);
  });

  it.each<[string, UnitKind, RegExp]>([
    ["0.1", "length", /has no unit \(um, nm, mm\)/],
    ["0.1 ns", "length", /has the unit ns, which is not a length/],
    ["0.1 Um", "length", /has the unit Um, which is not a length/],
    ["4 K", "energy", /which is not an energy/],
    ["5 um", "number", /has the unit um where a plain number is needed/],
    ["0,1 um", "length", /decimal comma/],
    ["about 1 um", "length", /is not a number with a unit/],
    ["1 um ± ", "length", /is not a number with a unit/],
    ["1(2) um ± 3 um", "length", /is not a number with a unit/],
    ["1 um ± -0.1 um", "length", /uncertainty below zero/],
    ["1 um ± 1 ns", "length", /has the unit ns/],
    ["20 °C ± 1 %", "temperature", /% of a temperature in °C/],
    ["NaN um", "length", /is not a number/],
    ["1e999 um", "length", /is not a number/],
    ["1 constructor", "length", /which is not a length/],
    ["", "length", /is not a number/],
  ])("%s as %s is refused with its cause", (text, kind, message) => {
    expect(() => parseQuantity(text, kind)).toThrow(QuantityFault);
    expect(() => parseQuantity(text, kind)).toThrow(message);
  });

  it("reads back any number and uncertainty as they are written", () => {
    const finite = fc.double({ min: -1e12, max: 1e12, noNaN: true });
    const positive = fc.double({ min: 0, max: 1e12, noNaN: true });
    fc.assert(
      fc.property(finite, positive, fc.constantFrom("±", "+/-", "+-"), (value, u, sign) => {
        const measured = parseQuantity(`${value} ns ${sign} ${u} ns`, "time");
        return Object.is(measured.value + 0, value + 0) && measured.u === u;
      }),
    );
  });

  it("never takes more than a moment over any text", () => {
    fc.assert(
      fc.property(
        fc.string({ maxLength: 200, unit: fc.constantFrom(..."0123456789.eE+-±/()% umK²") }),
        (text) => {
          const start = performance.now();
          readQuantity(text);
          return performance.now() - start < 200;
        },
      ),
      { numRuns: 2000 },
    );
  });
});
