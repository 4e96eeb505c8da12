import { availableParallelism } from "node:os";
import { Worker } from "node:worker_threads";
import { type Closure, type ClosureDraw, type ClosurePlan, summariseClosure } from "../outcome/closure.ts";
import { InputFault } from "../stack/fault.ts";
import type { Progress } from "./progress.ts";

/** @throws InputFault when the text is no whole number from 2 to 100 000 */
export function stacksFrom(text: string | undefined): number | undefined {
  if (text === undefined) return undefined;
  const count = /^\d+$/.test(text.trim()) ? Number(text) : Number.NaN;
  if (count >= 2 && count <= 100_000) return count;
  throw new InputFault(
    `--closure "${text}" is not a whole number from 2 to 100000; write one such as --closure 100`,
    { where: "--closure" },
  );
}

/** Draws and analyses `asked` stacks on all cores; on an interrupt (Ctrl-C) it sums up what is done by then. */
export async function runClosure(plan: ClosurePlan, asked: number, progress: Progress): Promise<Closure> {
  const draws = new Map<number, ClosureDraw | null>();
  const count = Math.min(availableParallelism(), asked);
  const workers = Array.from(
    { length: count },
    () => new Worker(new URL("./closure-worker.js", import.meta.url), { workerData: plan }),
  );
  let next = 0;
  let interrupt: () => void = () => {};
  const stopped = new Promise<void>((resolve) => {
    interrupt = resolve;
  });
  process.once("SIGINT", interrupt);
  const work = (worker: Worker): Promise<void> =>
    new Promise((resolve, reject) => {
      let index = 0;
      const ask = (): void => {
        if (next >= asked) resolve();
        else {
          index = next++;
          worker.postMessage(index);
        }
      };
      worker.on("error", reject);
      worker.on("message", (draw: ClosureDraw | null) => {
        draws.set(index, draw);
        progress.update(draws.size, asked);
        ask();
      });
      ask();
    });
  try {
    await Promise.race([Promise.all(workers.map(work)), stopped]);
  } finally {
    process.removeListener("SIGINT", interrupt);
    progress.end();
    await Promise.all(workers.map((worker) => worker.terminate()));
  }
  const inOrder = [...draws].sort(([a], [b]) => a - b).map(([, draw]) => draw);
  return summariseClosure(plan, inOrder, asked);
}
