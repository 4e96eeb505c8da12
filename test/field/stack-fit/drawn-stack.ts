import { readScenario } from "../../../src/field/scenario.ts";
import type { Values } from "../../../src/field/stack-fit/parameters.ts";
import type { StackData } from "../../../src/field/stack-fit/stack-data.ts";
import { drawFrames, expectation } from "../../../src/field/synthesise.ts";
import { createRandom } from "../../../src/numerics/random.ts";

/** Side of the frames, pixels of 0.1 µm. */
const SIDE = 36;

export const TRUTH = { x: 1.76, y: 1.71, s: 0.09, D: 0.02, tau: 5, background: 0.4 } as const;

/** Draws of a recording of D = 0.2 cm²/s, τ = 5 ns by the Fourier solver of `synth`, 16 frames 0.6 ns apart unless said. */
export function drawnStacks(
  life: string,
  photons: number,
  { frames = 16, step = 0.6 }: { frames?: number; step?: number } = {},
): { draw(seed: number): StackData; start: Values } {
  const scenario = readScenario(
    `[recording]
frames = ${frames}
width = ${SIDE}
height = ${SIDE}
photons = ${photons}
background = ${TRUTH.background}
seed = 1
[space]
pixel = "0.1 um"
[time]
first = "0 ns"
step = "${step} ns"
[motion]
diffusion_coefficient = "0.2 cm^2/s"
sigma0 = "0.3 um"
centre_x = "${TRUTH.x} um"
centre_y = "${TRUTH.y} um"
[life]
lifetime = "${TRUTH.tau} ns"
${life}`,
    "scenario.toml",
  );
  const mean = expectation(scenario);
  const stackOf = (pictures: readonly ArrayLike<number>[]): StackData => ({
    kind: "map",
    pixel: 0.1,
    noise: { excess: 1, floor: 0 },
    gate: 0,
    responseSigma: 0,
    period: null,
    slit: null,
    blurVariance: 0,
    frames: pictures.map((counts, i) => ({
      frame: i,
      delay: step * i,
      shift: [0, 0],
      background: 0,
      variance: TRUTH.s + 2 * TRUTH.D * step * i,
      patch: {
        rectangle: { x0: 0, y0: 0, width: SIDE, height: SIDE },
        data: Float32Array.from(counts),
        outerCount: 0,
        outerSum: 0,
        excluded: [],
      },
    })),
  });
  return {
    draw: (seed) => stackOf(drawFrames(scenario, mean, createRandom(seed))),
    start: { ...TRUTH, amplitude: photons },
  };
}
