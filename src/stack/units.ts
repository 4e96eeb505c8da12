/** What a quantity measures; each kind has one internal unit. */
export type UnitKind = "length" | "time" | "temperature" | "energy" | "density" | "fraction" | "number";

interface Kind {
  /** As a message calls it: "a length". */
  readonly name: string;
  /** Unit text, as {@link plainUnit} writes it, to internal units. */
  readonly factors: Readonly<Record<string, number>>;
}

/**
 * Units by kind, with the factor to the internal one: µm, ns, K, meV, µm⁻², 1.
 * Factors follow from the SI prefixes alone (SI brochure, 9th edition).
 */
export const KINDS: Readonly<Record<UnitKind, Kind>> = {
  length: { name: "a length", factors: { um: 1, nm: 1e-3, mm: 1e3 } },
  time: { name: "a time", factors: { ns: 1, fs: 1e-6, ps: 1e-3, us: 1e3, ms: 1e6, s: 1e9 } },
  temperature: { name: "a temperature", factors: { K: 1, "°C": 1 } },
  energy: { name: "an energy", factors: { meV: 1, eV: 1e3, ueV: 1e-3 } },
  density: {
    name: "a density per area",
    factors: { "um^-2": 1, "cm^-2": 1e-8, "m^-2": 1e-12, "nm^-2": 1e6 },
  },
  fraction: { name: "a fraction", factors: { "%": 0.01, "": 1 } },
  number: { name: "a plain number", factors: { "": 1 } },
};

/** 0 °C in kelvin, exact since the scale's definition (SI brochure, 2.3.1). */
export const ZERO_CELSIUS_IN_KELVIN = 273.15;

/** One spelling for a unit: both signs for micro and the u, both signs for Å and degree, "1/cm^2", "cm-2", "cm⁻²". */
export function plainUnit(text: string): string {
  const plain = text
    .trim()
    .replace(/[\u00b5\u03bc]/g, "u")
    .replace(/[⁻−]/g, "-")
    .replace(/²/g, "^2")
    .replace(/\^-\^/g, "^-")
    .replace(/-\^2/g, "^-2")
    .replace(/^(?:1\s*)?\/\s*([a-z]+)\^?2$/, "$1^-2")
    .replace(/^([a-z]+)-2$/, "$1^-2");
  return plain === "℃" || plain === "degC" ? "°C" : plain;
}
