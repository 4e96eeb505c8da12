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
import { powerOfTen, superscript } from "./notation.ts";
import { counted, DECAY_LAW, flagCounts, mainFlag } from "./wording.ts";

type WithLight = FrameRow & { readonly photons: number; readonly u_photons: number };

const HEIGHT = 250;
const RESIDUAL_HEIGHT = 108;

/** Light under the spot over delay on a logarithmic scale, with the preferred decay, above its residuals. */
export function lightFigure(drawing: Drawing, analysis: Analysis): string {
  const { result } = analysis;
  const rows = result.frames.filter(hasLight);
  const x = padded(
    result.frames.map((row) => row.delay_ns),
    0.02,
  );
  const key = keyRow(keyEntries(analysis, rows));
  const panels = [key, panel(drawing, lightPanel(drawing, analysis, rows, x), HEIGHT)];
  if (result.decay !== null)
    panels.push(panel(drawing, residualPanel(drawing, analysis, x), RESIDUAL_HEIGHT));
  return assemble(panels, {
    id: "light",
    title: `Light under the spot, ${result.input.file}`,
    description: describe(analysis, rows.length),
  });
}

function hasLight(row: FrameRow): row is WithLight {
  return row.photons !== null && row.u_photons !== null;
}

function lightPanel(
  drawing: Drawing,
  analysis: Analysis,
  rows: readonly WithLight[],
  x: [number, number],
): Element {
  const { plot } = drawing;
  const last = analysis.result.decay === null;
  const domain = verticalRange(analysis, rows);
  const inside = rows.filter((row) => row.photons >= domain[0]);
  const used = inside.filter((row) => row.used_in_decay);
  const aside = inside.filter((row) => !row.used_in_decay);
  const below = rows.filter((row) => row.photons < domain[0]);
  const clamp = (value: number) => Math.min(domain[1], Math.max(domain[0], value));
  return plot.plot({
    ...common(drawing, HEIGHT),
    marginBottom: last ? 40 : 12,
    x: {
      label: last ? "Delay (ns)" : null,
      domain: x,
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 7,
      ...(last ? {} : { tickFormat: () => "" }),
    },
    y: {
      type: "log",
      label: "Light (photons a frame)",
      domain,
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 5,
      tickFormat: (value: number) => decadeText(value, domain),
    },
    marks: [
      plot.frame({ stroke: INK, strokeOpacity: 0.35 }),
      errorBars(
        drawing,
        inside.map((row) => ({
          x: row.delay_ns,
          low: clamp(row.photons - row.u_photons),
          high: clamp(row.photons + row.u_photons),
          colour: row.used_in_decay ? DATA : asideColour(null),
        })),
      ),
      plot.dot(used, { x: "delay_ns", y: "photons", r: 2.6, fill: DATA }),
      plot.lineY(analysis.lightCurve, { x: "delay", y: "value", stroke: LAW, strokeWidth: 2 }),
      ...flagCounts(aside).map(([flag]) =>
        plot.dot(
          aside.filter((row) => mainFlag(row) === flag),
          {
            x: "delay_ns",
            y: "photons",
            symbol: ASIDE_SYMBOL[flag],
            r: 3.2,
            stroke: asideColour(flag),
            strokeWidth: 1.3,
          },
        ),
      ),
      plot.text(below, {
        x: "delay_ns",
        y: domain[0],
        text: () => "▾",
        fill: asideColour(null),
        fontSize: 11,
      }),
    ],
  });
}

function residualPanel(drawing: Drawing, analysis: Analysis, x: [number, number]): Element {
  const { plot } = drawing;
  const points = analysis.result.frames.flatMap((row) => {
    const residual = analysis.lightResiduals[row.index] ?? null;
    return residual === null ? [] : [{ delay: row.delay_ns, residual }];
  });
  const reach = points.reduce((most, point) => Math.max(most, Math.abs(point.residual)), 3) * 1.12;
  return plot.plot({
    ...common(drawing, RESIDUAL_HEIGHT),
    marginTop: 4,
    x: { label: "Delay (ns)", domain: x, labelAnchor: "center", labelArrow: "none", ticks: 7 },
    y: {
      label: "Residual (s.d.)",
      domain: [-reach, reach],
      labelAnchor: "center",
      labelArrow: "none",
      ticks: 3,
    },
    marks: [
      plot.frame({ stroke: INK, strokeOpacity: 0.35 }),
      plot.ruleY([-2, 2], { stroke: INK, strokeOpacity: 0.35, strokeDasharray: "3 3" }),
      plot.ruleY([0], { stroke: LAW, strokeWidth: 1.5 }),
      plot.dot(points, { x: "delay", y: "residual", r: 2.4, fill: DATA }),
    ],
  });
}

/** Around the frames used and their curve; frames set aside may add half a decade below, not flatten the rest. */
function verticalRange(analysis: Analysis, rows: readonly WithLight[]): [number, number] {
  const used = rows.filter((row) => row.used_in_decay).map((row) => row.photons);
  const all = rows.map((row) => row.photons);
  const shown = [...(used.length > 0 ? used : all), ...analysis.lightCurve.map((point) => point.value)];
  const high = [...all, ...shown].reduce((a, b) => Math.max(a, b), 1);
  const low = shown.reduce((a, b) => (b > 0 ? Math.min(a, b) : a), high);
  const lowest = all.reduce((a, b) => Math.min(a, b), low);
  return [Math.max(lowest / 1.3, low / 3, high * 1e-6), high * 1.4];
}

/** Labels whole decades, 10³; where the range holds fewer than two of them, also 2×10³ and 5×10³. */
export function decadeText(value: number, domain: readonly [number, number]): string {
  const exponent = Math.floor(Math.log10(value) + 1e-9);
  const digit = Math.round(value / 10 ** exponent);
  const decadesInside = Math.floor(Math.log10(domain[1])) - Math.ceil(Math.log10(domain[0])) + 1;
  if (digit === 1) return `10${superscript(String(exponent))}`;
  return decadesInside < 2 && (digit === 2 || digit === 5) ? `${digit}${powerOfTen(exponent)}` : "";
}

function keyEntries(analysis: Analysis, rows: readonly WithLight[]): KeyEntry[] {
  const { decay } = analysis.result;
  const lowest = verticalRange(analysis, rows)[0];
  const aside = rows.filter((row) => !row.used_in_decay && row.photons >= lowest);
  const below = rows.filter((row) => row.photons < lowest).length;
  const entries: KeyEntry[] = [{ text: "used", symbol: "circle", colour: DATA, filled: true }];
  if (decay !== null)
    entries.push({ text: DECAY_LAW[decay.preferred], symbol: "line", colour: LAW, filled: true });
  entries.push(...flagCounts(aside).map(([flag]) => asideEntry(flag)));
  if (below > 0) {
    entries.push({
      text: `${below} below the axis`,
      symbol: "caret",
      colour: asideColour(null),
      filled: true,
    });
  }
  return entries;
}

function describe(analysis: Analysis, count: number): string {
  const { decay } = analysis.result;
  const law =
    decay === null
      ? "No law of decay was fitted."
      : `The curve is the fitted decay (${DECAY_LAW[decay.preferred]}); below it the residuals in standard deviations.`;
  return `Detected photons under the spot over delay in nanoseconds, logarithmic scale, ${counted(count, "frame")}. ${law}`;
}
