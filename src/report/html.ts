import type { Analysis } from "../outcome/analysis.ts";
import type { Result } from "../outcome/result.ts";
import { closureFinding, closureText } from "./closure-text.ts";
import { candidateTables } from "./field-tables.ts";
import { escapeText as e } from "./figure-parts.ts";
import type { Figures } from "./figures.ts";
import { methodsText } from "./methods.ts";
import { PAGE_STYLE } from "./page-style.ts";
import {
  budgetTables,
  closureTable,
  densityTable,
  framesTable,
  lawTables,
  lengthsTable,
  scroll,
  settingsTable,
  tensorTable,
} from "./page-tables.ts";
import { viewerHtml } from "./page-viewer.ts";
import { decayText, spreadText } from "./terminal.ts";
import type { Viewer } from "./viewer-data.ts";
import {
  asSentence,
  baseName,
  counted,
  intervalText,
  QUANTITY,
  type QuantityName,
  quantityText,
  sourceText,
  unitText,
  VERDICT,
} from "./wording.ts";

/** Nothing may be fetched from anywhere: the file is all there is. */
const POLICY =
  "default-src 'none'; style-src 'unsafe-inline'; script-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'";

/**
 * The report: one self-contained HTML file. It opens with the verdict and the four numbers, then shows the evidence,
 * then everything that is needed to repeat the work.
 * @param viewer the frames that the viewer shows, packed
 */
export function renderReport(analysis: Analysis, figures: Figures, viewer: Viewer): string {
  const { result } = analysis;
  const body = [
    top(result),
    `<main id="main">`,
    verdictSection(result),
    spreadAndLight(result, figures),
    viewerHtml(viewer, figures.profiles),
    ruled("The whole stack at once", candidateTables(result)),
    ruled("How sure", [
      `<p>Standard uncertainties (k = 1). Type A comes from counting statistics through the fits, type B from what is known about pixel size, time base and temperature.</p>`,
      ...budgetTables(result),
    ]),
    ...(result.closure === null
      ? []
      : [
          ruled("Closure", [
            `<p>${e(closureText(result.closure))}. Each was analysed as the recording was, calibrations taken as exact. ${e(closureFinding(result.closure))}</p>`,
            scroll(closureTable(result.closure), "Closure"),
          ]),
        ]),
    ruled("Numbers in other forms", [`<div class="tables">${otherForms(result).join("\n")}</div>`]),
    ruled("Laws tried", lawTables(result)),
    ruled("Methods", [
      `<p>For a supplement, to be copied as it stands.</p>`,
      `<div class="quote">${methodsText(analysis)
        .map((text) => `<p>${e(text)}</p>`)
        .join("\n")}</div>`,
    ]),
    ruled("Settings", [settingsTable(result)]),
    ruled("All frames", [
      `<details><summary>Table of ${counted(result.frames.length, "frame")}</summary>${framesTable(result)}</details>`,
    ]),
    "</main>",
    footer(result),
  ];
  return `<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${POLICY}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="generator" content="gleamwalk ${e(result.provenance.version)}">
<title>${VERDICT[result.verdict.level].word}: ${e(baseName(result.input.file))}</title>
<link rel="icon" href="data:,">
<style>
${PAGE_STYLE}
</style>
</head>
<body>
<a class="skip" href="#main">To the verdict</a>
${body.join("\n")}
</body>
</html>
`;
}

function ruled(title: string, content: readonly string[]): string {
  if (content.length === 0) return "";
  return `<section class="ruled">\n<h2 id="${e(title.toLowerCase().replaceAll(" ", "-"))}">${e(title)}</h2>\n${content.join("\n")}\n</section>`;
}

function top(result: Result): string {
  const sample = ["sample.name", "sample.spot"].flatMap((key) => result.acquisition[key]?.text ?? []);
  const [name, spot] = sample;
  const subject = [name, spot === undefined ? undefined : `spot ${spot}`].filter(
    (part) => part !== undefined,
  );
  return `<header class="top">
<h1>${e(baseName(result.input.file))}</h1>
<p>${e([...subject, `${result.input.shape.join(" × ")} (${result.input.axes})`, `analysed ${result.provenance.started.slice(0, 10)}`].join(" · "))}</p>
</header>`;
}

const NOTHING_TO_DO = `<p>Next: compare with other samples, or take the <a href="#methods">methods text</a> for a supplement.</p>`;

function verdictSection(result: Result): string {
  const { level, reasons } = result.verdict;
  const { word, mark, sentence } = VERDICT[level];
  const names = Object.keys(QUANTITY) as QuantityName[];
  const items = reasons.map(
    (reason) => `<li class="${reason.level}">
<p><span class="code">${e(asSentence(reason.code.replaceAll("-", " ")).slice(0, -1))}</span><span class="tag">${reason.level}</span></p>
<p>${e(asSentence(reason.text))}</p>
${reason.advice === "" ? "" : `<p class="advice">${e(asSentence(reason.advice))}</p>`}
</li>`,
  );
  return `<section class="verdict ${level}" aria-labelledby="verdict">
<h2 id="verdict" class="call"><strong><span aria-hidden="true">${mark}</span> ${word}</strong> <span>${e(sentence)}</span></h2>
<dl class="numbers">
${names.map((name) => numberHtml(result, name)).join("\n")}
</dl>
${items.length === 0 ? NOTHING_TO_DO : `<h3>What was seen, and what to do</h3>\n<ul class="reasons">\n${items.join("\n")}\n</ul>`}
</section>`;
}

function numberHtml(result: Result, name: QuantityName): string {
  const quantity = result.quantities[name];
  const { symbol, name: title, missing } = QUANTITY[name];
  const term = `<dt>${e(title)} ${symbol}</dt>`;
  if (quantity === null)
    return `<div class="number">${term}<dd class="value missing">${e(missing)}</dd></div>`;
  const interval = quantity.upper_limit === true ? "95 % upper limit" : `95 %: ${intervalText(quantity)}`;
  return `<div class="number">${term}
<dd class="value">${e(quantityText(quantity))} <small>${e(unitText(quantity.unit))}</small></dd>
<dd class="range">${e(interval)}</dd>
<dd class="range soft">from ${e(fromText(name, quantity))}</dd></div>`;
}

function fromText(name: QuantityName, quantity: NonNullable<Result["quantities"][QuantityName]>): string {
  const source = sourceText(name, quantity);
  return /^D |^decay/.test(source) ? source.replace(/^decay/, "the decay") : `the ${source}`;
}

function spreadAndLight(result: Result, figures: Figures): string {
  const { decay, field } = result;
  const standing =
    field?.adopted === true
      ? `<p>Of each frame's own spot. These laws would mislead here: the numbers above come from the <a href="#the-whole-stack-at-once">fit of the whole stack</a>.</p>\n`
      : "";
  return `<section aria-labelledby="evidence">
<h2 id="evidence">Spread and light</h2>
${standing}<div class="pair">
<figure>${figures.spread}<figcaption>Preferred law: ${e(spreadText(result.transport))}. Bars: one standard uncertainty.</figcaption></figure>
<figure>${figures.light}<figcaption>${decay === null ? "No law of decay was fitted." : `Preferred law: ${e(decayText(decay))}. Below: residuals in standard deviations.`}</figcaption></figure>
</div>
</section>`;
}

function otherForms(result: Result): string[] {
  const tables: string[] = [];
  if (result.lengths.length > 0) tables.push(lengthsTable(result));
  if (result.tensor !== null) tables.push(tensorTable(result.tensor));
  if (result.density !== null) tables.push(densityTable(result.density));
  return tables;
}

function footer(result: Result): string {
  const { provenance, input } = result;
  return `<footer>
<p>gleamwalk ${e(provenance.version)}, ${e(provenance.started)}, ${provenance.seconds.toFixed(2)} s. SHA-256 of ${e(input.file)}: ${e(input.sha256)}</p>
<p>Beside this file: result.json (every number), frames.csv (one line a frame), figures/ (SVG).</p>
</footer>`;
}
