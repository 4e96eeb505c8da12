import { boltzmann, elementaryCharge } from "../numerics/constants.ts";
import type { Measured } from "../stack/acquisition.ts";

/** k_BT in meV of a temperature in K; k_B/e is exact since the SI of 2019. */
export function thermalEnergy({ value, u }: Measured): Measured {
  const perKelvin = (1e3 * boltzmann) / elementaryCharge;
  return { value: perKelvin * value, u: perKelvin * u };
}
