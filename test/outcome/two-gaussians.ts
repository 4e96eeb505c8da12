import { createRandom } from "../../src/numerics/random.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import type { Stack } from "../../src/stack/stack.ts";
import { recorded } from "./recordings.ts";

/** Side of the pictures and of a pixel, µm; D, µm²/ns; τ, ns. */
const [SIDE, PIXEL, D, TAU] = [64, 0.1, 0.02, 5];
const BACKGROUND = 0.3;

/**
 * A counted recording of two Gaussians of one centre that spread and decay: the closed form
 * Σ wᵢ·N·e^(−t/τ)·exp(−r²/2sᵢ(t))/2πsᵢ(t), sᵢ(t) = sᵢ + 2Dt + a²/12. D = 0.2 cm²/s, τ = 5 ns, 16 frames 0.6 ns apart.
 *
 * @param parts weights and variances, µm²
 */
export function twoGaussians(
  parts: readonly (readonly [weight: number, variance: number])[],
  photons: number,
  seed: number,
): Stack {
  const random = createRandom(seed);
  const { acquisition } = recorded({
    recording: { frames: 16, width: SIDE, height: SIDE },
    time: { step: "0.6 ns" },
  }).stack;
  const centre = (SIDE / 2 - 0.3) * PIXEL;
  const frames = acquisition.time.delays.map((t) =>
    Float64Array.from({ length: SIDE * SIDE }, (_, i) => {
      const [dx, dy] = [(i % SIDE) * PIXEL - centre, Math.floor(i / SIDE) * PIXEL - centre];
      const light = parts.reduce((sum, [weight, variance]) => {
        const s = variance + PIXEL ** 2 / 12 + 2 * D * t;
        return sum + (weight * Math.exp(-(dx * dx + dy * dy) / (2 * s))) / (2 * Math.PI * s);
      }, 0);
      return random.poisson(photons * Math.exp(-t / TAU) * light * PIXEL ** 2 + BACKGROUND);
    }),
  );
  return memoryStack({ frames, height: SIDE, width: SIDE, acquisition });
}
