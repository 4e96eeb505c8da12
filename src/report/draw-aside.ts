import { Worker } from "node:worker_threads";
import type { Analysis } from "../outcome/analysis.ts";
import { figureRequest } from "./figure-request.ts";
import type { Figures } from "./figures.ts";

/**
 * A thread for what can be done beside the analysis: it takes the file's checksum, loads the plotting library while the
 * main thread fits, and draws the figures while the page is made.
 */
export interface Artist {
  /** SHA-256 of a file in hexadecimal; to be asked for before anything is drawn. */
  checksum(path: string): Promise<string>;
  draw(analysis: Analysis): Promise<Figures>;
  /** Ends the thread; without it a process would wait for it. */
  end(): void;
}

export function hireArtist(): Artist {
  const worker = new Worker(new URL("./figure-worker.js", import.meta.url));
  const failed = new Promise<never>((_, reject) => worker.once("error", reject));
  failed.catch(() => undefined); // whoever asks hears of it
  const ask = <T>(request: unknown): Promise<T> => {
    const answer = new Promise<T>((resolve) => worker.once("message", resolve));
    worker.postMessage(request);
    return Promise.race([answer, failed]);
  };
  return {
    checksum: (path) => ask<string>(path),
    draw: (analysis) => ask<Figures>(figureRequest(analysis)),
    end() {
      void worker.terminate();
    },
  };
}
