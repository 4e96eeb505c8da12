import type { Parameters } from "./kernel.ts";
import { LAYOUT } from "./pixel-spot.ts";
import type { FrameSet } from "./prepare.ts";

/** The smooth models that a frame is read against; µm and photons. */
export interface SmoothModels {
  /** Expected photons of frame i, > 0. */
  light(frame: number): number;
  /** Σ of frame i: xx, xy, yy (map) or xx (trace), µm². */
  variance(frame: number): readonly number[];
  /** Centre of frame i, µm. */
  centre(frame: number): readonly [x: number, y: number];
  /** Background of frame i, photons per pixel. */
  background(frame: number): number;
}

/** Narrowest reference, as a share of the typical variance: below it the law has left the data behind. */
const NARROWEST = 0.05;

/** Kernel parameters of frame i by the smooth models, kept where the kernel can be evaluated. */
export function referenceAt(frames: FrameSet, models: SmoothModels, frame: number): Parameters {
  const { kind, pixel, typical, noise } = frames;
  const layout = LAYOUT[kind];
  const p = typical.slice();
  p[0] = Math.max(models.light(frame), 1e-3);
  const centre = models.centre(frame);
  for (const [axis, at] of layout.position.entries()) p[at] = centre[axis]! / pixel;
  const background = models.background(frame);
  p[layout.background] = noise.floor > 0 ? background : Math.max(background, smallestBackground(frames));
  const area = pixel * pixel;
  const variance = models.variance(frame).map((value) => value / area);
  const floor = NARROWEST * typical[layout.variance[0]]!;
  if (kind === "trace") {
    p[2] = Math.max(variance[0]!, floor);
    return p;
  }
  const [xx, yy] = [Math.max(variance[0]!, floor), Math.max(variance[2]!, floor)];
  const most = 0.95 * Math.sqrt(xx * yy);
  p[3] = xx;
  p[4] = Math.min(Math.max(variance[1]!, -most), most);
  p[5] = yy;
  return p;
}

/** Half a photon in the whole recording: what a photon-counting background of nothing may still be. */
function smallestBackground(frames: FrameSet): number {
  const { patches } = frames;
  const pixels = patches[0]!.data.length + patches[0]!.outerCount;
  return 0.5 / (pixels * patches.length);
}
