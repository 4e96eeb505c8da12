import { pixelOf } from "./build-acquisition.ts";
import { delaysOf } from "./delays.ts";
import { frameCheck } from "./frame-checks.ts";
import { type OpenOptions, openRaw, type RawStack } from "./open.ts";
import { quantityOf } from "./values.ts";

/** Stored values of one frame. */
export interface FrameInspection {
  readonly index: number;
  readonly delay_ns: number | null;
  readonly sum: number;
  readonly min: number;
  readonly max: number;
  /** Pixels at the level of saturation or above it. */
  readonly full: number;
}

/** What a file holds, in stored values before any correction; the keys of `inspect --json`. */
export interface Inspection {
  readonly file: string;
  /** "YX" for a single picture whose axes nobody stated. */
  readonly axes: string;
  readonly shape: readonly number[];
  /** "uint16", "float32", … */
  readonly sample_type: string;
  readonly sum: number;
  readonly min: number;
  readonly max: number;
  readonly pixel_um: number | null;
  readonly delays_ns: readonly number[] | null;
  /** As stated, or else the largest number that 8- or 16-bit integers hold; null for others. */
  readonly saturation: number | null;
  readonly frames: readonly FrameInspection[];
}

/**
 * Looks at every stored value once; needs no acquisition file.
 * @throws InputFault when a file cannot be read, or a pixel is not a finite number
 */
export async function inspectStack(path: string, options: OpenOptions = {}): Promise<Inspection> {
  const raw = await openRaw(path, options);
  const delays = raw.axes === "YX" ? null : (delaysOf(raw.settings, raw.frames)?.delays ?? null);
  const saturation = quantityOf(raw.settings, "detector.saturation")?.value ?? raw.largest;
  const frames = inspectFrames(raw, delays, saturation);
  return {
    file: path,
    axes: raw.axes,
    shape: raw.shape,
    sample_type: raw.sampleType,
    sum: frames.reduce((sum, frame) => sum + frame.sum, 0),
    min: frames.reduce((min, frame) => Math.min(min, frame.min), Number.POSITIVE_INFINITY),
    max: frames.reduce((max, frame) => Math.max(max, frame.max), Number.NEGATIVE_INFINITY),
    pixel_um: pixelOf(raw.settings)?.value ?? null,
    delays_ns: delays,
    saturation,
    frames,
  };
}

function inspectFrames(
  raw: RawStack,
  delays: readonly number[] | null,
  saturation: number | null,
): FrameInspection[] {
  const check = frameCheck(raw.file, raw.kind, raw.width, null);
  const frame = new Float64Array(raw.height * raw.width);
  const full = saturation ?? Number.POSITIVE_INFINITY;
  return Array.from({ length: raw.frames }, (_, index) => {
    raw.read(index, frame);
    check(frame, index);
    return { index, delay_ns: delays?.[index] ?? null, ...extremes(frame, full) };
  });
}

function extremes(frame: Float64Array, saturation: number) {
  let [sum, min, max, full] = [0, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, 0];
  for (let i = 0; i < frame.length; i++) {
    const value = frame[i]!;
    sum += value;
    if (value < min) min = value;
    if (value > max) max = value;
    if (value >= saturation) full++;
  }
  return { sum, min, max, full };
}
