import type { colourRamps } from "./viewer-colours.ts";
import type { ViewerData } from "./viewer-data.ts";
import type { modelCells, residualCells } from "./viewer-model.ts";

/** Functions whose text stands in the page beside the viewer's own. */
interface Tools {
  readonly colourRamps: typeof colourRamps;
  readonly modelCells: typeof modelCells;
  readonly residualCells: typeof residualCells;
}

/**
 * The page's frame viewer. Its *text* is put into the report, so it must hold everything it needs: no import but of
 * types, no name from outside this function. It inflates the cells, has each frame's model computed from its
 * seven numbers, and draws map, model, residual and two cuts for the frame that the slider stands on.
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
  const levels = await inflate(element("viewer-cells").textContent ?? "");
  const slider = element<HTMLInputElement>("frame");
  const sameScale = element<HTMLInputElement>("same-scale");
  const ramps = tools.colourRamps();

  /** Cells of every frame, as 16-bit levels. */
  async function inflate(text: string): Promise<Uint16Array> {
    const packed = Uint8Array.from(atob(text.trim()), (character) => character.charCodeAt(0));
    const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("deflate"));
    const bytes = new Uint8Array(await new Response(stream).arrayBuffer());
    const half = bytes.length / 2;
    return Uint16Array.from({ length: half }, (_, k) => (bytes[k] ?? 0) + 256 * (bytes[half + k] ?? 0));
  }

  /** Recorded photons of one frame's cells. */
  function recorded(place: number): Float64Array {
    return Float64Array.from(
      { length: size },
      (_, k) => data.low + data.step * (levels[place * size + k] ?? 0),
    );
  }

  function modelled(place: number): Float64Array | null {
    const spot = data.frames[place]?.spot ?? null;
    return spot === null ? null : tools.modelCells(spot, data);
  }

  const wholeTrace = isTrace ? stackUp() : null;
  const everyScale = scaleOf(Array.from({ length: count }, (_, place) => place));

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
    [low, high]: [number, number],
    colours: Uint8ClampedArray,
  ): void {
    const canvas = element<HTMLCanvasElement>(id);
    canvas.width = columns;
    canvas.height = isTrace ? count : rows;
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

  function shape(name: string, attributes: Record<string, string | number>, text = ""): SVGElement {
    const node = document.createElementNS(SVG, name);
    for (const [key, value] of Object.entries(attributes)) node.setAttribute(key, String(value));
    node.textContent = text;
    return node;
  }

  /** Over the map: the ellipse of one standard deviation and a bar of a round length; on a trace, the row shown. */
  function overlay(place: number): void {
    const height = isTrace ? count : rows;
    const round =
      [10, 5, 2, 1, 0.5, 0.2, 0.1, 0.05, 0.02].find((length) => length <= 0.3 * columns * bin * pixel) ??
      0.01;
    for (const id of ["map-over", "model-over", "residual-over"]) {
      const svg = element<SVGSVGElement>(id);
      svg.setAttribute("viewBox", `0 0 ${columns} ${height}`);
      svg.setAttribute("preserveAspectRatio", "none");
      const spot = data.frames[place]?.spot ?? null;
      const parts: SVGElement[] = [];
      if (isTrace) parts.push(shape("rect", { x: 0, y: place, width: columns, height: 1, class: "outline" }));
      else {
        const unit = bin * pixel;
        if (spot !== null) {
          const [, cx = 0, cy = 0, xx = 0, xy = 0, yy = 0] = spot;
          const turn = 0.5 * Math.atan2(2 * xy, xx - yy);
          const half = Math.hypot((xx - yy) / 2, xy);
          const x = (cx / pixel + 0.5 - left) / bin;
          const y = (cy / pixel + 0.5 - top) / bin;
          parts.push(
            shape("ellipse", {
              rx: Math.sqrt((xx + yy) / 2 + half) / unit,
              ry: Math.sqrt(Math.max(0, (xx + yy) / 2 - half)) / unit,
              transform: `translate(${x} ${y}) rotate(${(turn * 180) / Math.PI})`,
              class: "outline",
            }),
          );
        }
        if (id === "map-over") {
          const length = round / unit;
          parts.push(
            shape("line", {
              x1: 0.05 * columns,
              x2: 0.05 * columns + length,
              y1: 0.94 * rows,
              y2: 0.94 * rows,
              class: "bar",
            }),
          );
        }
      }
      svg.replaceChildren(...parts);
    }
    element("scale-bar").textContent = isTrace
      ? "Delay runs downwards; the outline marks the frame."
      : `Bar: ${round} µm. Ellipse: one standard deviation.`;
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
    const low = Math.min(0, ...points);
    const high = Math.max(...points, ...curve, low + 1e-9) * 1.05;
    const origin = along === "x" ? left : top;
    const position = (i: number) => (origin + (i + 0.5) * bin - 0.5) * pixel;
    const [w, h, x0, y0] = [420, 214, 58, 168];
    const px = (i: number) => x0 + ((w - x0 - 10) * (i + 0.5)) / points.length;
    const py = (value: number) => y0 - ((y0 - 10) * (value - low)) / (high - low);
    const parts = [shape("rect", { x: x0, y: 10, width: w - x0 - 10, height: y0 - 10, class: "axes" })];
    const label = (x: number, y: number, text: string, anchor: string) =>
      parts.push(shape("text", { x, y, "text-anchor": anchor }, text));
    for (const value of ticks(low, high)) {
      parts.push(shape("line", { x1: x0 - 4, x2: x0, y1: py(value), y2: py(value), class: "axes" }));
      label(x0 - 7, py(value) + 4, short(value), "end");
    }
    for (const value of ticks(position(0), position(points.length - 1))) {
      const x = px((value - position(0)) / (bin * pixel));
      parts.push(shape("line", { x1: x, x2: x, y1: y0, y2: y0 + 4, class: "axes" }));
      label(x, y0 + 18, short(value), "middle");
    }
    label((x0 + w - 10) / 2, h - 4, `${along} (µm)`, "middle");
    points.forEach((value, i) => {
      parts.push(shape("circle", { cx: px(i), cy: py(value), r: 2, class: "data" }));
    });
    if (curve.length > 0)
      parts.push(
        shape("polyline", {
          points: curve.map((value, i) => `${px(i)},${py(value)}`).join(" "),
          class: "law",
        }),
      );
    svg.setAttribute("viewBox", `0 0 ${w} ${h}`);
    svg.replaceChildren(...parts);
  }

  function short(value: number): string {
    const size = Math.abs(value);
    const text =
      size !== 0 && (size >= 1e6 || size < 0.001)
        ? value.toExponential(1)
        : String(Number(value.toPrecision(size >= 1000 ? 6 : 3)));
    return (size >= 1000 && size < 1e6 ? String(Math.round(value)) : text).replace("-", "−");
  }

  /** Round numbers between two ends, three to seven of them. */
  function ticks(low: number, high: number): number[] {
    const raw = (high - low) / 5;
    const power = 10 ** Math.floor(Math.log10(raw));
    const step = ([1, 2, 5, 10].find((factor) => factor * power >= raw) ?? 10) * power;
    const first = Math.ceil(low / step);
    return Array.from({ length: Math.floor(high / step) - first + 1 }, (_, i) => (first + i) * step);
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
    const text = `${frame.title}: ${state}${frame.spot === null ? "; no spot was fitted" : ""}`;
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
  show();
}
