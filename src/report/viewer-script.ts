import type { ViewerData } from "./viewer-data.ts";

/**
 * The page's frame viewer. Its *text* is put into the report, so it must hold everything it needs: no import but of
 * types, no name from outside this function. It inflates the cells, computes each frame's model from its seven
 * numbers, and draws map, model, residual and two cuts for the frame that the slider stands on.
 */
export async function frameViewer(): Promise<void> {
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
  // lightness rises evenly along the first ramp and falls evenly to both sides of the second, so that they are read
  // by lightness alone where hues cannot be told apart; both stay inside sRGB, or they would kink where they are cut
  const lightRamp = ramp((s) => [0.16 + 0.81 * s, 0.03 + 0.1 * Math.sin(Math.PI * s ** 0.8), 280 + 175 * s]);
  const residualRamp = ramp((s) => {
    const far = Math.abs(2 * s - 1);
    return [0.97 - 0.47 * far, 0.003 + 0.115 * far, s < 0.5 ? 250 : 50];
  });

  /** Cells of every frame, as 16-bit levels. */
  async function inflate(text: string): Promise<Uint16Array> {
    const packed = Uint8Array.from(atob(text.trim()), (character) => character.charCodeAt(0));
    const stream = new Blob([packed]).stream().pipeThrough(new DecompressionStream("deflate"));
    const bytes = new Uint8Array(await new Response(stream).arrayBuffer());
    const half = bytes.length / 2;
    return Uint16Array.from({ length: half }, (_, k) => (bytes[k] ?? 0) + 256 * (bytes[half + k] ?? 0));
  }

  /** 256 colours along a path in OKLCh (lightness, chroma, hue in degrees), as RGBA bytes. */
  function ramp(path: (s: number) => [number, number, number]): Uint8ClampedArray {
    const colours = new Uint8ClampedArray(1024);
    for (let i = 0; i < 256; i++) {
      const [lightness, chroma, hue] = path(i / 255);
      colours.set([...toRgb(lightness, chroma, (hue * Math.PI) / 180), 255], 4 * i);
    }
    return colours;
  }

  /** OKLab (B. Ottosson, 2020) to sRGB bytes; constants as published with it, from memory. */
  function toRgb(lightness: number, chroma: number, hue: number): number[] {
    const a = chroma * Math.cos(hue);
    const b = chroma * Math.sin(hue);
    const l = (lightness + 0.3963377774 * a + 0.2158037573 * b) ** 3;
    const m = (lightness - 0.1055613458 * a - 0.0638541728 * b) ** 3;
    const s = (lightness - 0.0894841775 * a - 1.291485548 * b) ** 3;
    const linear = [
      4.0767416621 * l - 3.3077115913 * m + 0.2309699292 * s,
      -1.2684380046 * l + 2.6097574011 * m - 0.3413193965 * s,
      -0.0041960863 * l - 0.7034186147 * m + 1.707614701 * s,
    ];
    return linear.map((c) => 255 * (c <= 0.0031308 ? 12.92 * c : 1.055 * c ** (1 / 2.4) - 0.055));
  }

  /** Recorded photons of one frame's cells. */
  function recorded(place: number): Float64Array {
    return Float64Array.from(
      { length: size },
      (_, k) => data.low + data.step * (levels[place * size + k] ?? 0),
    );
  }

  /** The fitted spot with its background in the same cells, summed over their pixels; null without a spot. */
  function modelled(place: number): Float64Array | null {
    const spot = data.frames[place]?.spot ?? null;
    if (spot === null) return null;
    const [n = 0, cx = 0, cy = 0, xx = 1, xy = 0, yy = 1, background = 0] = spot;
    const determinant = isTrace ? xx : xx * yy - xy * xy;
    const peak = isTrace
      ? (n * pixel) / Math.sqrt(2 * Math.PI * xx)
      : (n * pixel * pixel) / (2 * Math.PI * Math.sqrt(determinant));
    const cells = new Float64Array(size);
    for (let y = 0; y < rows * binDown; y++) {
      const dy = isTrace ? 0 : (top + y) * pixel - cy;
      for (let x = 0; x < columns * bin; x++) {
        const dx = (left + x) * pixel - cx;
        const form = isTrace
          ? (dx * dx) / xx
          : (yy * dx * dx - 2 * xy * dx * dy + xx * dy * dy) / determinant;
        const cell = Math.floor(y / binDown) * columns + Math.floor(x / bin);
        cells[cell] = (cells[cell] ?? 0) + background + peak * Math.exp(-form / 2);
      }
    }
    return cells;
  }

  /** (recorded − model) in the standard deviations that the model gives a cell. */
  function residuals(light: Float64Array, model: Float64Array): Float64Array {
    const dark = bin * binDown * data.darkVariance;
    return light.map((value, k) => {
      const expected = model[k] ?? 0;
      return (value - expected) / Math.sqrt(Math.max(1e-6, data.excessNoise * Math.max(0, expected) + dark));
    });
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
        residual.set(residuals(own, fit), place * size);
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
    paint("map", wholeTrace?.light ?? light, scale, lightRamp);
    paint("model", wholeTrace?.model ?? model, scale, lightRamp);
    paint(
      "residual",
      wholeTrace?.residual ?? (model === null ? null : residuals(light, model)),
      [-4, 4],
      residualRamp,
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

  paintBar("light-bar", lightRamp);
  paintBar("residual-bar", residualRamp);
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
