import type * as Plot from "@observablehq/plot";
import type { FrameFlag } from "../frame/spot.ts";
import { FLAG } from "./wording.ts";

/** What the figures are drawn with: the plotting library and a document, from Node's stand-in or from a page. */
export interface Drawing {
  readonly plot: Pick<typeof Plot, "areaY" | "dot" | "frame" | "line" | "lineY" | "plot" | "ruleY" | "text">;
  readonly document: Document;
  /** An element as text. */
  serialize(node: Element): string;
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
  readonly symbol: SymbolName | "line" | "caret";
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
  };
}

/** A panel of a figure: its SVG, and how high it is. */
export interface Panel {
  readonly svg: string;
  readonly height: number;
}

export interface ErrorBar {
  readonly x: number;
  readonly low: number;
  readonly high: number;
  readonly colour: string;
}

/** Error bars as one broken line a colour: hundreds of elements of their own would take most of the drawing's time. */
export function errorBars({ plot }: Drawing, bars: readonly ErrorBar[]): Plot.Markish {
  const points = bars.flatMap(({ x, low, high, colour }) => [
    { x, y: low, colour },
    { x, y: high, colour },
    { x, y: Number.NaN, colour },
  ]);
  return plot.line(points, {
    x: "x",
    y: "y",
    z: "colour",
    stroke: "colour",
    strokeOpacity: 0.75,
    strokeWidth: 1.5,
  });
}

const PLOT_STYLE =
  "background: none; color: inherit; font-family: inherit; font-size: 13px; overflow: visible;";

/** A plot as a panel at the height it was drawn with; its style sheet goes, as the figure has its own fonts. */
export function panel(drawing: Drawing, node: Element, height: number): Panel {
  // as an attribute: the plotting library sets styles by a property that not every document has
  node.setAttribute("style", PLOT_STYLE);
  return { svg: drawing.serialize(node).replace(/<style>[\s\S]*?<\/style>/g, ""), height };
}

/** The row that names the symbols; wraps where the entries do not fit. */
export function keyRow(entries: readonly KeyEntry[]): Panel {
  const placed = place(entries);
  const marks = placed.map((entry) => {
    const at = `<g transform="translate(${entry.x} ${KEY_ROW * entry.row + KEY_ROW / 2})">`;
    return `${at}${keyMark(entry)}<text x="14" dy="0.35em">${escapeText(entry.text)}</text></g>`;
  });
  const height = KEY_ROW * (1 + Math.max(0, ...placed.map((entry) => entry.row)));
  return { svg: `<svg width="${WIDTH}" height="${height}">${marks.join("")}</svg>`, height };
}

type Placed = KeyEntry & { readonly x: number; readonly row: number };

/** Outlines about the origin, of the shapes that the plots use for the same names. */
const OUTLINE: Readonly<Record<SymbolName | "caret", string>> = {
  circle: "M4 0A4 4 0 1 1-4 0A4 4 0 1 1 4 0Z",
  square: "M-3.5-3.5h7v7h-7Z",
  triangle: "M0-5.1L4.4 2.6H-4.4Z",
  diamond: "M0-5.2L3 0L0 5.2L-3 0Z",
  times: "M-3.4-3.4L3.4 3.4M-3.4 3.4L3.4-3.4",
  plus: "M-4.5 0H4.5M0-4.5V4.5",
  caret: "M-4-2h8L0 3Z",
  asterisk: "M0-4.6V4.6M-4-2.3L4 2.3M-4 2.3L4-2.3",
};

function keyMark({ symbol, colour, filled, dashed }: KeyEntry): string {
  if (symbol === "line") {
    return `<path d="M-9 0H9" stroke="${colour}" stroke-width="2"${dashed === true ? ' stroke-dasharray="4 3"' : ""}/>`;
  }
  return `<path d="${OUTLINE[symbol]}" fill="${filled ? colour : "none"}" stroke="${colour}" stroke-width="1.3"/>`;
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
  panels: readonly Panel[],
  words: { readonly title: string; readonly description: string; readonly id: string },
): string {
  const height = panels.reduce((sum, each) => sum + each.height, 0);
  let top = 0;
  const inner = panels.map(({ svg, height: own }) => {
    const moved = svg.replace("<svg ", `<svg y="${top}" aria-hidden="true" `);
    top += own;
    return moved;
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
