import { LAYOUT } from "../frame/pixel-spot.ts";
import { referenceAt } from "../frame/references.ts";
import type { Reading } from "./reading.ts";
import { type WholeStack, wholeLightOf } from "./whole-stack.ts";

/**
 * The mean light of every frame over the whole picture by the models of widths and decay, photons per pixel, row-major:
 * a Gaussian spot on the preferred law of spread with the light of the preferred decay, on the course of centre and
 * background. A frame before the pulse holds background alone unless a response or earlier pulses reach into it.
 */
export function lightOfWidths(reading: Reading): Float64Array[] {
  const { stack, frames, models } = reading;
  const layout = LAYOUT[frames.kind];
  const described = { ...models, variance: varianceOf(reading), light: lightOf(reading) };
  return Array.from({ length: stack.frames }, (_, i) => {
    const p = referenceAt(frames, described, i);
    const out = new Float64Array(stack.width * stack.height).fill(models.background(i));
    if (described.light(i) <= 0) return out;
    const [x, xx] = [p[layout.position[0]]!, p[layout.variance[0]]!];
    const [y, xy, yy] = frames.kind === "map" ? [p[2]!, p[4]!, p[5]!] : [0, 0, 1];
    const determinant = xx * yy - xy * xy;
    const plane = frames.kind === "map" ? 2 * Math.PI * Math.sqrt(determinant) : Math.sqrt(2 * Math.PI * xx);
    const peak = p[layout.photons]! / plane;
    for (let k = 0; k < out.length; k++) {
      const [dx, dy] = [(k % stack.width) - x, Math.floor(k / stack.width) - y];
      out[k]! += peak * Math.exp(-0.5 * ((yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant));
    }
    return out;
  });
}

/** The same by the preferred model of the whole stack; a frame that it leaves out follows the widths. */
export function lightOfWhole(reading: Reading, whole: WholeStack): Float64Array[] {
  const fill = wholeLightOf(whole, reading.stack);
  const out = lightOfWidths(reading);
  for (const [frame, light] of out.entries()) fill(frame, light);
  return out;
}

/** Σ by the laws as they were fitted last: those that the reported D comes from. */
function varianceOf({ line, laws, preferredLaw, times }: Reading): (frame: number) => number[] {
  const law = preferredLaw === "line" ? null : laws[preferredLaw];
  return (i) => {
    const t = Math.max(times[i]!, 0);
    const straight = line.intercept.map((value, a) => value + 2 * line.diffusion[a]! * t);
    if (law === null) return straight;
    const isMap = straight.length === 3;
    const shift = law.value(t) - (isMap ? (straight[0]! + straight[2]!) / 2 : straight[0]!);
    return straight.map((value, a) => (a === 1 ? value : value + shift));
  };
}

/** Standard uncertainties from which light before the pulse is light. */
const SEEN = 3;

function lightOf({ stack, models, light, decays, flags }: Reading): (frame: number) => number {
  const fit = decays?.fits[decays.preferred] ?? null;
  const fitted = new Map(light.frames.map((frame, k) => [frame, fit?.prediction[k]]));
  const reached = stack.acquisition.period !== null || stack.acquisition.response !== null;
  return (i) => {
    const own = fitted.get(i);
    if (own !== undefined || !flags[i]!.includes("before-pulse")) return own ?? models.light(i);
    // what earlier pulses leave, as the frame shows it: a mean over its neighbours would see the new pulse
    const { value, sigma } = light;
    return reached && value[i]! > SEEN * sigma[i]! ? value[i]! : 0;
  };
}
