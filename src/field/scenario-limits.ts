import { InputFault } from "../stack/fault.ts";
import type { Scenario } from "./scenario.ts";

/**
 * Limits within which the solver is exact and quick. They lie far outside what is measured: a scenario beyond them
 * has a slip in a unit.
 */
const LIMITS: readonly { where: string; wrong: string; beyond: (scenario: Scenario) => boolean }[] = [
  {
    where: "recording.photons",
    wrong: "is more than 1e12; a camera counts fewer",
    beyond: ({ photons }) => photons > 1e12,
  },
  {
    where: "recording.background",
    wrong: "is more than 1e9 photons a pixel; a camera counts fewer",
    beyond: ({ background }) => background > 1e9,
  },
  {
    where: "motion.sigma0",
    wrong: "makes a spot narrower than a twentieth of a pixel; give a wider spot or smaller pixels",
    beyond: ({ start, recording: { pixelX } }) => {
      const [xx, xy, yy] = start.covariance;
      return !(Math.min(xx - (xy * xy) / yy, yy - (xy * xy) / xx) >= (0.05 * pixelX) ** 2);
    },
  },
  {
    where: "motion.sigma0",
    wrong: "makes a spot wider than a thousand pictures; check its unit",
    beyond: ({ start, width, recording: { pixelX } }) =>
      Math.max(start.covariance[0], start.covariance[2]) > (1e3 * width * pixelX) ** 2,
  },
  {
    where: "motion.repulsion",
    wrong: "is more than 100 thermal energies; u₀n₀/k_BT of dipolar excitons stays far below",
    beyond: ({ repulsion }) => repulsion > 100,
  },
  {
    where: "life.annihilation",
    wrong: "is more than a thousand times the rate of decay; check its unit",
    beyond: ({ annihilationRate, medium }) => annihilationRate * medium.lifetime > 1e3,
  },
  {
    where: "life.capture",
    wrong: "is more than a thousand times the rate of decay; check its unit",
    beyond: ({ medium }) => medium.capture * medium.lifetime > 1e3,
  },
  {
    where: "excitation.period",
    wrong: "is less than a hundredth of the lifetime; such light is steady, check the unit",
    beyond: ({ recording: { period }, medium }) =>
      period !== null &&
      period < 0.01 * Math.max(medium.lifetime, medium.capture > 0 ? medium.trapLifetime : 0),
  },
  {
    where: "time.gate",
    wrong: "or the instrument's response spans more than a hundred periods; check its unit",
    beyond: ({ recording: { gate, period, responseSigma } }) =>
      period !== null && gate + 12 * responseSigma > 100 * period,
  },
];

/** @throws InputFault naming the first key whose value lies beyond what can be simulated */
export function checkLimits(scenario: Scenario): void {
  const limit = LIMITS.find(({ beyond }) => beyond(scenario));
  if (limit === undefined) return;
  const { file } = scenario;
  throw new InputFault(`${file}: ${limit.where} ${limit.wrong}`, { file, where: limit.where });
}
