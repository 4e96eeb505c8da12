import { parentPort } from "node:worker_threads";
import { fileSource, sha256Of } from "../stack/file-source.ts";
import type { Drawing } from "./figure-parts.ts";
import { analysisOf, type FigureRequest } from "./figure-request.ts";
import { drawFigures, loadDrawing } from "./figures.ts";

// Loads the plotting library at once, while the main thread still fits, and draws when it is asked. A first plot costs
// several times as much as the next one, so one for nobody is drawn beforehand.
const drawing = loadDrawing().then((loaded) => {
  practise(loaded);
  return loaded;
});

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

function practise({ plot, document }: Drawing): void {
  const points = Array.from({ length: 20 }, (_, i) => ({
    x: i,
    y: i + 1,
    kind: i % 2 === 0 ? "even" : "odd",
  }));
  for (const type of ["linear", "log"] as const) {
    const node = plot.plot({
      document,
      y: { type, label: "y" },
      fx: { label: null },
      marks: [
        plot.areaY(points, { x: "x", y1: "y", y2: (d: { y: number }) => d.y + 1 }),
        plot.lineY(points, { x: "x", y: "y", stroke: "black" }),
        plot.ruleX(points, { x: "x", y1: "y", y2: (d: { y: number }) => d.y + 1 }),
        plot.dot(points, { x: "x", y: "y", fx: "kind", symbol: "kind" }),
        plot.frame(),
      ],
    });
    node.outerHTML.trim();
  }
}
