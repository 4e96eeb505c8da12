import {
  boltzmann,
  electronMass,
  elementaryCharge,
  reducedPlanck,
  vacuumPermittivity,
} from "../numerics/constants.ts";
import type { Input } from "../numerics/propagate.ts";
import { propagate } from "../numerics/propagate.ts";
import type { Acquisition } from "../stack/acquisition.ts";
import type { Quantity, Result } from "./result.ts";

const PER_UM2_IN_CM2 = 1e8;
/** n/n_Q from which the degenerate relation is shown. */
const DENSE = 0.1;

/**
 * Exciton density in the first frame's centre and what follows from it; null where neither a density nor a blue shift
 * with its layer distance and permittivity is given.
 *
 * Blue shift, plate capacitor: n = ΔE·ε₀ε_r/(e²d), a lower estimate since correlations shrink the true shift (Laikhtman
 * and Rapaport, Phys. Rev. B 80 (2009) 195313). Degeneracy temperature T = 2πħ²n/(g·m·k_B) with g = 1, so the printed T
 * divides by a known degeneracy. With x = n/n_Q, n_Q = m·k_B·T/(2πħ²), the Einstein relation of an ideal
 * two-dimensional gas is D/μ = (k_BT/e)·x/(eˣ − 1) for bosons (excitons) and (k_BT/e)·x/(1 − e⁻ˣ) for fermions
 * (emission order 2): from μ = e·n⁻¹·D·∂n/∂E_F (Kubo 1966; derived for a constant density of states).
 */
export function densityOf(acquisition: Acquisition, mobility: Quantity | null): Result["density"] {
  const { sample } = acquisition;
  const stated = sample.density;
  const found = stated !== null ? { input: stated, from: "stated" as const } : fromBlueShift(acquisition);
  if (found === null) return null;
  const { input, from } = found;
  const density = { value: input.value * PER_UM2_IN_CM2, u: input.u * PER_UM2_IN_CM2 };
  const { mass, temperature } = sample;
  if (mass === null) {
    return {
      density_per_cm2: density,
      from,
      degeneracy_temperature_k: null,
      filling: null,
      degenerate_mobility: null,
    };
  }
  const inverse = (2 * Math.PI * reducedPlanck ** 2) / (electronMass.value * boltzmann);
  const degeneracy = propagate((x) => (inverse * x[0]! * 1e12) / x[1]!, [input, mass]);
  const filling = temperature === null ? null : degeneracy.value / temperature.value;
  return {
    density_per_cm2: density,
    from,
    degeneracy_temperature_k: { value: degeneracy.value, u: degeneracy.u },
    filling,
    degenerate_mobility:
      mobility === null || filling === null || filling < DENSE
        ? null
        : degenerate(mobility, filling, sample.emissionOrder),
  };
}

function fromBlueShift({ sample }: Acquisition): { input: Input; from: "blue shift" } | null {
  const { blueShift, layerDistance, permittivity } = sample;
  if (blueShift === null || layerDistance === null || permittivity === null) return null;
  // meV, nm → m⁻² → µm⁻²
  const n = (x: readonly number[]): number =>
    (((x[0]! * 1e-3) / elementaryCharge) * vacuumPermittivity.value * x[2]!) / (x[1]! * 1e-9) / 1e12;
  const { value, u } = propagate(n, [blueShift, layerDistance, permittivity]);
  return { input: { value, u }, from: "blue shift" };
}

function degenerate(mobility: Quantity, x: number, order: 1 | 2): { value: number; u: number } {
  const factor = order === 1 ? Math.expm1(x) / x : -Math.expm1(-x) / x;
  return { value: mobility.value * factor, u: mobility.u * factor };
}
