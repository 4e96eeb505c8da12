import type { Analysis } from "../outcome/analysis.ts";
import type { Result } from "../outcome/result.ts";
import { closureTexts } from "./closure-text.ts";
import { concise, plain } from "./notation.ts";
import { rangedText } from "./ranged-text.ts";
import {
  CANDIDATE,
  counted,
  DECAY_LAW,
  FLAG,
  flagCounts,
  intervalText,
  type Level,
  probability,
  QUANTITY,
  type QuantityName,
  quantityText,
  sourceText,
  TRANSPORT_LAW,
  unitText,
  VERDICT,
} from "./wording.ts";

export interface TerminalOptions {
  readonly colour: boolean;
  /** Columns, at least 60; 80 by default. */
  readonly width?: number;
  /** Where the report lies, for the last line. */
  readonly report?: string;
}

type Reason = Result["verdict"]["reasons"][number];

const COLOUR: Readonly<Record<Level, string>> = { sound: "32", caution: "33", unsound: "31" };
const REASON_MARK: Readonly<Record<Reason["level"], string>> = { note: "·", caution: "!", unsound: "✕" };
const LABEL = 13;
const NO_BREAK = "\u00a0";

/**
 * The answer for a terminal: verdict, the numbers, how they were found, what was set aside, what to do next, and
 * where the report lies. Plain lines of at most `width` columns; colour only repeats what the words say.
 */
export function renderTerminal(analysis: Analysis, options: TerminalOptions): string {
  const { result } = analysis;
  const width = Math.max(60, options.width ?? 80);
  const paint = painter(options.colour);
  const blocks = [
    heading(result, width, paint),
    numbers(result, width, paint),
    howFound(result, width),
    reasons(result, width, paint),
    options.report === undefined ? [] : [labelled("Report", options.report)],
  ];
  return `${blocks
    .filter((block) => block.length > 0)
    .map((block) => block.join("\n"))
    .join("\n\n")}\n`;
}

type Paint = (text: string, code: string) => string;

function painter(colour: boolean): Paint {
  return (text, code) => (colour ? `\u001b[${code}m${text}\u001b[0m` : text);
}

function heading(result: Result, width: number, paint: Paint): string[] {
  const { level } = result.verdict;
  const { word, mark, sentence } = VERDICT[level];
  const shape = result.input.shape.join(" × ");
  const subject = wrap(`${result.input.file}, ${shape} (${result.input.axes})`, width, "");
  const verdict = wrap(`${mark} ${word.toUpperCase()}. ${sentence}`, width, "  ");
  return [...subject, ...verdict.map((line) => paint(line, `1;${COLOUR[level]}`))];
}

function numbers(result: Result, width: number, paint: Paint): string[] {
  const names = Object.keys(QUANTITY) as QuantityName[];
  return names.map((name) => {
    const quantity = result.quantities[name];
    const { symbol, missing } = QUANTITY[name];
    if (quantity === null) return `  ${symbol}  ${missing}`;
    const text = `${quantityText(quantity)} ${unitText(quantity.unit)}`;
    const interval = quantity.upper_limit === true ? "95 % upper limit" : `95 %: ${intervalText(quantity)}`;
    // the source is the first to go where the terminal is narrow; the report has it too
    const source = width < 78 ? "" : sourceText(name, quantity);
    return `  ${symbol}  ${paint(text.padEnd(25), "1")} ${interval.padEnd(26)} ${source}`.trimEnd();
  });
}

function howFound(result: Result, width: number): string[] {
  const { transport, decay, frames } = result;
  const { window } = transport;
  const lines: [string, string][] = [
    [
      "Window",
      `${plain(window.from_ns)} to ${plain(window.to_ns)} ns, ${counted(window.frames, "frame")} used`,
    ],
    ["Law of spread", spreadText(transport)],
  ];
  if (transport.exponent !== null) {
    lines.push(["", `exponent α = ${concise(transport.exponent.value, transport.exponent.u)}`]);
  }
  if (decay !== null) lines.push(["Law of decay", decayText(decay)]);
  if (result.field !== null) lines.push(["Whole stack", fieldText(result.field)]);
  for (const [i, text] of (result.closure === null ? [] : closureTexts(result.closure)).entries()) {
    lines.push([i === 0 ? "Closure" : "", text]);
  }
  lines.push(["Set aside", setAsideText(frames)]);
  return lines.flatMap(([label, text]) => {
    const [first = "", ...rest] = wrap(text, width - LABEL - 2, "");
    return [labelled(label, first), ...rest.map((line) => labelled("", line))];
  });
}

function labelled(label: string, text: string): string {
  return `${label.padEnd(LABEL)}  ${text}`.trimEnd();
}

/** "straight line, weight 0.83 among 4; χ²/dof = 1.04 (p = 0.41, 32 dof)" */
export function spreadText(transport: Result["transport"]): string {
  const candidates = Object.values(transport.models).filter((law) => law !== null).length;
  const fit = fitText(transport.models[transport.preferred] ?? null, candidates);
  const runs =
    transport.runs_p_value === null ? "" : `; runs test p${NO_BREAK}${equals(transport.runs_p_value)}`;
  return `${TRANSPORT_LAW[transport.preferred]}${fit}${runs}${birgeText(transport.birge_factor)}`;
}

/** The whole-stack fit in one line. */
export function fieldText(field: NonNullable<Result["field"]>): string {
  const found = [
    namedText("D", field.D, "cm²/s"),
    ...(field.k_n0 === null ? [] : [namedText("k·n₀", field.k_n0, "/ns")]),
    ...(field.capture === null ? [] : [namedText("c", field.capture, "/ns")]),
    ...(field.trap_lifetime === null ? [] : [namedText("τ of traps", field.trap_lifetime, "ns")]),
    ...(field.repulsion === null ? [] : [namedText("β", field.repulsion, "")]),
  ];
  return `${CANDIDATE[field.preferred]}; ${found.join(", ")}; p${NO_BREAK}${equals(field.p_value)}`;
}

/** "D = 0.50(1) cm²/s" or "c at most 0.1 /ns"; a line may break before its interval only. */
function namedText(name: string, ranged: NonNullable<Result["field"]>["D"], unit: string): string {
  const text = rangedText(ranged, unit);
  const whole = text.startsWith("at ") ? `${name} ${text}` : `${name} = ${text}`;
  const [first = "", ...rest] = whole.split(" (");
  return [first.replaceAll(" ", NO_BREAK), ...rest].join(" (");
}

/** The law of decay in one line, as the law of spread. */
export function decayText(decay: NonNullable<Result["decay"]>): string {
  const candidates = Object.values(decay.models).filter((law) => law !== null).length;
  return `${DECAY_LAW[decay.preferred]}${fitText(decay.models[decay.preferred] ?? null, candidates)}${birgeText(decay.birge_factor)}`;
}

function fitText(law: Result["transport"]["models"]["line"] | null, candidates: number): string {
  if (law === null) return "";
  const ratio = law.degrees_of_freedom > 0 ? (law.chi2 / law.degrees_of_freedom).toFixed(2) : "–";
  const share = candidates > 1 ? `, weight${NO_BREAK}${law.weight.toFixed(2)} among ${candidates} laws` : "";
  return `${share}; χ²/dof${NO_BREAK}=${NO_BREAK}${ratio} (p${NO_BREAK}${equals(law.p_value)}, ${law.degrees_of_freedom}${NO_BREAK}dof)`;
}

function birgeText(factor: number): string {
  return factor > 1 ? `; uncertainties widened by ${factor.toFixed(2)} (Birge)` : "";
}

function equals(p: number): string {
  const text = probability(p);
  return (text.startsWith("<") ? text : `= ${text}`).replaceAll(" ", NO_BREAK);
}

function setAsideText(frames: Result["frames"]): string {
  const aside = frames.filter((row) => !row.used).length;
  if (aside === 0) return `none of ${counted(frames.length, "frame")}`;
  const counts = flagCounts(frames).map(([flag, count]) => `${count} ${FLAG[flag]}`);
  const why = counts.length === 0 ? "" : `: ${counts.join(", ")}`;
  return `${aside} of ${counted(frames.length, "frame")}${why}`;
}

function reasons(result: Result, width: number, paint: Paint): string[] {
  return result.verdict.reasons.flatMap((reason) => {
    const mark = REASON_MARK[reason.level];
    const [first = "", ...rest] = wrap(`${mark} ${reason.code}: ${reason.text}`, width, "  ");
    const advice =
      reason.advice === "" ? [] : wrap(`→ ${reason.advice}`, width - 2, "  ").map((line) => `  ${line}`);
    const seen = reason.level === "note" ? first : paint(first, COLOUR[reason.level]);
    return [seen, ...rest, ...advice];
  });
}

/** Breaks text at spaces (not at no-break spaces) into lines of at most `width` columns; lines after the first begin with `hang`. */
export function wrap(text: string, width: number, hang: string): string[] {
  const lines: string[] = [];
  let line = "";
  for (const word of text.split(/[ \n]+/).filter((part) => part !== "")) {
    const candidate = line === "" ? word : `${line} ${word}`;
    if (candidate.length <= width || line === "" || line === hang.trimEnd()) line = candidate;
    else {
      lines.push(line);
      line = `${hang}${word}`;
    }
  }
  const all = line === "" ? lines : [...lines, line];
  return all.map((each) => each.replaceAll(NO_BREAK, " "));
}
