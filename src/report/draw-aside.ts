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
  const ask = <T>(request: unknown): Promise<T> =>
    new Promise((resolve, reject) => {
      worker.once("message", resolve);
      worker.once("error", reject);
      worker.postMessage(request);
    });
  return {
    checksum: (path) => ask<string>(path),
    draw: (analysis) => ask<Figures>(figureRequest(analysis)),
    end() {
      void worker.terminate();
    },
  };
}
