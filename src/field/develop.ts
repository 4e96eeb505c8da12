import { lightBehindSlit, lightPerPixel } from "./aperture.ts";
import { type Grid, moments } from "./grid.ts";
import {
  centreOf,
  EMPTY_LIGHT,
  type FrameLight,
  hasSlit,
  type MeanFrames,
  type Recording,
} from "./recording.ts";
import type { Transform } from "./transform.ts";

/** One frame's light as spectra of n and m, averaged over its gate. */
export interface Exposed {
  readonly grid: Grid;
  readonly transform: Transform;
  readonly recording: Recording;
  readonly frame: number;
  /** Used up by `develop`. */
  readonly free: Float64Array;
  readonly caught: Float64Array;
  /** ε */
  readonly trapLight: number;
}

interface Developed {
  readonly pixels: Float64Array;
  readonly light: FrameLight;
}

/** A frame's pixels and what its light is in truth. */
export function develop(exposed: Exposed): Developed {
  const { grid, recording, free: spectrum, caught, trapLight } = exposed;
  for (let i = 0; i < caught.length; i++) {
    caught[i] = caught[i]! * trapLight;
    spectrum[i] = spectrum[i]! + caught[i]!;
  }
  return {
    pixels: lightPerPixel(grid, spectrum, recording, centreOf(recording, exposed.frame)),
    light: hasSlit(recording) ? slitLight(exposed) : planeLight(exposed),
  };
}

/** All frames of a recording, those without light left dark. */
export function developed(recording: Recording, one: (frame: number) => Developed | null): MeanFrames {
  const all = recording.delays.map((_, frame) => one(frame) ?? dark(recording));
  return { frames: all.map(({ pixels }) => pixels), light: all.map(({ light }) => light) };
}

function dark({ columns, rows }: Recording): Developed {
  return { pixels: new Float64Array(columns * rows), light: EMPTY_LIGHT };
}

function slitLight({ grid, free: spectrum, caught, recording }: Exposed): FrameLight {
  const { amount, varianceX } = lightBehindSlit(grid, spectrum, recording);
  if (amount === 0) return EMPTY_LIGHT;
  const fromTraps = caught[0] === 0 ? 0 : lightBehindSlit(grid, caught, recording).amount;
  return { amount, covariance: [varianceX, 0, 0], caughtShare: fromTraps / amount };
}

function planeLight({ grid, transform, free: spectrum, caught }: Exposed): FrameLight {
  if (spectrum[0] === 0) return EMPTY_LIGHT;
  const caughtShare = caught[0]! / spectrum[0]!;
  const field = new Float64Array(grid.nx * grid.ny);
  transform.toField(spectrum, field);
  return { ...moments(grid, field), caughtShare };
}
