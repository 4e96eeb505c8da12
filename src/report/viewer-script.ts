import type { colourRamps } from "./viewer-colours.ts";
import type { cutShapes, Shape, shortNumber } from "./viewer-cut.ts";
import type { ViewerData } from "./viewer-data.ts";
import type { modelCells, residualCells, wholeModelCells } from "./viewer-model.ts";
import type { overlayShapes } from "./viewer-overlay.ts";
import type { Compared, inGroups, residualSum } from "./viewer-sum.ts";

/** Functions whose text stands in the page beside the viewer's own. */
export interface Tools {
  readonly colourRamps: typeof colourRamps;
  readonly modelCells: typeof modelCells;
  readonly wholeModelCells: typeof wholeModelCells;
  readonly residualCells: typeof residualCells;
  readonly residualSum: typeof residualSum;
  readonly inGroups: typeof inGroups;
  readonly cutShapes: typeof cutShapes;
  readonly shortNumber: typeof shortNumber;
  readonly overlayShapes: typeof overlayShapes;
}

/**
 * The page's frame viewer. Its *text* is put into the report, so it must hold everything it needs: no import but of
 * types, no name from outside this function. It inflates the cells, has each frame's model computed from its
 * seven numbers or read from the whole-stack model's cells, and draws map, model, residual and two cuts for the frame
 * that the slider stands on, and what the model leaves over in many frames together.
 */
export async function frameViewer(tools: Tools): Promise<void> {
  const element = <T extends Element>(id: string): T => document.getElementById(id) as unknown as T;
  const SVG = "http://www.w3.org/2000/svg";
  const data = JSON.parse(element("viewer-data").textContent ?? "") as ViewerData;
  const { columns, rows, bin, binDown, left, top } = data.region;
  const { pixel } = data;
  const size = columns * rows;
  const isTrace = data.kind === "trace";
  const count = data.frames.length;
  const levels = await inflate("viewer-cells");
  const wholeLevels = await readWhole();
  const slider = element<HTMLInputElement>("frame");
  const sameScale = element<HTMLInputElement>("same-scale");
  const wholeChosen = document.querySelector<HTMLInputElement>("#model-whole");
  const ramps = tools.colourRamps();
  const short = tools.shortNumber;

  /** Cells of every frame, as 16-bit levels. */
  async function inflate(id: string): Promise<Uint16Array> {
    const text = element(id).textContent ?? "";
    const packed = Uint8Array.from(atob(text.trim()), (character) => character.charCodeAt(0));
    const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("deflate"));
    const bytes = new Uint8Array(await new Response(stream).arrayBuffer());
    const half = bytes.length / 2;
    return Uint16Array.from({ length: half }, (_, k) => (bytes[k] ?? 0) + 256 * (bytes[half + k] ?? 0));
  }

  /** The whole-stack model's levels: of each the difference to the frame before is stored. */
  async function readWhole(): Promise<Uint16Array | null> {
    if (data.whole === null) return null;
    const found = await inflate("viewer-whole");
    for (let k = size; k < found.length; k++) found[k] = (found[k] ?? 0) + (found[k - size] ?? 0);
    return found;
  }

  /** Recorded photons of one frame's cells. */
  function recorded(place: number): Float64Array {
    return Float64Array.from(
      { length: size },
      (_, k) => data.low + data.step * (levels[place * size + k] ?? 0),
    );
  }

  /** The chosen model of a frame; null where there is none. */
  function modelled(place: number): Float64Array | null {
    if (data.whole !== null && wholeLevels !== null && wholeChosen?.checked === true) {
      if (data.whole.leftOut.includes(place)) return null;
      return tools.wholeModelCells(wholeLevels, place, data.whole.step, data);
    }
    const spot = data.frames[place]?.spot ?? null;
    return spot === null ? null : tools.modelCells(spot, data);
  }

  const everyScale = scaleOf(Array.from({ length: count }, (_, place) => place));
  let wholeTrace: ReturnType<typeof stackUp> | null = null;

  /** A trace is looked at as a whole: delay downwards, one row a frame. */
  function stackUp() {
    const light = new Float64Array(size * count);
    const model = new Float64Array(size * count).fill(Number.NaN);
    const residual = new Float64Array(size * count).fill(Number.NaN);
    for (let place = 0; place < count; place++) {
      const own = recorded(place);
      const fit = modelled(place);
      light.set(own, place * size);
      if (fit !== null) {
        model.set(fit, place * size);
        residual.set(tools.residualCells(own, fit, data), place * size);
      }
    }
    return { light, model, residual };
  }

  /** From the darkest hundredth to the brightest cell but a few, over some frames. */
  function scaleOf(places: readonly number[]): [number, number] {
    const ends = places.map((place): [number, number] => {
      const sorted = recorded(place).sort();
      return [sorted[Math.floor(0.02 * (size - 1))] ?? 0, sorted[Math.ceil(0.998 * (size - 1))] ?? 1];
    });
    const low = Math.min(...ends.map((end) => end[0]));
    const high = Math.max(...ends.map((end) => end[1]));
    return [low, high > low ? high : low + 1];
  }

  function paint(
    id: string,
    cells: Float64Array | null,
    [low, high]: readonly [number, number],
    colours: Uint8ClampedArray,
    [width, height]: readonly [number, number] = [columns, isTrace ? count : rows],
  ): void {
    const canvas = element<HTMLCanvasElement>(id);
    canvas.width = width;
    canvas.height = height;
    const context = canvas.getContext("2d");
    if (context === null || cells === null) return;
    const image = context.createImageData(canvas.width, canvas.height);
    cells.forEach((value, k) => {
      if (Number.isNaN(value)) return;
      const at = 4 * Math.round(255 * Math.min(1, Math.max(0, (value - low) / (high - low))));
      image.data.set(colours.subarray(at, at + 4), 4 * k);
    });
    context.putImageData(image, 0, 0);
  }

  function paintBar(id: string, colours: Uint8ClampedArray): void {
    const canvas = element<HTMLCanvasElement>(id);
    canvas.width = 256;
    canvas.height = 1;
    canvas.getContext("2d")?.putImageData(new ImageData(new Uint8ClampedArray(colours), 256, 1), 0, 0);
  }

  function draw([name, attributes, text = ""]: Shape): SVGElement {
    const node = document.createElementNS(SVG, name);
    for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, String(value));
    node.textContent = text;
    return node;
  }

  /** Over the maps: spot and bar of a round length; on a trace, the row shown. */
  function overlay(place: number): void {
    const bar =
      [10, 5, 2, 1, 0.5, 0.2, 0.1, 0.05, 0.02].find((length) => length <= 0.3 * columns * bin * pixel) ??
      0.01;
    const spot = data.frames[place]?.spot ?? null;
    const row: Shape = ["rect", { x: 0, y: place, width: columns, height: 1, class: "outline" }];
    for (const id of ["map-over", "model-over", "residual-over"]) {
      const svg = element<SVGSVGElement>(id);
      svg.setAttribute("viewBox", `0 0 ${columns} ${isTrace ? count : rows}`);
      svg.setAttribute("preserveAspectRatio", "none");
      const shapes = isTrace ? [row] : tools.overlayShapes(spot, data, id === "map-over" ? bar : null);
      svg.replaceChildren(...shapes.map(draw));
    }
    element("scale-bar").textContent = isTrace
      ? "Delay runs downwards; the outline marks the frame."
      : `Bar: ${bar} µm. Ellipse: one standard deviation of the frame's spot.`;
  }

  /** Sums across a strip of one standard deviation about the centre: along x, or along y. */
  function strip(cells: Float64Array, along: "x" | "y", middle: number, half: number): number[] {
    const length = along === "x" ? columns : rows;
    const across = along === "x" ? rows : columns;
    const from = Math.max(0, Math.min(across - 1, Math.round(middle - half)));
    const to = Math.max(from, Math.min(across - 1, Math.round(middle + half)));
    return Array.from({ length }, (_, i) => {
      let sum = 0;
      for (let j = from; j <= to; j++) sum += cells[along === "x" ? j * columns + i : i * columns + j] ?? 0;
      return sum / (to - from + 1) / (bin * binDown);
    });
  }

  function drawCut(
    id: string,
    along: "x" | "y",
    place: number,
    light: Float64Array,
    model: Float64Array | null,
  ): void {
    const svg = element<SVGSVGElement>(id);
    const spot = data.frames[place]?.spot ?? null;
    const [, cx = 0, cy = 0, xx = 0, , yy = 0] = spot ?? [];
    const acrossCentre =
      spot === null
        ? (along === "x" ? rows : columns) / 2
        : ((along === "x" ? cy : cx) / pixel - (along === "x" ? top : left)) / bin - 0.5 + 0.5 / bin;
    const half = isTrace ? 0 : Math.sqrt(along === "x" ? yy : xx) / pixel / bin;
    const points = strip(light, along, acrossCentre, half);
    const curve = model === null ? [] : strip(model, along, acrossCentre, half);
    const origin = along === "x" ? left : top;
    const position = (i: number) => (origin + (i + 0.5) * bin - 0.5) * pixel;
    const ends = [position(0), position(points.length - 1)] as const;
    svg.setAttribute("viewBox", "0 0 420 214");
    svg.replaceChildren(...tools.cutShapes({ along, points, curve, ends }, short).map(draw));
  }

  /** What the chosen model leaves over: early, middle and late frames; of a trace, one map of groups of frames. */
  function showSums(): void {
    const places = data.frames.flatMap(({ used }, place) => {
      return used || data.whole?.leftOut.includes(place) === false ? [place] : [];
    });
    const group = Math.max(1, Math.round(Math.max(columns, rows) / (isTrace ? 32 : 20)));
    const sums = tools.inGroups(places, isTrace ? 24 : 3).map((members) => {
      const compared = members.flatMap((place): Compared[] => {
        const model = modelled(place);
        const struck = data.frames[place]?.struck ?? 0;
        return model === null ? [] : [{ light: recorded(place), model, struck }];
      });
      return { members, ...tools.residualSum(compared, data, group) };
    });
    if (isTrace) {
      const width = sums[0]?.columns ?? 1;
      const cells = Float64Array.from(sums.flatMap((sum) => [...sum.cells]));
      paint("sum-0", cells, [-4, 4], ramps.residual, [width, Math.max(1, sums.length)]);
      const square = sums.reduce((total, { rms }) => total + (rms ?? 1) ** 2, 0) / Math.max(1, sums.length);
      caption("sum-0", places, Math.sqrt(square));
      return;
    }
    for (const i of [0, 1, 2]) {
      const sum = sums[i];
      element<HTMLElement>(`sum-${i}-figure`).hidden = sum === undefined;
      if (sum === undefined) continue;
      paint(`sum-${i}`, sum.cells, [-4, 4], ramps.residual, [sum.columns, sum.rows]);
      caption(`sum-${i}`, sum.members, sum.rms);
    }
  }

  function caption(id: string, members: readonly number[], rms: number | null): void {
    const delay = (place: number | undefined) => data.frames[place ?? 0]?.delay ?? "";
    const reach = `${delay(members[0])} to ${delay(members.at(-1))} ns, ${members.length} frames`;
    const size = rms === null ? "too dim to say" : `rms ${rms.toFixed(2)}`;
    element(`${id}-text`).textContent = reach;
    element(`${id}-rms`).textContent = size;
    element(id).setAttribute("aria-label", `Residuals added up, ${reach}: ${size}`);
  }

  /** The model was chosen anew: everything that hangs on it. */
  function choose(): void {
    const whole = data.whole !== null && wholeChosen?.checked === true ? data.whole : null;
    const name = whole === null ? "each frame's spot" : "whole stack";
    if (data.whole !== null) element("model-name").textContent = `Model: ${name}`;
    element("model").setAttribute("aria-label", `Light by the model: ${name}`);
    wholeTrace = isTrace ? stackUp() : null;
    showSums();
    show();
  }

  function show(): void {
    const place = Number(slider.value);
    const frame = data.frames[place];
    if (frame === undefined) return;
    const light = recorded(place);
    const model = modelled(place);
    const scale = sameScale.checked || isTrace ? everyScale : scaleOf([place]);
    paint("map", wholeTrace?.light ?? light, scale, ramps.light);
    paint("model", wholeTrace?.model ?? model, scale, ramps.light);
    paint(
      "residual",
      wholeTrace?.residual ?? (model === null ? null : tools.residualCells(light, model, data)),
      [-4, 4],
      ramps.residual,
    );
    overlay(place);
    drawCut("cut-x", "x", place, light, model);
    if (!isTrace) drawCut("cut-y", "y", place, light, model);
    const area = bin * binDown;
    element("light-low").textContent = short(scale[0] / area);
    element("light-high").textContent = short(scale[1] / area);
    const state = frame.flags === "" ? (frame.used ? "used" : "not used") : `set aside: ${frame.flags}`;
    const lacking =
      wholeChosen?.checked === true ? "the whole-stack fit leaves it out" : "no spot was fitted";
    const text = `${frame.title}: ${state}${model === null ? `; ${lacking}` : ""}`;
    element("frame-text").textContent = text;
    slider.setAttribute("aria-valuetext", text);
    element("map").setAttribute("aria-label", `Recorded light, ${text}`);
    element("frame-numbers").replaceChildren(
      ...frame.numbers.map(([label, value]) => {
        const row = document.createElement("tr");
        const head = document.createElement("th");
        head.scope = "row";
        head.textContent = label;
        const cell = document.createElement("td");
        cell.textContent = value;
        row.append(head, cell);
        return row;
      }),
    );
  }

  paintBar("light-bar", ramps.light);
  paintBar("residual-bar", ramps.residual);
  slider.addEventListener("input", show);
  sameScale.addEventListener("change", show);
  for (const input of document.querySelectorAll('input[name="model"]')) {
    input.addEventListener("change", choose);
  }
  for (const [id, by] of [
    ["frame-back", -1],
    ["frame-on", 1],
  ] as const) {
    element<HTMLButtonElement>(id).addEventListener("click", () => {
      slider.value = String(Number(slider.value) + by);
      show();
    });
  }
  element<HTMLElement>("viewer").hidden = false;
  choose();
}
