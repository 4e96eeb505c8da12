import ndarray from "ndarray";
import { InputFault } from "./fault.ts";
import type { Pictures } from "./tiff/read.ts";

/** Pictures laid out as frames in order of delay, values as stored. */
export interface Recording {
  readonly kind: "map" | "trace";
  readonly axes: string;
  /** As stored: [frames, height, width] or the [height, width] of a single picture. */
  readonly shape: readonly number[];
  readonly frames: number;
  readonly height: number;
  readonly width: number;
  /** Copies frame `index` (0-based) into `into`, length height·width, row-major. */
  read(index: number, into: Float64Array): void;
}

/** Axes that a recording may state: T time, Y and X space, the slowest first. */
const AXES = ["TYX", "TX", "XT"] as const;

/**
 * Lays pictures out by their axes: "TYX" is one map a picture (the default for several pictures), "TX" and "XT" are
 * a streak trace in a single picture, time along its rows or columns.
 *
 * @param axes as stated, or null
 * @param statedIn how a message calls the place where the axes are stated
 * @throws InputFault when the axes do not exist or do not fit, or a single picture has none
 */
export function layOut(file: string, pictures: Pictures, axes: string | null, statedIn: string): Recording {
  const single = pictures.count === 1;
  if (axes === null) {
    if (!single) return maps(pictures);
    throw new InputFault(
      `${file} holds a single picture; for a streak trace state axes = "TX" (each row a time) or "XT" in its acquisition file`,
      { file, where: "axes" },
    );
  }
  const stated = AXES.find((each) => each === axes.toUpperCase());
  const fault = (wrong: string, mend: string) =>
    new InputFault(`${statedIn}: axes = "${axes}" ${wrong}; ${mend}`, { file: statedIn, where: "axes" });
  if (stated === undefined) {
    throw fault("is not known", 'write "TYX" for a stack of frames, "TX" or "XT" for a streak trace');
  }
  if (stated === "TYX" && single)
    throw fault("needs several pictures", `${file} holds one; state "TX" or "XT" for a trace`);
  if (stated === "TYX") return maps(pictures);
  if (!single) throw fault(`is for a single picture`, `${file} holds ${pictures.count}; state "TYX"`);
  return trace(pictures, stated);
}

/** A single picture as it is, for looking at before anything is known of it. */
export function layOutUnstated(pictures: Pictures): Recording {
  if (pictures.count > 1) return maps(pictures);
  const { height, width } = pictures;
  return { ...maps(pictures), axes: "YX", shape: [height, width] };
}

function maps(pictures: Pictures): Recording {
  const { count, height, width } = pictures;
  return {
    kind: height === 1 ? "trace" : "map",
    axes: "TYX",
    shape: [count, height, width],
    frames: count,
    height,
    width,
    read: (index, into) => pictures.read(index, into),
  };
}

function trace(pictures: Pictures, axes: "TX" | "XT"): Recording {
  const { height, width } = pictures;
  const stored = new Float64Array(height * width);
  pictures.read(0, stored);
  const picture = ndarray(stored, [height, width]);
  const rows = axes === "TX" ? picture : picture.transpose(1, 0);
  const [frames, length] = rows.shape as [number, number];
  return {
    kind: "trace",
    axes,
    shape: [height, width],
    frames,
    height: 1,
    width: length,
    read(index, into) {
      for (let x = 0; x < length; x++) into[x] = rows.get(index, x);
    },
  };
}
