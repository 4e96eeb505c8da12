import type { FirstLook } from "./inspect.ts";

/** Rows of the table of frames before it is thinned. */
const TABLE_ROWS = 12;
const BARS = "▁▂▃▄▅▆▇█";

/** The facts for a person, in lines of at most `width` columns. */
export function inspectionText(facts: FirstLook, width: number): string {
  const blocks = [heading(facts), light(facts, width), frameTable(facts), noise(facts), settings(facts)];
  const last =
    facts.missing === null ? ["gleamwalk spread can run on it."] : [`To run spread: ${facts.missing}`];
  const lines = [...blocks, last]
    .filter((block) => block.length > 0)
    .map((block) => fold(block, width).join("\n"));
  return `${lines.join("\n\n")}\n`;
}

function heading(facts: FirstLook): string[] {
  const { shape, axes, sample_type } = facts;
  return [
    facts.file,
    `  ${shape.join(" × ")} (${axes}), ${sample_type}`,
    `  counts from ${short(facts.min)} to ${short(facts.max)}, sum ${facts.sum}`,
    `  pixel ${facts.pixel_um === null ? "not stated" : `${short(facts.pixel_um)} µm`}, ${delays(facts)}`,
  ];
}

function delays({ delays_ns: all }: FirstLook): string {
  const [first, last] = [all?.[0], all?.at(-1)];
  if (all === null || first === undefined || last === undefined) return "delays not stated";
  const step = (last - first) / (all.length - 1);
  const even = all.every((delay, i) => Math.abs(delay - first - i * step) < 1e-9 * Math.abs(last - first));
  return `${all.length} delays from ${short(first)} to ${short(last)} ns${even ? `, step ${short(step)} ns` : ""}`;
}

/** One bar a frame, or one for the mean of several where there are more frames than columns. */
function light(facts: FirstLook, width: number): string[] {
  const sums = facts.frames.map((frame) => frame.sum);
  if (sums.length < 2) return [];
  const per = Math.ceil(sums.length / (width - 2));
  const means = Array.from({ length: Math.ceil(sums.length / per) }, (_, i) => {
    const group = sums.slice(i * per, (i + 1) * per);
    return group.reduce((a, b) => a + b, 0) / group.length;
  });
  const [low, high] = [Math.min(...means), Math.max(...means)];
  const bars = means.map((mean) => BARS[Math.round((7 * (mean - low)) / (high - low || 1))]);
  const each = per === 1 ? "one bar a frame" : `one bar for ${per} frames`;
  return [`Light by frame (stored counts, from least to most; ${each})`, `  ${bars.join("")}`];
}

function frameTable(facts: FirstLook): string[] {
  const { frames, saturation } = facts;
  if (frames.length < 2) return [];
  const stride = Math.ceil(frames.length / TABLE_ROWS);
  const rows = frames.filter((_, i) => i % stride === 0 || i === frames.length - 1);
  const full = saturation === null ? [] : ["full pixels"];
  const title = row(["frame", "delay/ns", "sum", "min", "max", ...full]);
  return [
    title,
    ...rows.map((frame) =>
      row([
        String(frame.index + 1),
        frame.delay_ns === null ? "–" : short(frame.delay_ns),
        short(frame.sum),
        short(frame.min),
        short(frame.max),
        ...(saturation === null ? [] : [String(frame.full)]),
      ]),
    ),
  ];
}

const row = (cells: readonly string[]): string =>
  `  ${cells.map((cell, i) => cell.padStart(i === 0 ? 5 : 12)).join("")}`;

function noise({ noise: found, saturation, frames }: FirstLook): string[] {
  const full = frames.reduce((sum, frame) => sum + frame.full, 0);
  const saturated =
    saturation === null
      ? "Saturation level not known."
      : `Saturation: ${full === 0 ? "no pixel" : `${full} pixels`} at or above ${saturation} counts.`;
  if (found === null) return [saturated];
  return [
    `Noise, at a first look: variance ≈ ${about(found.variance_per_count)} × counts (gain × excess noise);`,
    `  darkest level ${about(found.dark_level)} counts, spread there ${about(found.dark_spread)} counts.`,
    saturated,
  ];
}

function settings(facts: FirstLook): string[] {
  const entries = Object.entries(facts.settings);
  if (entries.length === 0) return ["Settings: none, neither in an acquisition file nor in the image."];
  return ["Settings", ...entries.map(([key, { text, from }]) => `  ${key.padEnd(24)} ${text}  (${from})`)];
}

const short = (value: number | null): string => (value === null ? "–" : String(Number(value.toPrecision(7))));
const about = (value: number): string => String(Number(value.toPrecision(2)));

/** Breaks lines at spaces; what follows a break is set in by the line's own indent and four more. */
function fold(lines: readonly string[], width: number): string[] {
  return lines.flatMap((line) => {
    const folded: string[] = [];
    let rest = line;
    const indent = " ".repeat((/^ */.exec(line)?.[0].length ?? 0) + 4);
    while (rest.length > width) {
      const at = rest.lastIndexOf(" ", width);
      if (at <= indent.length) break;
      folded.push(rest.slice(0, at));
      rest = indent + rest.slice(at + 1);
    }
    return [...folded, rest];
  });
}
