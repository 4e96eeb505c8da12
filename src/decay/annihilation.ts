import { gaussLegendre } from "./gauss-legendre.ts";
import type { Instrument } from "./instrument.ts";
import { type Law, lifetimeEdge } from "./law.ts";
import { type SteadyState, steadyState } from "./steady-state.ts";

/**
 * Annihilation in pairs, dn/dt = −n/τ − k n², of a Gaussian spot whose centre starts at the density n₀.
 *
 * Where the density starts at n, n(t) = n E/(1 + k n τ (1 − E)) with E = e^(−t/τ): the form for a uniform field. A
 * recording of a spot sees all of its densities at once; the integral over the Gaussian, without diffusion, is
 *
 *     N(t)/N₀ = E·ln(1 + a)/a ,   a = k n₀ τ (1 − E) ,
 *
 * and this is the law used. (The uniform form with the centre's n₀ would give k about half its size; the initial rate
 * of loss is k n₀/2.) Light ∝ n² integrates to A·E²·2[ln(1 + a) − a/(1 + a)]/a². With repeated pulses the density at
 * every place is the steady one that includes what was left over (steady-state.ts). Parameters: A, the light just
 * after a pulse that none went before; τ, the lifetime without annihilation; k n₀ at the centre, 1/ns, of the density
 * that one pulse adds. Motion dilutes the spot and weakens annihilation, which this law leaves out.
 */
export function annihilationLaw(instrument: Instrument, order: 1 | 2): Law {
  return {
    law: "annihilation",
    formula:
      order === 1
        ? "A exp(-t/tau) ln(1 + a)/a, a = k_n0 tau (1 - exp(-t/tau))"
        : "A exp(-2t/tau) 2(ln(1 + a) - a/(1 + a))/a^2, a = k_n0 tau (1 - exp(-t/tau))",
    names: ["amplitude", "tau", "k_n0"],
    units: ["photons", "ns", "1/ns"],
    positive: [false, true, false],
    headline: 1,
    edge: (j, end) => (j === 2 ? "no annihilation is seen" : lifetimeEdge(end)),
    evaluate: evaluate(instrument, order),
    survival(p, t) {
      const e = Math.exp(-t / p[1]!);
      return e * share(p[2]! * p[1]! * -Math.expm1(-t / p[1]!)).value;
    },
    amplitudeAveraged: (p) => moment(p, 0),
    intensityAveraged: (p) => moment(p, 1) / moment(p, 0),
  };
}

/** A function of a and its derivative. */
interface WithSlope {
  readonly value: number;
  readonly slope: number;
}

/** ln(1 + a)/a, for a > −1; its series near 0. */
export function share(a: number): WithSlope {
  if (Math.abs(a) < 1e-3) {
    return {
      value: 1 - a * (1 / 2 - a * (1 / 3 - a * (1 / 4 - a / 5))),
      slope: -1 / 2 + a * (2 / 3 - a * (3 / 4 - a * (4 / 5 - (5 * a) / 6))),
    };
  }
  const value = Math.log1p(a) / a;
  return { value, slope: (1 / (1 + a) - value) / a };
}

/** 2[ln(1 + a) − a/(1 + a)]/a²: 2∫₀¹ y/(1 + a·y)² dy; its series Σ 2(j+1)/(j+2)·(−a)^j near 0. */
export function pairShare(a: number): WithSlope {
  if (Math.abs(a) < 1e-2) {
    let value = 0;
    let slope = 0;
    for (let j = 9; j >= 0; j--) {
      const c = (2 * (j + 1)) / (j + 2);
      value += c * (-a) ** j;
      if (j > 0) slope -= c * j * (-a) ** (j - 1);
    }
    return { value, slope };
  }
  const value = (2 * (Math.log1p(a) - a / (1 + a))) / (a * a);
  return { value, slope: (2 / (1 + a) ** 2 - 2 * value) / a };
}

function evaluate(instrument: Instrument, order: 1 | 2): Law["evaluate"] {
  const nodes = instrument.nodes();
  const light = new Float64Array(nodes.length);
  const byTauAt = new Float64Array(nodes.length);
  const byRateAt = new Float64Array(nodes.length);
  return (p, value, [byA, byTau, byRate]) => {
    const [amplitude, tau, rate] = [p[0]!, p[1]!, p[2]!];
    if (instrument.period === null) afterOnePulse(nodes, order, tau, rate, light, byTauAt, byRateAt);
    else
      repeated(nodes, order, tau, rate, steadyState(tau, rate, instrument.period), light, byTauAt, byRateAt);
    instrument.observe(light, byA!);
    instrument.observe(byTauAt, byTau!);
    instrument.observe(byRateAt, byRate!);
    for (let i = 0; i < value.length; i++) {
      value[i] = amplitude * byA![i]!;
      byTau![i]! *= amplitude;
      byRate![i]! *= amplitude;
    }
  };
}

function afterOnePulse(
  nodes: Float64Array,
  order: 1 | 2,
  tau: number,
  rate: number,
  light: Float64Array,
  byTau: Float64Array,
  byRate: Float64Array,
) {
  for (let k = 0; k < nodes.length; k++) {
    const x = nodes[k]! / tau;
    const lost = -Math.expm1(-x);
    const e = 1 - lost;
    const { value, slope } = order === 1 ? share(rate * tau * lost) : pairShare(rate * tau * lost);
    const decay = order === 1 ? e : e * e;
    light[k] = decay * value;
    byTau[k] = decay * ((order * x * value) / tau + slope * rate * (lost - x * e));
    byRate[k] = decay * slope * tau * lost;
  }
}

/** Sums over places of the spot: light = Σ weight·n(u)^q, n(u) = ν E/(1 + k n₀ ν τ (1 − E)). */
function repeated(
  nodes: Float64Array,
  order: 1 | 2,
  tau: number,
  rate: number,
  places: readonly SteadyState[],
  light: Float64Array,
  byTau: Float64Array,
  byRate: Float64Array,
) {
  light.fill(0);
  byTau.fill(0);
  byRate.fill(0);
  for (let k = 0; k < nodes.length; k++) {
    const x = nodes[k]! / tau;
    const lost = -Math.expm1(-x);
    const e = 1 - lost;
    for (const { density, densityByTau, densityByRate, weight } of places) {
      const d = 1 / (1 + rate * density * tau * lost);
      const n = density * e * d;
      const outer = order === 1 ? weight[0] : 2 * n * weight[1];
      light[k]! += order === 1 ? weight[0] * n : weight[1] * n * n;
      const byDensity = e * d * d;
      byTau[k]! +=
        outer * (byDensity * densityByTau + (n * x) / tau - n * d * rate * density * (lost - x * e));
      byRate[k]! += outer * (byDensity * densityByRate - n * d * density * tau * lost);
    }
  }
}

const MOMENT_POINTS = 40;

/** ∫ t^m·survival dt with E = z³ in place of t = −τ ln E: the integrand is then smooth. */
function moment(p: ArrayLike<number>, m: 0 | 1): number {
  const tau = p[1]!;
  const { points, weights } = gaussLegendre(MOMENT_POINTS);
  let sum = 0;
  points.forEach((z, j) => {
    const e = z ** 3;
    const t = -3 * tau * Math.log(z);
    sum += weights[j]! * 3 * z * z * tau * (m === 0 ? 1 : t) * share(p[2]! * tau * (1 - e)).value;
  });
  return sum;
}
