import type { Spot } from "../frame/spot.ts";
import type { Analysis } from "../outcome/analysis.ts";
import type { FrameRow } from "../outcome/result.ts";
import type { Stack } from "../stack/stack.ts";
import { assemble, common, DATA, type Drawing, INK, keyRow, LAW, padded, panel } from "./figure-parts.ts";
import { spotLight } from "./light-map.ts";
import { plain } from "./notation.ts";

const HEIGHT = 210;
/** Points a panel at most: enough for a shape, few enough to draw quickly. */
const MOST_POINTS = 48;

interface Point {
  readonly panel: string;
  readonly x: number;
  readonly light: number;
}

/**
 * Cuts along x through the spot of the first, the middle and the last frame used, as shares of each fit's own peak
 * and without its background. Every panel repeats the first frame's fit, so that the eye sees the spreading.
 */
export function profileFigure(drawing: Drawing, analysis: Analysis): string {
  const { plot } = drawing;
  const chosen = chosenFrames(analysis);
  const reach = 4 * Math.sqrt(Math.max(...chosen.map(({ spot }) => spot.covariance[0]), 0));
  const cuts = chosen.map(({ row, spot }) => cut(analysis.stack, row, spot, reach));
  const data = cuts.flatMap((each) => each.data);
  const model = cuts.flatMap((each) => each.model);
  const first = chosen.flatMap(({ row }) =>
    (cuts[0]?.model ?? []).map((point) => ({ ...point, panel: panelName(row) })),
  );
  const node = plot.plot({
    ...common(drawing, HEIGHT),
    marginTop: 26,
    fx: { label: null, domain: chosen.map(({ row }) => panelName(row)), padding: 0.14 },
    x: {
      label: "x − centre (µm)",
      domain: [-reach || -1, reach || 1],
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 4,
    },
    y: {
      label: "Light / peak of the fit",
      domain: padded([0, 1.1, ...bounded(data.map((point) => point.light))], 0.04),
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 5,
    },
    marks: [
      plot.frame({ stroke: INK, strokeOpacity: 0.35 }),
      plot.dot(data, { fx: "panel", x: "x", y: "light", r: 1.9, fill: DATA, clip: true }),
      plot.lineY(first, {
        fx: "panel",
        x: "x",
        y: "light",
        stroke: INK,
        strokeOpacity: 0.7,
        strokeDasharray: "4 3",
      }),
      plot.lineY(model, { fx: "panel", x: "x", y: "light", stroke: LAW, strokeWidth: 2 }),
    ],
  });
  const key = keyRow([
    {
      text: analysis.stack.kind === "map" ? "recorded, ±σ strip" : "recorded",
      symbol: "circle",
      colour: DATA,
      filled: true,
    },
    { text: "fit", symbol: "line", colour: LAW, filled: true },
    { text: "fit of the first", symbol: "line", colour: INK, filled: true, dashed: true },
  ]);
  return assemble([key, panel(drawing, node, HEIGHT)], {
    id: "profiles",
    title: `Cuts through the spot, ${analysis.result.input.file}`,
    description: `Cuts along x through the fitted spot at ${chosen.map(({ row }) => panelName(row)).join(", ")}, each as a share of its fit's peak after the background is taken off, with the fit and the first frame's fit for comparison.`,
  });
}

export interface Chosen {
  readonly row: FrameRow;
  readonly spot: Spot;
}

/** The first, the middle and the last frame used, with their fits. */
export function chosenFrames(analysis: Pick<Analysis, "result" | "spots">): Chosen[] {
  const fitted = analysis.result.frames.flatMap((row): Chosen[] => {
    const spot = analysis.spots[row.index] ?? null;
    return spot === null ? [] : [{ row, spot }];
  });
  const used = fitted.filter(({ row }) => row.used);
  const from = used.length > 0 ? used : fitted;
  const places = new Set([0, Math.floor((from.length - 1) / 2), from.length - 1]);
  return [...places].flatMap((place) => from[place] ?? []);
}

function panelName(row: FrameRow): string {
  return `${plain(row.delay_ns, 4)} ns`;
}

function cut(stack: Stack, row: FrameRow, spot: Spot, reach: number): { data: Point[]; model: Point[] } {
  const pixel = stack.acquisition.space.pixel.value;
  const { offset, gain } = stack.acquisition.detector;
  const counts = new Float64Array(stack.height * stack.width);
  stack.read(row.index, counts);
  const photons = (at: number) => ((counts[at] ?? 0) - (stack.dark?.[at] ?? offset)) / gain;
  const panel = panelName(row);
  const rows = strip(stack, spot, pixel);
  const peak = sum(rows, (y) => spotLight(spot, stack.kind, pixel, spot.centre[0], y * pixel)) || 1;
  const columns = range(stack.width).filter((x) => Math.abs(x * pixel - spot.centre[0]) <= reach);
  const group = Math.max(1, Math.ceil(columns.length / MOST_POINTS));
  const data: Point[] = [];
  for (let start = 0; start + group <= columns.length; start += group) {
    const members = columns.slice(start, start + group);
    const light = sum(members, (x) => sum(rows, (y) => photons(y * stack.width + x) - spot.background));
    const middle = ((members[0] ?? 0) + (members.at(-1) ?? 0)) / 2;
    data.push({ panel, x: middle * pixel - spot.centre[0], light: light / group / peak });
  }
  const model = range(61).map((i) => {
    const x = reach * (i / 30 - 1);
    return {
      panel,
      x,
      light: sum(rows, (y) => spotLight(spot, stack.kind, pixel, spot.centre[0] + x, y * pixel)) / peak,
    };
  });
  return { data, model };
}

/** Rows within one standard deviation of the centre; the nearest row at least. */
function strip(stack: Stack, spot: Spot, pixel: number): number[] {
  if (stack.height === 1) return [0];
  const centre = spot.centre[1] / pixel;
  const half = Math.sqrt(spot.covariance[2]) / pixel;
  const near = range(stack.height).filter((y) => Math.abs(y - centre) <= half);
  return near.length > 0 ? near : [Math.min(stack.height - 1, Math.max(0, Math.round(centre)))];
}

function range(length: number): number[] {
  return Array.from({ length }, (_, i) => i);
}

function sum(values: readonly number[], term: (value: number) => number): number {
  return values.reduce((total, value) => total + term(value), 0);
}

/** A faint frame's noise may stretch the scale to twice the peak, not further. */
function bounded(values: readonly number[]): number[] {
  return values.map((value) => Math.min(2, Math.max(-0.5, value)));
}
