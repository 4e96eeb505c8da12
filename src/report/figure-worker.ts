import { parentPort } from "node:worker_threads";
import { fileSource, sha256Of } from "../stack/file-source.ts";
import { analysisOf, type FigureRequest } from "./figure-request.ts";
import { drawFigures, loadDrawing } from "./figures.ts";

// Loads the plotting library at once, while the main thread still fits, and draws when it is asked.
const drawing = loadDrawing();

parentPort?.on("message", async (request: FigureRequest | string) => {
  // a path: its checksum is wanted
  if (typeof request === "string") parentPort?.postMessage(checksum(request));
  else parentPort?.postMessage(drawFigures(await drawing, analysisOf(request)));
});

/** Empty where the file cannot be read: whoever analyses it says so better. */
function checksum(path: string): string {
  try {
    return sha256Of(fileSource(path));
  } catch {
    return "";
  }
}
