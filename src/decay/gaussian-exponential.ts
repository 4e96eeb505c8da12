import { erfc, erfcx } from "./erfcx.ts";
import type { Column, Timing } from "./timing.ts";

/** How many standard deviations from its centre the response is taken to reach (its tail there is 1e-17). */
const REACH = 8.3;

export const sigmaOfFwhm = (fwhm: number): number => fwhm / (2 * Math.sqrt(2 * Math.log(2)));

/**
 * An exponential seen through a Gaussian response of standard deviation s: the exponentially modified Gaussian
 *
 *     h(t) = ½ e^(r²s²/2 − r·t) erfc((r·s² − t)/(√2·s)) ,
 *
 * written with erfcx so that nothing overflows. Since h' = R − r·h, its gate average is
 * (ΔΦ − Δh)/(r·w), Δ between the gate's ends and Φ the Gaussian's integral. A repeated light e^(−r·(t mod T)) is the
 * sum over all pulses times 1 − e^(−rT): pulses long past are a geometric series.
 */
export function gaussianColumn(timing: Timing, s: number): Column {
  const { delays, gate, period } = timing;
  const ends: Ends = { lower: { h: 0, slope: 0 }, upper: { h: 0, slope: 0 } };
  return (rate, value, slope) => {
    // Beyond this the erfc is 2 and the curve a pure exponential.
    const settled = REACH * s + rate * s * s;
    for (let i = 0; i < delays.length; i++) {
      const sum = { value: 0, slope: 0 };
      if (period === null) addPulse(sum, delays[i]!, gate, rate, s, ends);
      else addAllPulses(sum, delays[i]!, gate, rate, s, period, settled, ends);
      value[i] = sum.value;
      slope[i] = sum.slope;
    }
  };
}

interface Sum {
  value: number;
  slope: number;
}

interface Modified {
  h: number;
  slope: number;
}

interface Ends {
  readonly lower: Modified;
  readonly upper: Modified;
}

/** Adds the repeated light: (1 − E)·(near pulses) + the first of the settled ones, which carries the whole series. */
function addAllPulses(
  sum: Sum,
  delay: number,
  gate: number,
  rate: number,
  s: number,
  period: number,
  settled: number,
  ends: Ends,
) {
  const near = { value: 0, slope: 0 };
  let t = delay - period * Math.floor((delay + gate + REACH * s) / period);
  for (; t <= settled; t += period) addPulse(near, t, gate, rate, s, ends);
  const first = { value: 0, slope: 0 };
  addPulse(first, t, gate, rate, s, ends);
  const left = Math.exp(-rate * period);
  sum.value += (1 - left) * near.value + first.value;
  sum.slope += (1 - left) * near.slope + period * left * near.value + first.slope;
}

/** Adds one pulse's gate-averaged light at `t` since that pulse. */
function addPulse(sum: Sum, t: number, gate: number, rate: number, s: number, { lower, upper }: Ends) {
  if (t + gate < -REACH * s) return;
  modified(t, rate, s, lower);
  if (gate === 0) {
    sum.value += lower.h;
    sum.slope += lower.slope;
    return;
  }
  modified(t + gate, rate, s, upper);
  const mean = (gaussianShare(t, t + gate, s) - (upper.h - lower.h)) / (rate * gate);
  sum.value += mean;
  sum.slope -= mean / rate + (upper.slope - lower.slope) / (rate * gate);
}

/** h and ∂h/∂r = (r·s² − t)·h − s²·R(t). */
function modified(t: number, rate: number, s: number, out: Modified) {
  if (t < -REACH * s) {
    out.h = 0;
    out.slope = 0;
    return;
  }
  const bell = Math.exp((-t * t) / (2 * s * s));
  const z = (rate * s * s - t) / (Math.SQRT2 * s);
  const half = 0.5 * bell * erfcx(Math.abs(z));
  const h = z >= 0 ? half : Math.exp(rate * (0.5 * rate * s * s - t)) - half;
  out.h = h;
  out.slope = (rate * s * s - t) * h - (s / Math.sqrt(2 * Math.PI)) * bell;
}

/** ∫_a^b of the unit Gaussian response, without cancellation on either side. */
export function gaussianShare(a: number, b: number, s: number): number {
  const x = a / (Math.SQRT2 * s);
  const y = b / (Math.SQRT2 * s);
  return x > 0 ? 0.5 * (erfc(x) - erfc(y)) : 0.5 * (erfc(-y) - erfc(-x));
}
