import { Worker } from "node:worker_threads";
import type { Analysis } from "../outcome/analysis.ts";
import { figureRequest } from "./figure-request.ts";
import type { Figures } from "./figures.ts";

/** A thread that loads the plotting library while the main one fits; the figures are then drawn beside the page. */
export interface Artist {
  draw(analysis: Analysis): Promise<Figures>;
  /** Ends the thread; without it a process would wait for it. */
  end(): void;
}

export function hireArtist(): Artist {
  const worker = new Worker(new URL("./figure-worker.js", import.meta.url));
  worker.unref();
  return {
    draw(analysis) {
      worker.ref();
      return new Promise<Figures>((resolve, reject) => {
        worker.once("message", resolve);
        worker.once("error", reject);
        worker.postMessage(figureRequest(analysis));
      });
    },
    end() {
      void worker.terminate();
    },
  };
}
