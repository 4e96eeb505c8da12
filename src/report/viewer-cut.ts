/** An SVG element to be: its name, attributes and text. */
export type Shape = readonly [name: string, attributes: Record<string, string | number>, text?: string];

/** A cut through a frame: light over position. */
export interface Cut {
  readonly along: "x" | "y";
  readonly points: readonly number[];
  /** The model at the same places; empty without one. */
  readonly curve: readonly number[];
  /** µm at the first and at the last point. */
  readonly ends: readonly [number, number];
}

/** A number as short as an axis needs it. Its text is put into the page, so it must hold everything it needs. */
export function shortNumber(value: number): string {
  const size = Math.abs(value);
  const text =
    size !== 0 && (size >= 1e6 || size < 0.001)
      ? value.toExponential(1)
      : String(Number(value.toPrecision(size >= 1000 ? 6 : 3)));
  return (size >= 1000 && size < 1e6 ? String(Math.round(value)) : text).replace("-", "−");
}

/**
 * The picture of a cut, 420 × 214. Its text is put into the page, so it must hold everything it needs.
 * @param short writes the numbers at the axes
 */
export function cutShapes({ along, points, curve, ends }: Cut, short: (value: number) => string): Shape[] {
  const low = Math.min(0, ...points);
  const high = Math.max(...points, ...curve, low + 1e-9) * 1.05;
  const [w, h, x0, y0] = [420, 214, 58, 168];
  const px = (i: number) => x0 + ((w - x0 - 10) * (i + 0.5)) / points.length;
  const py = (value: number) => y0 - ((y0 - 10) * (value - low)) / (high - low);
  const shapes: Shape[] = [["rect", { x: x0, y: 10, width: w - x0 - 10, height: y0 - 10, class: "axes" }]];
  const label = (x: number, y: number, text: string, anchor: string) =>
    shapes.push(["text", { x, y, "text-anchor": anchor }, text]);
  for (const value of ticks(low, high)) {
    shapes.push(["line", { x1: x0 - 4, x2: x0, y1: py(value), y2: py(value), class: "axes" }]);
    label(x0 - 7, py(value) + 4, short(value), "end");
  }
  for (const value of ticks(...ends)) {
    const x = px(((points.length - 1) * (value - ends[0])) / (ends[1] - ends[0]));
    shapes.push(["line", { x1: x, x2: x, y1: y0, y2: y0 + 4, class: "axes" }]);
    label(x, y0 + 18, short(value), "middle");
  }
  label((x0 + w - 10) / 2, h - 4, `${along} (µm)`, "middle");
  points.forEach((value, i) => {
    shapes.push(["circle", { cx: px(i), cy: py(value), r: 2, class: "data" }]);
  });
  const line = curve.map((value, i) => `${px(i)},${py(value)}`).join(" ");
  if (curve.length > 0) shapes.push(["polyline", { points: line, class: "law" }]);
  return shapes;

  /** Round numbers between two ends, three to seven of them. */
  function ticks(from: number, to: number): number[] {
    const raw = (to - from) / 5;
    const power = 10 ** Math.floor(Math.log10(raw));
    const step = ([1, 2, 5, 10].find((factor) => factor * power >= raw) ?? 10) * power;
    const first = Math.ceil(from / step);
    return Array.from({ length: Math.floor(to / step) - first + 1 }, (_, i) => (first + i) * step);
  }
}
