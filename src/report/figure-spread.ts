import type { Analysis } from "../outcome/analysis.ts";
import type { FrameRow } from "../outcome/result.ts";
import {
  ASIDE_SYMBOL,
  asideColour,
  asideEntry,
  assemble,
  common,
  DATA,
  type Drawing,
  errorBars,
  INK,
  type KeyEntry,
  keyRow,
  LAW,
  padded,
  panel,
} from "./figure-parts.ts";
import { counted, flagCounts, mainFlag, TRANSPORT_LAW } from "./wording.ts";

type WithWidth = FrameRow & { readonly variance_um2: number; readonly u_variance_um2: number };

const HEIGHT = 310;
/** Two-sided 95 % of a normal distribution. */
const COVER95 = 1.96;

/**
 * Variance per axis over delay: frames used with ±1 u, the preferred law with its 95 % band, frames set aside by
 * symbol. Frames whose width lies far outside are drawn as carets at the edge, so that they cannot squeeze the rest.
 */
export function spreadFigure(drawing: Drawing, analysis: Analysis): string {
  const { plot } = drawing;
  const { result, spreadCurve } = analysis;
  const rows = result.frames.filter(hasWidth);
  const used = rows.filter((row) => row.used);
  const range = verticalRange(analysis, used, rows);
  const aside = rows.filter((row) => !row.used);
  const inside = aside.filter((row) => row.variance_um2 >= range[0] && row.variance_um2 <= range[1]);
  const beyond = aside.filter((row) => !inside.includes(row));
  const bars = [...used, ...inside];
  const clamp = (value: number) => Math.min(range[1], Math.max(range[0], value));
  const node = plot.plot({
    ...common(drawing, HEIGHT),
    x: {
      label: "Delay (ns)",
      domain: padded(
        result.frames.map((row) => row.delay_ns),
        0.02,
      ),
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 7,
    },
    y: {
      label: "Variance per axis (µm²)",
      domain: range,
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 6,
      nice: false,
    },
    marks: [
      plot.frame({ stroke: INK, strokeOpacity: 0.35 }),
      plot.areaY(spreadCurve, {
        x: "delay",
        y1: (point) => clamp(point.value - COVER95 * point.u),
        y2: (point) => clamp(point.value + COVER95 * point.u),
        fill: LAW,
        fillOpacity: 0.2,
      }),
      errorBars(
        drawing,
        bars.map((row) => ({
          x: row.delay_ns,
          low: clamp(row.variance_um2 - row.u_variance_um2),
          high: clamp(row.variance_um2 + row.u_variance_um2),
          colour: row.used ? DATA : asideColour(mainFlag(row)),
        })),
      ),
      plot.dot(used, { x: "delay_ns", y: (row: WithWidth) => clamp(row.variance_um2), r: 2.6, fill: DATA }),
      plot.lineY(spreadCurve, { x: "delay", y: "value", stroke: LAW, strokeWidth: 2, clip: true }),
      ...asideMarks(drawing, inside),
      plot.text(beyond, {
        x: "delay_ns",
        y: (row: WithWidth) => clamp(row.variance_um2),
        text: (row: WithWidth) => (row.variance_um2 > range[1] ? "▴" : "▾"),
        dy: 0,
        fill: asideColour(null),
        fontSize: 11,
      }),
    ],
  });
  const key = keyRow(keyEntries(analysis, inside, beyond.length));
  return assemble([key, panel(drawing, node, HEIGHT)], {
    id: "spread",
    title: `Spread of the spot, ${result.input.file}`,
    description: describe(analysis, beyond.length),
  });
}

function hasWidth(row: FrameRow): row is WithWidth {
  return row.variance_um2 !== null && row.u_variance_um2 !== null;
}

function verticalRange(
  analysis: Analysis,
  used: readonly WithWidth[],
  all: readonly WithWidth[],
): [number, number] {
  const shown = used.length > 0 ? used : all;
  const trapped = all.filter((row) => row.flags.includes("trap-dominated"));
  return padded(
    [
      ...[...shown, ...trapped].flatMap((row) => [
        row.variance_um2 - row.u_variance_um2,
        row.variance_um2 + row.u_variance_um2,
      ]),
      ...analysis.spreadCurve.flatMap((point) => [point.value - point.u, point.value + point.u]),
    ],
    0.08,
  );
}

function asideMarks(drawing: Drawing, rows: readonly WithWidth[]) {
  return flagCounts(rows).map(([flag]) =>
    drawing.plot.dot(
      rows.filter((row) => mainFlag(row) === flag),
      {
        x: "delay_ns",
        y: "variance_um2",
        symbol: ASIDE_SYMBOL[flag],
        r: 3.2,
        stroke: asideColour(flag),
        strokeWidth: 1.3,
      },
    ),
  );
}

function keyEntries(analysis: Analysis, inside: readonly FrameRow[], beyond: number): KeyEntry[] {
  const law = TRANSPORT_LAW[analysis.result.transport.preferred];
  const entries: KeyEntry[] = [
    { text: "used", symbol: "circle", colour: DATA, filled: true },
    { text: `${law}, 95 %`, symbol: "line", colour: LAW, filled: true },
    ...flagCounts(inside).map(([flag]) => asideEntry(flag)),
  ];
  const rest: KeyEntry = {
    text: `${beyond} beyond the axis`,
    symbol: "caret",
    colour: asideColour(null),
    filled: true,
  };
  return beyond > 0 ? [...entries, rest] : entries;
}

function describe(analysis: Analysis, beyond: number): string {
  const { transport, frames } = analysis.result;
  const aside = flagCounts(frames).map(([flag, count]) => `${count} ${flag}`);
  return [
    `Variance per axis in square micrometres over delay in nanoseconds for ${counted(transport.window.frames, "frame")} used,`,
    `with one standard uncertainty, and the fitted law (${TRANSPORT_LAW[transport.preferred]}) with its 95 % band.`,
    aside.length > 0 ? `Set aside: ${aside.join(", ")}.` : "No frame was set aside.",
    beyond > 0 ? `${counted(beyond, "frame")} set aside lie beyond the axis.` : "",
  ].join(" ");
}
