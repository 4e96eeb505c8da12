import { parentPort } from "node:worker_threads";
import { analysisOf, type FigureRequest } from "./figure-request.ts";
import { drawFigures, loadDrawing } from "./figures.ts";

// Loads the plotting library at once, while the main thread still fits, and draws when it is asked.
const drawing = loadDrawing();

parentPort?.on("message", async (request: FigureRequest) => {
  parentPort?.postMessage(drawFigures(await drawing, analysisOf(request)));
});
