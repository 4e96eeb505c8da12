import { createRandom, type Random } from "../numerics/random.ts";
import { InputFault } from "../stack/fault.ts";
import type { Picture } from "../stack/tiff/write.ts";
import { acquisitionToml } from "./acquisition-toml.ts";
import { record } from "./detector.ts";
import { meanFrames } from "./mean-frames.ts";
import type { FrameLight, MeanFrames } from "./recording.ts";
import type { Scenario } from "./scenario.ts";
import { type Truth, truthOf } from "./truth.ts";

/** What a scenario's detector expects in every pixel, and the truth behind it. */
export interface Expectation {
  /** Mean photons per pixel with background, row-major (y, x), one array a frame. */
  readonly frames: readonly Float64Array[];
  readonly truth: Truth;
}

/** A synthetic recording. */
export interface Synthetic {
  readonly kind: "map" | "trace";
  readonly height: number;
  readonly width: number;
  /** Stored counts, row-major (y, x), one array a frame. */
  readonly frames: readonly Uint16Array[];
  /** Text of the acquisition file to lay beside it. */
  readonly acquisitionToml: string;
  readonly truth: Truth;
}

/**
 * The noise-free recording of a scenario; draw from it as often as needed with `drawFrames`.
 * @throws InputFault where the spot outgrows the solver or the first frame after the pulse stays dark
 */
export function expectation(scenario: Scenario): Expectation {
  const { frames, light } = meanOf(scenario);
  const first = scenario.recording.delays.findIndex((delay) => delay >= 0);
  const brightness = light[first]?.amount ?? 0;
  if (!(brightness > 1e-12)) {
    throw new InputFault(
      `${scenario.file}: no light is left in the first frame after the pulse (frame ${first + 1}); start earlier or lengthen life.lifetime`,
      { file: scenario.file, where: "life.lifetime" },
    );
  }
  const scale = scenario.photons / brightness;
  const inPhotons: FrameLight[] = light.map((each) => ({ ...each, amount: each.amount * scale }));
  return {
    frames: frames.map((frame) => frame.map((value) => Math.max(value, 0) * scale + scenario.background)),
    truth: truthOf(scenario, inPhotons),
  };
}

function meanOf(scenario: Scenario): MeanFrames {
  try {
    return meanFrames(scenario.medium, scenario.start, scenario.recording);
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    throw new InputFault(
      `${scenario.file}: ${error.message} Use a larger sigma0, fewer frames or a smaller D.`,
      {
        file: scenario.file,
        where: "motion.sigma0",
        cause: error,
      },
    );
  }
}

/** One draw of the detector's counts; frame i uses the substream i, whatever the frames before it. */
export function drawFrames(scenario: Scenario, mean: Expectation, random: Random): Uint16Array[] {
  return mean.frames.map((frame, i) => record(frame, scenario.acquisition.detector, random.spawn(i)));
}

/**
 * A synthetic recording with known truth.
 *
 * @param random by default from the scenario's seed
 * @throws InputFault as `expectation` does
 */
export function synthesise(scenario: Scenario, random: Random = createRandom(scenario.seed)): Synthetic {
  const mean = expectation(scenario);
  return {
    kind: scenario.kind,
    height: scenario.height,
    width: scenario.width,
    frames: drawFrames(scenario, mean, random),
    acquisitionToml: acquisitionToml(scenario.acquisitionSettings),
    truth: mean.truth,
  };
}

/** The recording as TIFF pages: one a frame, or one page of time over space for a trace. */
export function picturesOf({ kind, frames, height, width }: Synthetic): Picture[] {
  if (kind === "map") return frames.map((data) => ({ width, height, data }));
  const data = new Uint16Array(frames.length * width);
  frames.forEach((frame, i) => {
    data.set(frame, i * width);
  });
  return [{ width, height: frames.length, data }];
}
