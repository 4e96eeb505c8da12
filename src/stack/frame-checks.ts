import type { Detector } from "./acquisition.ts";
import { InputFault } from "./fault.ts";
import type { Recording } from "./recording.ts";

/** Noise alone does not go further below the dark level than this, in standard deviations of the read-out. */
const DEEPEST_NOISE = 10;

/** So large a share of a frame below the dark level is no handful of dead pixels (common practice, no source). */
const DEAD_SHARE = 0.01;

/** Passes frames on, having looked at every pixel. */
export type FrameCheck = (frame: Float64Array, index: number) => void;

/**
 * Makes the check that every frame of a recording goes through as it is read.
 *
 * A value that is no finite number is refused. So is one below zero and further below the dark level than noise
 * reaches: a camera does not give it, something was subtracted and the noise of what is left is not known. Values
 * above zero but below the dark level are dead pixels when few, and a wrong offset when many.
 * @param detector null where the values are only looked at: then none is too low
 * @param dark dark frame, in place of the constant offset
 * @param unsigned the values are whole numbers that have no sign
 */
export function frameCheck(
  file: string,
  kind: Recording["kind"],
  width: number,
  detector: Detector | null,
  dark: Float64Array | null = null,
  unsigned = false,
): FrameCheck {
  const level = dark === null ? (detector?.offset ?? 0) : dark.reduce((least, each) => Math.min(least, each));
  const readNoise = detector?.readNoise ?? 0;
  const floor = detector === null ? -Number.MAX_VALUE : level - DEEPEST_NOISE * readNoise;
  if (unsigned && floor <= 0) return () => undefined;
  const place = (frame: number, pixel: number) => where(kind, width, frame, pixel);
  return (frame, index) => {
    let below = 0;
    for (let i = nextOutside(frame, 0, floor); i < frame.length; i = nextOutside(frame, i + 1, floor)) {
      const value = frame[i]!;
      if (!Number.isFinite(value)) throw notFinite(file, value, place(index, i));
      if (value < 0) throw tooLow(file, value, level, readNoise, place(index, i));
      below++;
    }
    if (below > DEAD_SHARE * frame.length) throw offsetTooHigh(file, index, below / frame.length, floor);
  };
}

/** The first pixel from `from` on that is below the floor or no finite number; the frame's length where none is. */
function nextOutside(frame: Float64Array, from: number, floor: number): number {
  let i = from;
  while (i < frame.length && frame[i]! >= floor && frame[i]! < Number.POSITIVE_INFINITY) i++;
  return i;
}

interface Place {
  /** "frame 12". */
  readonly frame: string;
  /** "pixel (x 3, y 4) of frame 12", counted from 0 within the frame as image viewers do. */
  readonly text: string;
}

function where(kind: Recording["kind"], width: number, index: number, pixel: number): Place {
  const frame = `frame ${index + 1}`;
  const [x, y] = [pixel % width, Math.floor(pixel / width)];
  return { frame, text: `${frame}, pixel ${kind === "trace" ? `x = ${x}` : `x = ${x}, y = ${y}`}` };
}

function notFinite(file: string, value: number, place: Place): InputFault {
  const what = Number.isNaN(value) ? "not a number (NaN)" : "infinite";
  return new InputFault(`${file}: ${place.text}, is ${what}; save the camera's own counts`, {
    file,
    where: place.frame,
  });
}

function tooLow(file: string, value: number, level: number, readNoise: number, place: Place): InputFault {
  const shown = Number(value.toPrecision(6));
  return new InputFault(
    `${file}: ${place.text}, holds ${shown}, far below the dark level ${Number(level.toPrecision(6))} for a read noise of ` +
      `${readNoise}; give the counts before any background was subtracted, or state detector.offset and detector.read_noise`,
    { file, where: place.frame },
  );
}

function offsetTooHigh(file: string, index: number, share: number, floor: number): InputFault {
  return new InputFault(
    `${file}: in frame ${index + 1}, ${Math.round(100 * share)} % of the pixels lie below ${Number(floor.toPrecision(6))}, the dark ` +
      "level less ten times the read noise; correct detector.offset, detector.read_noise or the dark frame",
    { file, where: `frame ${index + 1}` },
  );
}

/**
 * Refuses a recording in which all frames are the same to the last count: a still picture, or nothing at all.
 * Stops at the first difference, as a rule within the second frame.
 */
export function refuseStill(
  file: string,
  recording: Pick<Recording, "frames" | "height" | "width" | "read">,
): void {
  const { frames, height, width } = recording;
  const one = new Float64Array(height * width);
  const other = new Float64Array(height * width);
  recording.read(0, one);
  for (let index = 1; index < frames; index++) {
    recording.read(index, other);
    for (let i = 0; i < one.length; i++) if (one[i] !== other[i]) return;
  }
  const [value] = one;
  const what = one.some((each) => each !== value)
    ? "all frames are equal, so nothing changes with delay"
    : value === 0
      ? "every pixel of every frame is zero"
      : `every pixel of every frame holds ${value}`;
  throw new InputFault(`${file}: ${what}; check the export from the camera`, { file });
}
