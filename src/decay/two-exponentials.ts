import { accumulation } from "./exponential.ts";
import type { Instrument } from "./instrument.ts";
import { type Law, lifetimeEdge } from "./law.ts";

/**
 * Two exponentials: density n/n₀ = f e^(−t/τ₁) + (1 − f) e^(−t/τ₂), light = A (n/n₀)^q.
 *
 * f is the share that decays with τ₁, the shorter one. Squared (q = 2) the light has a third exponential at the mean
 * rate. Repeated pulses multiply each component of the density by 1/(1 − e^(−T/τ_j)).
 */
export function twoExponentialsLaw(instrument: Instrument, order: 1 | 2): Law {
  return {
    law: "two_exponentials",
    formula: `A (f exp(-t/tau_1) + (1 - f) exp(-t/tau_2))${order === 2 ? "^2" : ""}`,
    names: ["amplitude", "share_1", "tau_1", "tau_2"],
    units: ["photons", "1", "ns", "ns"],
    positive: [false, false, true, true],
    headline: null,
    edge: (j, end) => (j === 1 ? "one of the two shares is zero: one exponential" : lifetimeEdge(end)),
    evaluate: order === 1 ? evaluateSum(instrument) : evaluateSquare(instrument),
    survival: (p, t) => p[1]! * Math.exp(-t / p[2]!) + (1 - p[1]!) * Math.exp(-t / p[3]!),
    amplitudeAveraged: (p) => p[1]! * p[2]! + (1 - p[1]!) * p[3]!,
    intensityAveraged: (p) => {
      const first = p[1]! * p[2]!;
      const second = (1 - p[1]!) * p[3]!;
      return (first * p[2]! + second * p[3]!) / (first + second);
    },
  };
}

function evaluateSum(instrument: Instrument): Law["evaluate"] {
  const { frames, period } = instrument;
  const [x1, d1, x2, d2] = columns(frames, 4);
  return (p, value, [byA, byShare, byTau1, byTau2]) => {
    const [a, f, tau1, tau2] = [p[0]!, p[1]!, p[2]!, p[3]!];
    instrument.exponential(1 / tau1, x1!, d1!);
    instrument.exponential(1 / tau2, x2!, d2!);
    const g1 = accumulation(1 / tau1, period);
    const g2 = accumulation(1 / tau2, period);
    for (let i = 0; i < frames; i++) {
      const first = g1.gain * x1![i]!;
      const second = g2.gain * x2![i]!;
      byA![i] = f * first + (1 - f) * second;
      value[i] = a * byA![i]!;
      byShare![i] = a * (first - second);
      byTau1![i] = (-a * f * (g1.gain * d1![i]! + g1.byRate * x1![i]!)) / tau1 ** 2;
      byTau2![i] = (-a * (1 - f) * (g2.gain * d2![i]! + g2.byRate * x2![i]!)) / tau2 ** 2;
    }
  };
}

function evaluateSquare(instrument: Instrument): Law["evaluate"] {
  const { frames, period } = instrument;
  const [x11, d11, x12, d12, x22, d22] = columns(frames, 6);
  return (p, value, [byA, byShare, byTau1, byTau2]) => {
    const [a, f, tau1, tau2] = [p[0]!, p[1]!, p[2]!, p[3]!];
    instrument.exponential(2 / tau1, x11!, d11!);
    instrument.exponential(1 / tau1 + 1 / tau2, x12!, d12!);
    instrument.exponential(2 / tau2, x22!, d22!);
    const g1 = accumulation(1 / tau1, period);
    const g2 = accumulation(1 / tau2, period);
    const c1 = f * g1.gain;
    const c2 = (1 - f) * g2.gain;
    for (let i = 0; i < frames; i++) {
      const by1 = 2 * a * (c1 * x11![i]! + c2 * x12![i]!);
      const by2 = 2 * a * (c1 * x12![i]! + c2 * x22![i]!);
      byA![i] = c1 * c1 * x11![i]! + 2 * c1 * c2 * x12![i]! + c2 * c2 * x22![i]!;
      value[i] = a * byA![i]!;
      byShare![i] = by1 * g1.gain - by2 * g2.gain;
      const rate1 = 2 * a * (c1 * c1 * d11![i]! + c1 * c2 * d12![i]!) + by1 * f * g1.byRate;
      const rate2 = 2 * a * (c1 * c2 * d12![i]! + c2 * c2 * d22![i]!) + by2 * (1 - f) * g2.byRate;
      byTau1![i] = -rate1 / tau1 ** 2;
      byTau2![i] = -rate2 / tau2 ** 2;
    }
  };
}

const columns = (frames: number, count: number) =>
  Array.from({ length: count }, () => new Float64Array(frames));
