import type { Covariance } from "../frame/spot.ts";

/**
 * What the excitons live in:
 *
 *     ∂n/∂t = ∇·D(1 + b n)∇n − n/τ − k n² − c n        free excitons, density n
 *     ∂m/∂t = c n − m/τ_m                     caught excitons, which stay where they are
 *     light = n + ε m
 *
 * k is defined by dn/dt = −k n² (papers that write −½γn² have γ = 2k). b = u₀/k_BT: excitons with a dipole moment
 * repel each other with the energy u₀n and drift down its slope, a flux −D·n·∇(u₀n)/k_BT on top of −D∇n (Ivanov,
 * Europhys. Lett. 59, 586, 2002, cited from memory).
 */
export interface Medium {
  /** D, µm²/ns. A trace uses all three too: excitons also leave the slit sideways. */
  readonly diffusion: Covariance;
  /** τ, ns; Infinity for excitons that do not end by themselves. */
  readonly lifetime: number;
  /** b, area per exciton: b times a density of the start's unit is by how much of itself D is larger there. */
  readonly repulsion: number;
  /** k, area per time and exciton: k times a density of the start's unit is a rate in 1/ns. */
  readonly annihilation: number;
  /** c, 1/ns */
  readonly capture: number;
  /** ε: light of a caught exciton relative to a free one's. */
  readonly trapLight: number;
  /** τ_m, ns; Infinity where caught excitons never end. */
  readonly trapLifetime: number;
}

/** The Gaussian spot that one pulse makes: n(r, 0) = amount/(2π√|Σ₀|)·exp(−½ rᵀΣ₀⁻¹r). */
export interface Start {
  /** ∫n dA, in excitons or in whatever unit the light is wanted in. */
  readonly amount: number;
  /** Σ₀, µm² */
  readonly covariance: Covariance;
}

/** Plain diffusion with one lifetime: no repulsion, no annihilation, no traps. */
export function plainMedium(diffusion: Covariance, lifetime: number): Medium {
  return {
    diffusion,
    lifetime,
    repulsion: 0,
    annihilation: 0,
    capture: 0,
    trapLight: 0,
    trapLifetime: Infinity,
  };
}

/** γ = 1/τ + c: the rate at which free excitons go without meeting each other, 1/ns. */
export function removalRate(medium: Medium): number {
  return 1 / medium.lifetime + medium.capture;
}

/** Density at the centre of the start: amount/(2π√|Σ₀|). */
export function peakDensity(start: Start): number {
  return start.amount / (2 * Math.PI * Math.sqrt(determinant(start.covariance)));
}

/** |Σ| of a symmetric 2×2 matrix. */
export function determinant([xx, xy, yy]: Covariance): number {
  return xx * yy - xy * xy;
}

/** Σ(t) = Σ₀ + 2 D t (Einstein 1905, in tensor form), µm². */
export function spreadCovariance(start: Covariance, diffusion: Covariance, t: number): Covariance {
  return [start[0] + 2 * diffusion[0] * t, start[1] + 2 * diffusion[1] * t, start[2] + 2 * diffusion[2] * t];
}

/** The symmetric tensor with the given principal values, its major axis turned by `angle` (rad) from x towards y. */
export function tensorFromAxes(major: number, minor: number, angle: number): Covariance {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return [major * c * c + minor * s * s, (major - minor) * c * s, major * s * s + minor * c * c];
}
