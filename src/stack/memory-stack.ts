import type { Acquisition } from "./acquisition.ts";
import { InputFault } from "./fault.ts";
import type { Stack } from "./stack.ts";

/** Frames held in memory, row-major, in stored counts. */
export interface MemoryFrames {
  readonly frames: readonly ArrayLike<number>[];
  /** Rows of a map; 1 for a trace. */
  readonly height: number;
  readonly width: number;
  readonly acquisition: Acquisition;
  /** Default: "trace" for frames one pixel high, else "map". */
  readonly kind?: Stack["kind"];
  readonly dark?: Float64Array;
  /** What the result's `input` block says; default: the name "memory" and no checksum. */
  readonly source?: Partial<Stack["source"]>;
}

/**
 * A stack over arrays that are already in memory.
 *
 * @throws InputFault when a frame, the dark frame or the list of delays has the wrong length
 */
export function memoryStack(input: MemoryFrames): Stack {
  const { frames, height, width, acquisition } = input;
  const kind = input.kind ?? (height === 1 ? "trace" : "map");
  checkLengths(input);
  return {
    kind,
    frames: frames.length,
    height,
    width,
    read(index, into) {
      const frame = frames[index];
      if (frame === undefined) throw new RangeError(`frame ${index} of ${frames.length}`);
      into.set(frame);
    },
    dark: input.dark ?? null,
    acquisition,
    source: {
      file: "memory",
      sha256: "",
      shape: kind === "trace" ? [frames.length, width] : [frames.length, height, width],
      axes: kind === "trace" ? "TX" : "TYX",
      ...input.source,
    },
  };
}

function checkLengths({ frames, height, width, acquisition, dark }: MemoryFrames): void {
  const pixels = height * width;
  const wrong = frames.findIndex((frame) => frame.length !== pixels);
  if (wrong >= 0) {
    throw new InputFault(
      `frame ${wrong + 1} holds ${frames[wrong]?.length} values where ${height} × ${width} = ${pixels} are needed`,
      { where: `frame ${wrong + 1}` },
    );
  }
  if (dark !== undefined && dark.length !== pixels) {
    throw new InputFault(`the dark frame holds ${dark.length} values where ${pixels} are needed`, {
      where: "detector.dark",
    });
  }
  const delays = acquisition.time.delays.length;
  if (delays !== frames.length) {
    throw new InputFault(`${delays} delays are given for ${frames.length} frames; give one for each frame`, {
      where: "time.delays",
    });
  }
}
