import { SingleBar } from "cli-progress";

/** A bar over frames or stacks. It shows only on a terminal; elsewhere both functions do nothing. */
export interface Progress {
  readonly update: (done: number, total: number) => void;
  readonly end: () => void;
}

/** @param stream where to draw, or null for no bar at all */
export function showProgress(stream: NodeJS.WriteStream | null, what = "frames"): Progress {
  if (stream?.isTTY !== true) return { update: () => {}, end: () => {} };
  const bar = new SingleBar({
    stream,
    format: `${what} {bar} {value}/{total}`,
    barsize: 30,
    barCompleteChar: "█",
    barIncompleteChar: "·",
    hideCursor: false,
    clearOnComplete: true,
    synchronousUpdate: true,
  });
  let started = false;
  return {
    update(done, total) {
      if (!started) bar.start(total, 0);
      started = true;
      bar.update(done);
    },
    end() {
      if (started) bar.stop();
      started = false;
    },
  };
}

/** A line on a terminal that says what is being done, until it is done. */
export function showNote(stream: NodeJS.WriteStream | null): {
  readonly update: (text: string) => void;
  readonly end: () => void;
} {
  if (stream?.isTTY !== true) return { update: () => {}, end: () => {} };
  const wipe = "\r\u001b[2K";
  return { update: (text) => stream.write(`${wipe}${text} …`), end: () => stream.write(wipe) };
}
