import type { Covariance } from "../frame/spot.ts";
import { boltzmann, elementaryCharge } from "../numerics/constants.ts";
import type { FrameLight } from "./recording.ts";
import type { Scenario } from "./scenario.ts";
import { movingTime } from "./travel.ts";

/** cm²/s in one µm²/ns. */
const CM2_PER_S = 10;

/** What is true about a synthetic recording; lengths, times and units as the names say. */
export interface Truth {
  readonly schema: "gleamwalk.truth/1";
  readonly scenario: string;
  readonly seed: number;
  /** Half the tensor's trace on a map, D_xx on a trace; of few excitons, where they repel each other. */
  readonly diffusion_coefficient_cm2_per_s: number;
  readonly tensor_cm2_per_s: Principal;
  /** τ of the free excitons. */
  readonly lifetime_ns: number;
  /** √(½⟨x²⟩ at the end of life), mean over the axes of a map. */
  readonly diffusion_length_um: number;
  readonly mobility_cm2_per_v_s: number | null;
  /** β = u₀n₀/k_BT at the centre right after a pulse onto an empty sample: D is (1 + β) times as large there. */
  readonly repulsion: number;
  readonly annihilation_k_n0_per_ns: number;
  readonly capture_per_ns: number;
  readonly trap_light: number | null;
  readonly trap_lifetime_ns: number | null;
  /** Σ₀ of the excitation: xx, xy, yy. */
  readonly initial_variance_um2: Covariance;
  /** What a fit of the picture finds on top of the variances below: blur, and a²/12 for the pixel. */
  readonly blur_variance_um2: number;
  readonly pixel_variance_um2: number;
  readonly background_photons_per_pixel: number;
  readonly frames: readonly TrueFrame[];
}

interface Principal {
  readonly xx: number;
  readonly xy: number;
  readonly yy: number;
  readonly major: number;
  readonly minor: number;
  /** Of the major axis from x, −90 to 90. */
  readonly angle_deg: number;
}

interface TrueFrame {
  readonly index: number;
  readonly delay_ns: number;
  /** Expected photons of the spot, beyond the picture's border too. */
  readonly photons: number;
  /** Per axis: half the trace on a map, xx on a trace. */
  readonly variance_um2: number;
  readonly covariance_um2: Covariance;
  readonly trapped_share: number;
}

/** @param light each frame's light in photons */
export function truthOf(scenario: Scenario, light: readonly FrameLight[]): Truth {
  const { medium, acquisition, recording } = scenario;
  const map = scenario.kind === "map";
  const alongAxes = ([xx, , yy]: Covariance) => (map ? (xx + yy) / 2 : xx);
  const d = alongAxes(medium.diffusion);
  const temperature = acquisition.sample.temperature?.value ?? null;
  const moving = movingTime(medium, scenario.start);
  const caught = medium.capture > 0;
  return {
    schema: "gleamwalk.truth/1",
    scenario: scenario.file,
    seed: scenario.seed,
    diffusion_coefficient_cm2_per_s: d * CM2_PER_S,
    tensor_cm2_per_s: principal(medium.diffusion),
    lifetime_ns: medium.lifetime,
    diffusion_length_um: Math.sqrt(d * moving),
    mobility_cm2_per_v_s:
      temperature === null ? null : (d * CM2_PER_S * (elementaryCharge / boltzmann)) / temperature,
    repulsion: scenario.repulsion,
    annihilation_k_n0_per_ns: scenario.annihilationRate,
    capture_per_ns: medium.capture,
    trap_light: caught ? medium.trapLight : null,
    trap_lifetime_ns: caught ? medium.trapLifetime : null,
    initial_variance_um2: scenario.start.covariance,
    blur_variance_um2: recording.psfVariance,
    pixel_variance_um2: recording.pixelX ** 2 / 12,
    background_photons_per_pixel: scenario.background,
    frames: light.map(({ amount, covariance, caughtShare }, index) => ({
      index,
      delay_ns: recording.delays[index]!,
      photons: amount,
      variance_um2: alongAxes(covariance),
      covariance_um2: covariance,
      trapped_share: caughtShare,
    })),
  };
}

function principal([xx, xy, yy]: Covariance): Principal {
  const mean = ((xx + yy) / 2) * CM2_PER_S;
  const half = Math.hypot((xx - yy) / 2, xy) * CM2_PER_S;
  return {
    xx: xx * CM2_PER_S,
    xy: xy * CM2_PER_S,
    yy: yy * CM2_PER_S,
    major: mean + half,
    minor: mean - half,
    angle_deg: (Math.atan2(2 * xy, xx - yy) * 90) / Math.PI,
  };
}
