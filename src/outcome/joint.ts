import type { DecayFit } from "../decay/fit.ts";
import { birgeFactor } from "../numerics/model-choice.ts";
import type { LawFit } from "../transport/laws.ts";
import { meanDiffusion } from "../transport/line.ts";
import type { Reading } from "./reading.ts";
import { transmissionSlope } from "./transmission.ts";

/** The law of spread and the decay together: parameters, covariance, and what they share; µm², ns, photons. */
export interface Joint {
  /** Parameters of the preferred law: (Σ₀, D) by components for a line, the law's own otherwise. */
  readonly theta: readonly number[];
  /** Birge factor included. */
  readonly thetaCovariance: Float64Array;
  readonly spreadBirge: number;
  readonly decay: DecayFit | null;
  /** Covariance of the decay's parameters with the width's uncertainty carried along, Birge factor included. */
  readonly decayCovariance: Float64Array;
  readonly decayBirge: number;
  /** Covariance of decay parameter j with θ_k at j·(length of θ) + k. */
  readonly cross: Float64Array;
}

/**
 * Joins the two fits. The light of a frame is read with the width held on the law, so an error δθ of the law shifts
 * every N_i by G_i·δθ with G_i = ∂N_i/∂Σ · ∂Σ_i/∂θ; the rest of N_i's error is independent of θ. Where the law also
 * says how much light arrives (slit, emission order 2), ∂N_i/∂Σ has the model's own answer N_i·∂ln T_i/∂Σ taken off. With
 * H = (JᵀWJ)⁻¹JᵀW of the decay fit, cov(φ) = (JᵀWJ)⁻¹ + HG·cov(θ)·(HG)ᵀ and cov(φ, θ) = HG·cov(θ)
 * (law of propagation of uncertainty, JCGM 100:2008, 5.2).
 */
export function joinFits(reading: Reading): Joint {
  const { decays, line, laws, preferredLaw } = reading;
  const law = preferredLaw === "line" ? null : laws[preferredLaw];
  const spreadBirge = birgeFactor(law?.chi2 ?? line.chi2, law?.degreesOfFreedom ?? line.degreesOfFreedom);
  const theta = law === null ? [...line.intercept, ...line.diffusion] : [...law.parameters];
  const thetaCovariance = (law?.covariance ?? line.covariance).map((c) => c * spreadBirge ** 2);
  const decay = decays?.fits[decays.preferred] ?? null;
  if (decay === null) {
    const none = new Float64Array(0);
    return { theta, thetaCovariance, spreadBirge, decay, decayCovariance: none, decayBirge: 1, cross: none };
  }
  const decayBirge = birgeFactor(decay.chi2, decay.degreesOfFreedom);
  const answer = answerToLaw(reading, law, decay, theta.length);
  const m = decay.parameters.length;
  const n = theta.length;
  const cross = new Float64Array(m * n);
  for (let j = 0; j < m; j++) {
    for (let k = 0; k < n; k++) {
      for (let l = 0; l < n; l++) cross[j * n + k]! += answer[j * n + l]! * thetaCovariance[l * n + k]!;
    }
  }
  const decayCovariance = decay.covariance.map((c) => c * decayBirge ** 2);
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < m; j++) {
      for (let k = 0; k < n; k++) decayCovariance[i * m + j]! += cross[i * n + k]! * answer[j * n + k]!;
    }
  }
  return { theta, thetaCovariance, spreadBirge, decay, decayCovariance, decayBirge, cross };
}

/** HG: ∂φ_j/∂θ_k through the light, row-major. */
function answerToLaw(reading: Reading, law: LawFit | null, decay: DecayFit, n: number): Float64Array {
  const { light, times, models, frames, stack } = reading;
  const m = decay.parameters.length;
  const weighted = new Float64Array(m * n);
  for (const [k, frame] of light.frames.entries()) {
    const slope = transmissionSlope(stack.acquisition, frames.kind, models.variance(frame));
    const perVariance = light.perVariance[frame]!.map((p, a) => p - decay.prediction[k]! * slope[a]!);
    const shift = lightShift(perVariance, law, times[frame]!);
    const weight = 1 / light.sigma[frame]! ** 2;
    for (let j = 0; j < m; j++) {
      for (let l = 0; l < n; l++) weighted[j * n + l]! += weight * decay.jacobian[j]![k]! * shift[l]!;
    }
  }
  const answer = new Float64Array(m * n);
  for (let i = 0; i < m; i++) {
    for (let j = 0; j < m; j++) {
      for (let l = 0; l < n; l++) answer[i * n + l]! += decay.covariance[i * m + j]! * weighted[j * n + l]!;
    }
  }
  return answer;
}

/** G: ∂N/∂θ of one frame. */
function lightShift(perVariance: readonly number[], law: LawFit | null, time: number): number[] {
  if (law === null) return [...perVariance, ...perVariance.map((slope) => 2 * time * slope)];
  const both = perVariance.length === 3 ? perVariance[0]! + perVariance[2]! : perVariance[0]!;
  return law.gradient(time).map((g) => g * both);
}

/** A number with its gradient by θ. */
export interface Derived {
  readonly value: number;
  readonly gradient: readonly number[];
}

/**
 * The diffusion coefficient that a law stands for, µm²/ns, of the light's spot: the line's mean over the axes; the
 * initial D of arrest and of the broken line; for a power law the displacement reached at the lifetime over 2τ,
 * Γ·τ^(α−1), since Γ has no unit that compares.
 */
export function diffusionOf(reading: Reading, joint: Joint): Derived {
  const { preferredLaw, line } = reading;
  const gradient = joint.theta.map(() => 0);
  if (preferredLaw === "line") {
    const components = line.intercept.length;
    if (components === 1) gradient[1] = 1;
    else {
      gradient[3] = 0.5;
      gradient[5] = 0.5;
    }
    return { value: meanDiffusion(line).value, gradient };
  }
  if (preferredLaw !== "power_law") {
    gradient[1] = 1;
    return { value: joint.theta[1]!, gradient };
  }
  const [, gamma, alpha] = joint.theta as [number, number, number];
  const tau = Math.max(joint.decay?.lifetime.value ?? reading.times.at(-1)!, 1e-9);
  const scale = tau ** (alpha - 1);
  gradient[1] = scale;
  gradient[2] = gamma * scale * Math.log(tau);
  return { value: gamma * scale, gradient };
}

/** gᵀCg */
export function quadratic(gradient: ArrayLike<number>, covariance: Float64Array): number {
  const n = gradient.length;
  let sum = 0;
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++) sum += gradient[i]! * covariance[i * n + j]! * gradient[j]!;
  return sum;
}
