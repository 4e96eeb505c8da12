import type { Instrument } from "./instrument.ts";
import { type Law, lifetimeEdge } from "./law.ts";

/**
 * One exponential: density n = n₀ e^(−t/τ), light ∝ n^q = A e^(−q·t/τ).
 *
 * With pulses every T the density adds up to n₀ e^(−t/τ)/(1 − e^(−T/τ)), a geometric series, and the light to the q-th
 * power of that. A is the light just after a pulse that none went before.
 */
export function exponentialLaw(instrument: Instrument, order: 1 | 2): Law {
  const { frames, period } = instrument;
  const column = new Float64Array(frames);
  const slope = new Float64Array(frames);
  return {
    law: "exponential",
    formula: order === 1 ? "A exp(-t/tau)" : "A exp(-2t/tau)",
    names: ["amplitude", "tau"],
    units: ["photons", "ns"],
    positive: [false, true],
    headline: 1,
    edge: (_, end) => lifetimeEdge(end),
    evaluate(p, value, [byA, byTau]) {
      const a = p[0]!;
      const tau = p[1]!;
      instrument.exponential(order / tau, column, slope);
      const { gain, byRate } = accumulation(1 / tau, period);
      const factor = gain ** order;
      const factorByRate = order * gain ** (order - 1) * byRate;
      const rateByTau = -1 / (tau * tau);
      for (let i = 0; i < frames; i++) {
        byA![i] = factor * column[i]!;
        byTau![i] = a * rateByTau * (factorByRate * column[i]! + factor * order * slope[i]!);
        value[i] = a * byA![i]!;
      }
    },
    survival: (p, t) => Math.exp(-t / p[1]!),
    amplitudeAveraged: (p) => p[1]!,
    intensityAveraged: (p) => p[1]!,
  };
}

/** 1/(1 − e^(−T/τ)), what repeated pulses make of an exponential's density, and its derivative by the rate 1/τ. */
export function accumulation(rate: number, period: number | null): { gain: number; byRate: number } {
  if (period === null) return { gain: 1, byRate: 0 };
  const gain = -1 / Math.expm1(-rate * period);
  return { gain, byRate: -period * Math.exp(-rate * period) * gain * gain };
}
