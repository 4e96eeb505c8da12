import { gamma } from "../numerics/distributions.ts";
import { gaussLegendre } from "./gauss-legendre.ts";
import type { Instrument } from "./instrument.ts";
import { type Law, lifetimeEdge } from "./law.ts";

/**
 * A stretched exponential: density n/n₀ = exp(−(t/τ)^β), light = A (n/n₀)^q; 0 < β < 1 for a spread of rates.
 *
 * ⟨τ⟩ = ∫ n/n₀ dt = (τ/β)Γ(1/β) and the intensity-averaged lifetime is τ Γ(2/β)/Γ(1/β)
 * (Zatryb and Klak, J. Phys.: Condens. Matter 32 (2020) 415902). With repeated pulses the densities left behind by
 * earlier pulses are added before the power q is taken.
 */
export function stretchedLaw(instrument: Instrument, order: 1 | 2): Law {
  return {
    law: "stretched",
    formula: `A exp(-${order === 2 ? "2" : ""}(t/tau)^beta)`,
    names: ["amplitude", "tau", "beta"],
    units: ["photons", "ns", "1"],
    positive: [false, true, true],
    headline: null,
    edge: (j, end) => {
      if (j === 1) return lifetimeEdge(end);
      return end === "upper" ? "beta is 1: one exponential" : "beta is at 0.15, the least that is tried";
    },
    evaluate: evaluate(instrument, order),
    survival: (p, t) => (t > 0 ? Math.exp(-((t / p[1]!) ** p[2]!)) : 1),
    amplitudeAveraged: (p) => (p[1]! / p[2]!) * gamma(1 / p[2]!),
    intensityAveraged: (p) => (p[1]! * gamma(2 / p[2]!)) / gamma(1 / p[2]!),
  };
}

function evaluate(instrument: Instrument, order: 1 | 2): Law["evaluate"] {
  const nodes = instrument.nodes();
  const logs = nodes.map((u) => Math.log(u));
  const light = new Float64Array(nodes.length);
  const byTauAt = new Float64Array(nodes.length);
  const byBetaAt = new Float64Array(nodes.length);
  const earlier = instrument.period === null ? null : earlierPulses(nodes, instrument.period);
  return (p, value, [byA, byTau, byBeta]) => {
    const [a, tau, beta] = [p[0]!, p[1]!, p[2]!];
    survivals(logs, tau, beta, light, byTauAt, byBetaAt);
    earlier?.add(tau, beta, light, byTauAt, byBetaAt);
    for (let k = 0; k < light.length; k++) {
      const outer = order === 1 ? a : 2 * a * light[k]!;
      byTauAt[k]! *= outer;
      byBetaAt[k]! *= outer;
      if (order === 2) light[k]! *= light[k]!;
    }
    instrument.observe(light, byA!);
    instrument.observe(byTauAt, byTau!);
    instrument.observe(byBetaAt, byBeta!);
    for (let i = 0; i < value.length; i++) value[i] = a * byA![i]!;
  };
}

/** exp(−(u/τ)^β) and its derivatives, from ln u (−Infinity at the pulse). */
function survivals(
  logs: Float64Array,
  tau: number,
  beta: number,
  value: Float64Array,
  byTau: Float64Array,
  byBeta: Float64Array,
) {
  const logTau = Math.log(tau);
  for (let k = 0; k < logs.length; k++) {
    const y = logs[k]! - logTau;
    const x = Math.exp(beta * y);
    const s = Math.exp(-x);
    const sx = s * x;
    value[k] = s;
    byTau[k] = (sx * beta) / tau;
    byBeta[k] = sx > 0 ? -sx * y : 0;
  }
}

const CHEBYSHEV = 12;
const FIRST_PULSES = 16;
const DOUBLINGS = 14;

/**
 * Σ_{m ≥ 1} S(u + mT): what earlier pulses left at time u. It is smooth on [0, T], so it is summed at a few Chebyshev
 * points and interpolated to the nodes (barycentric form, Berrut and Trefethen, SIAM Rev. 46 (2004) 501). The first
 * sixteen pulses are added one by one; those before, in blocks that double, by the midpoint form of the
 * Euler–Maclaurin formula, whose first correction is below 1e-4 of so late a term.
 */
function earlierPulses(nodes: Float64Array, period: number) {
  const at = Array.from({ length: CHEBYSHEV }, (_, c) => {
    const angle = ((2 * c + 1) * Math.PI) / (2 * CHEBYSHEV);
    return { u: (period / 2) * (1 - Math.cos(angle)), weight: (c % 2 === 0 ? 1 : -1) * Math.sin(angle) };
  });
  const pulses = pulseRule();
  const logs = Float64Array.from(at.flatMap(({ u }) => pulses.map(({ m }) => Math.log(u + m * period))));
  const [value, byTau, byBeta] = [0, 1, 2].map(() => new Float64Array(logs.length));
  const interpolation = Array.from(nodes, (u) => barycentric(at, u));
  return {
    add(tau: number, beta: number, light: Float64Array, tauAt: Float64Array, betaAt: Float64Array) {
      survivals(logs, tau, beta, value!, byTau!, byBeta!);
      for (const [source, target] of [
        [value!, light],
        [byTau!, tauAt],
        [byBeta!, betaAt],
      ] as const) {
        const sums = at.map((_, c) =>
          pulses.reduce((sum, { weight }, k) => sum + weight * source[c * pulses.length + k]!, 0),
        );
        interpolation.forEach((row, k) => {
          for (let c = 0; c < CHEBYSHEV; c++) target[k]! += row[c]! * sums[c]!;
        });
      }
    },
  };
}

/** Pulses m and weights such that Σ weight·f(m) stands for Σ_{m ≥ 1} f(m) of a smooth falling f. */
function pulseRule(): { m: number; weight: number }[] {
  const out = Array.from({ length: FIRST_PULSES }, (_, k) => ({ m: k + 1, weight: 1 }));
  const { points, weights } = gaussLegendre(4);
  let from = FIRST_PULSES + 0.5;
  for (let block = 0; block < DOUBLINGS; block++) {
    points.forEach((x, k) => {
      out.push({ m: from * (1 + x), weight: from * weights[k]! });
    });
    from *= 2;
  }
  return out;
}

function barycentric(at: readonly { u: number; weight: number }[], u: number): number[] {
  const hit = at.findIndex((point) => point.u === u);
  if (hit >= 0) return at.map((_, c) => (c === hit ? 1 : 0));
  const terms = at.map((point) => point.weight / (u - point.u));
  const total = terms.reduce((sum, term) => sum + term, 0);
  return terms.map((term) => term / total);
}
