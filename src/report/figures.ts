import type { Analysis } from "../outcome/analysis.ts";
import { lightFigure } from "./figure-light.ts";
import type { Drawing } from "./figure-parts.ts";
import { profileFigure } from "./figure-profiles.ts";
import { spreadFigure } from "./figure-spread.ts";

/** Self-contained SVG texts, by the name of their file. */
export interface Figures {
  readonly spread: string;
  readonly light: string;
  readonly profiles: string;
}

/** Draws the figures in Node. */
export async function renderFigures(analysis: Analysis): Promise<Figures> {
  return drawFigures(await loadDrawing(), analysis);
}

/**
 * The plotting library and the stand-in for a page's document, loaded here and only here: they take longer to load than
 * the figures take to draw.
 */
export async function loadDrawing(): Promise<Drawing> {
  return (await import("./drawing.ts")).drawing;
}

/** Draws the figures with a document at hand: a page's own, or Node's stand-in. */
export function drawFigures(drawing: Drawing, analysis: Analysis): Figures {
  return {
    spread: spreadFigure(drawing, analysis),
    light: lightFigure(drawing, analysis),
    profiles: profileFigure(drawing, analysis),
  };
}
