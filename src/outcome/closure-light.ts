import { similarLight } from "../field/similar/similar-light.ts";
import { problemOf } from "../field/stack-fit/parameters.ts";
import { LAYOUT } from "../frame/pixel-spot.ts";
import { referenceAt } from "../frame/references.ts";
import type { Reading } from "./reading.ts";
import { stackDataOf, type WholeStack } from "./whole-stack.ts";

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
export function lightOfWhole(reading: Reading, { fits }: WholeStack): Float64Array[] {
  const data = stackDataOf(reading);
  const { stack } = reading;
  const { names, parameters } = fits.preferred;
  const value = Object.fromEntries(names.map((name, j) => [name, parameters[j]!]));
  const light = similarLight(problemOf(data, value));
  const { kind, pixel } = data;
  const area = kind === "map" ? pixel * pixel : pixel;
  const out = lightOfWidths(reading);
  for (const [k, { frame, shift, background }] of data.frames.entries()) {
    const x0 = -value.x! - shift[0];
    const y0 = kind === "map" ? -value.y! - shift[1] : 0;
    light.fill(k, { x0, y0, pixel, width: stack.width, height: stack.height }, out[frame]!);
    const level = value.background! + background;
    for (let i = 0; i < out[frame]!.length; i++) {
      out[frame]![i] = value.amplitude! * area * out[frame]![i]! + level;
    }
  }
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

function lightOf({ stack, models, light, decays, flags }: Reading): (frame: number) => number {
  const fit = decays?.fits[decays.preferred] ?? null;
  const fitted = new Map(light.frames.map((frame, k) => [frame, fit?.prediction[k]]));
  const reached = stack.acquisition.period !== null || stack.acquisition.response !== null;
  return (i) => {
    if (flags[i]!.includes("before-pulse") && !reached) return 0;
    return fitted.get(i) ?? models.light(i);
  };
}
