import type { DecayFit } from "../decay/fit.ts";
import type { Input } from "../numerics/propagate.ts";
import type { Joint } from "./joint.ts";
import { quadratic } from "./joint.ts";
import type { Reading } from "./reading.ts";

const STEPS = 400;
/** Recombination is followed for this many mean lifetimes. */
const FOLLOWED = 15;

/**
 * L² = ½⟨x²⟩ at recombination for a law that is not a line, µm², with its counting uncertainty:
 * L² = ∫ ½(Σ(t) − Σ₀)·(−dS/dt) dt = ½∫ Σ′(t)·S(t) dt, S the share of excitons still alive (by parts; Σ per axis).
 *
 * The law's parameters enter through ½∫ ∂Σ′/∂θ·S dt, the decay's through the time scale s of S(t/s).
 */
export function squaredLength(
  reading: Reading,
  joint: Joint,
  decay: DecayFit,
  order: 1 | 2,
  meanLifetime: Input,
): Input {
  const law = reading.laws[reading.preferredLaw]!;
  const end = FOLLOWED * Math.max(decay.intensityAveraged.value, decay.amplitudeAveraged.value);
  const n = joint.theta.length;
  const alive = (t: number, scale: number): number => decay.survival(t / scale);

  // Stieltjes sums: ½·order·Σ_k S(midpoint)·(Σ(t_{k+1}) − Σ(t_k)), times spaced as squares to resolve t^α at 0
  const integrate = (scale: number): { value: number; gradient: number[] } => {
    let value = 0;
    const gradient = new Array<number>(n).fill(0);
    let before = law.value(0);
    let slopes = law.gradient(0);
    for (let k = 1; k <= STEPS; k++) {
      const t = end * scale * (k / STEPS) ** 2;
      const middle = (t + end * scale * ((k - 1) / STEPS) ** 2) / 2;
      const weight = 0.5 * order * alive(middle, scale);
      const now = law.value(t);
      const slopesNow = law.gradient(t);
      value += weight * (now - before);
      for (let j = 0; j < n; j++) gradient[j]! += weight * (slopesNow[j]! - slopes[j]!);
      before = now;
      slopes = slopesNow;
    }
    return { value, gradient };
  };
  const { value, gradient } = integrate(1);
  const step = 1e-3;
  const byScale = (integrate(1 + step).value - integrate(1 - step).value) / (2 * step);
  const uScale = meanLifetime.u / meanLifetime.value;
  const variance = quadratic(gradient, joint.thetaCovariance) + (byScale * uScale) ** 2;
  return { value, u: Math.sqrt(Math.max(variance, 0)) };
}
