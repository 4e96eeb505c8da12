import type * as Plot from "@observablehq/plot";
import type { FrameFlag } from "../frame/spot.ts";
import { FLAG } from "./wording.ts";

/** What the figures are drawn with: the plotting library and a document, from Node's stand-in or from a page. */
export interface Drawing {
  readonly plot: typeof Plot;
  readonly document: Document;
}

export const WIDTH = 460;
/** Height of the row above the plot that names the symbols. */
const KEY_ROW = 20;

/** Distinct in lightness as well as in hue, so that they hold in print and for colour-blind readers. */
export const INK = "currentColor";
export const DATA = "#1b5e8c";
export const LAW = "#c2571a";
export const ASIDE = "#767c84";

export type SymbolName = "circle" | "square" | "triangle" | "diamond" | "times" | "plus" | "asterisk";

/** How a frame that was set aside is marked. Flags without a width never reach the plot of widths. */
export const ASIDE_SYMBOL: Readonly<Record<FrameFlag, SymbolName>> = {
  "before-pulse": "times",
  empty: "plus",
  saturated: "square",
  "too-dim": "triangle",
  "fit-failed": "asterisk",
  "trap-dominated": "diamond",
  "outside-window": "circle",
};

export interface KeyEntry {
  readonly text: string;
  readonly symbol: SymbolName | "line";
  readonly colour: string;
  readonly filled: boolean;
  readonly dashed?: boolean;
}

export function asideEntry(flag: FrameFlag): KeyEntry {
  return { text: FLAG[flag], symbol: ASIDE_SYMBOL[flag], colour: asideColour(flag), filled: false };
}

/** Trapped frames are the finding, not only a nuisance, so they keep a strong colour. */
export function asideColour(flag: FrameFlag | null): string {
  return flag === "trap-dominated" ? "#8a1c5b" : ASIDE;
}

/** Options that every plot shares. */
export function common(drawing: Drawing, height: number): Plot.PlotOptions {
  return {
    document: drawing.document,
    width: WIDTH,
    height,
    marginLeft: 62,
    marginRight: 14,
    marginTop: 12,
    marginBottom: 40,
    style: {
      background: "none",
      color: "inherit",
      fontFamily: "inherit",
      fontSize: "13px",
      overflow: "visible",
    },
  };
}

/** The row that names the symbols, drawn in pixels; wraps where the entries do not fit. */
export function keyRow(drawing: Drawing, entries: readonly KeyEntry[]): { node: Element; height: number } {
  const placed = place(entries);
  const height = KEY_ROW * (1 + Math.max(0, ...placed.map((entry) => entry.row)));
  const y = (entry: Placed) => KEY_ROW * entry.row + KEY_ROW / 2;
  const { plot } = drawing;
  const node = plot.plot({
    ...common(drawing, height),
    margin: 0,
    marginLeft: 0,
    marginRight: 0,
    marginTop: 0,
    marginBottom: 0,
    x: { type: "identity" },
    y: { type: "identity" },
    axis: null,
    marks: [
      ...placed.map((entry) => keyMark(plot, entry, y(entry))),
      plot.text(placed, {
        x: (entry: Placed) => entry.x + 14,
        y,
        text: "text",
        textAnchor: "start",
        fill: INK,
      }),
    ],
  });
  return { node, height };
}

type Placed = KeyEntry & { readonly x: number; readonly row: number };

function keyMark(plot: Drawing["plot"], entry: Placed, y: number): Plot.Markish {
  const { x, colour, symbol } = entry;
  if (symbol === "line") {
    const dash = entry.dashed === true ? { strokeDasharray: "4 3" } : {};
    return plot.link([entry], {
      x1: [x - 9],
      x2: [x + 9],
      y1: [y],
      y2: [y],
      stroke: colour,
      strokeWidth: 2,
      ...dash,
    });
  }
  const fill = entry.filled ? colour : "none";
  return plot.dot([entry], { x: [x], y: [y], symbol, r: 4, fill, stroke: colour, strokeWidth: 1.3 });
}

/** 6.7 px a character is a safe width at 13 px in the usual sans-serif faces. */
function place(entries: readonly KeyEntry[]): Placed[] {
  let x = 62;
  let row = 0;
  return entries.map((entry) => {
    const advance = 34 + 6.7 * entry.text.length;
    if (x + advance > WIDTH + 10) {
      x = 62;
      row += 1;
    }
    const placed = { ...entry, x: x + 9, row };
    x += advance;
    return placed;
  });
}

/**
 * Stacks panels under each other in one SVG that stands on its own: namespace, size, fonts, a title and a
 * description for readers who do not see it.
 */
export function assemble(
  panels: readonly { readonly node: Element; readonly height: number }[],
  words: { readonly title: string; readonly description: string; readonly id: string },
): string {
  const height = panels.reduce((sum, panel) => sum + panel.height, 0);
  let top = 0;
  const inner = panels.map(({ node, height: own }) => {
    node.setAttribute("y", String(top));
    node.setAttribute("aria-hidden", "true");
    top += own;
    return node.outerHTML.replace(/<style>[\s\S]*?<\/style>/g, "");
  });
  return [
    `<svg xmlns="http://www.w3.org/2000/svg" class="figure" viewBox="0 0 ${WIDTH} ${height}" width="${WIDTH}" height="${height}"`,
    ` role="img" aria-labelledby="${words.id}-title ${words.id}-description"`,
    ` font-family="Helvetica, Arial, 'Liberation Sans', sans-serif" font-size="13" fill="currentColor">`,
    `<title id="${words.id}-title">${escapeText(words.title)}</title>`,
    `<desc id="${words.id}-description">${escapeText(words.description)}</desc>`,
    ...inner,
    "</svg>\n",
  ].join("");
}

/** For text and attribute values of HTML and SVG alike. */
export function escapeText(text: string): string {
  return text
    .replaceAll("&", "&amp;")
    .replaceAll("<", "&lt;")
    .replaceAll(">", "&gt;")
    .replaceAll('"', "&quot;")
    .replaceAll("'", "&#39;");
}

/** A range widened on both sides by a share of itself; never of zero width. */
export function padded(values: readonly number[], share: number): [low: number, high: number] {
  const low = values.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY);
  const high = values.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY);
  if (!(low <= high)) return [0, 1];
  const pad = share * (high - low) || Math.abs(high) * 0.1 || 1;
  return [low - pad, high + pad];
}
