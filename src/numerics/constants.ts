/**
 * Constants of physics in SI units.
 *
 * e, k_B and h are exact since the SI of 2019 (26th CGPM (2018), Resolution 1). ε₀ and the electron's mass are
 * measured: CODATA 2022 (Mohr, Newell, Taylor and Tiesinga, Rev. Mod. Phys. 97 (2025) 025002).
 */

/** e, C, exact. */
export const elementaryCharge = 1.602176634e-19;

/** k_B, J/K, exact. */
export const boltzmann = 1.380649e-23;

/** h, J s, exact. */
export const planck = 6.62607015e-34;

/** ħ = h/2π, J s, exact. */
export const reducedPlanck = planck / (2 * Math.PI);

/** ε₀, F/m, with its standard uncertainty. */
export const vacuumPermittivity = { value: 8.8541878188e-12, u: 0.0000000014e-12 } as const;

/** m₀, kg, with its standard uncertainty. */
export const electronMass = { value: 9.1093837139e-31, u: 0.0000000028e-31 } as const;
