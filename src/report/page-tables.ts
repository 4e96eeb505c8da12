import type { Law, Result } from "../outcome/result.ts";
import { escapeText as e } from "./figure-parts.ts";
import { concise, plain, symbols } from "./notation.ts";
import { DECAY_LAW, FLAG, probability, QUANTITY, TRANSPORT_LAW, unitText } from "./wording.ts";

interface Column {
  readonly text: string;
  readonly numeric?: boolean;
}

/** HTML already; one that reaches over several columns says over how many. */
type Cell = string | { readonly html: string; readonly span: number };

/** The first cell of every row is its heading. */
export function table(
  columns: readonly Column[],
  rows: readonly { readonly cells: readonly Cell[]; readonly chosen?: boolean }[],
  options: { readonly caption?: string; readonly className?: string } = {},
): string {
  const align = (i: number) => (columns[i]?.numeric === true ? ' class="n"' : "");
  const head = columns.map((column, i) => `<th scope="col"${align(i)}>${e(column.text)}</th>`).join("");
  const body = rows.map(({ cells, chosen }) => {
    let at = 0;
    const texts = cells.map((cell) => {
      const { html, span } = typeof cell === "string" ? { html: cell, span: 1 } : cell;
      const name = at === 0 ? 'th scope="row"' : "td";
      const text = `<${name}${span === 1 ? align(at) : ` colspan="${span}"`}>${html}</${name.slice(0, 2)}>`;
      at += span;
      return text;
    });
    return `<tr${chosen === true ? ' class="chosen"' : ""}>${texts.join("")}</tr>`;
  });
  const caption = options.caption === undefined ? "" : `<caption>${e(options.caption)}</caption>`;
  const name = options.className === undefined ? "" : ` class="${options.className}"`;
  return `<table${name}>${caption}<thead><tr>${head}</tr></thead><tbody>\n${body.join("\n")}\n</tbody></table>`;
}

/** A region that scrolls sideways must be reachable by keyboard, and must have a name then. */
export function scroll(inner: string, label: string, tall = false): string {
  return `<div class="scroll${tall ? " tall" : ""}" tabindex="0" role="region" aria-label="${e(label)}">${inner}</div>`;
}

export function lengthsTable(result: Result): string {
  return table(
    [{ text: "Formula" }, { text: "Length (µm)", numeric: true }],
    result.lengths.map((length) => ({
      cells: [e(symbols(length.formula)), e(concise(length.value_um, length.u_um))],
    })),
    { caption: "Lengths, each under its formula" },
  );
}

export function tensorTable(tensor: NonNullable<Result["tensor"]>): string {
  const row = (name: string, value: { value: number; u: number }, unit: string) => ({
    cells: [name, e(`${concise(value.value, value.u)} ${unit}`)],
  });
  return table(
    [{ text: "Component" }, { text: "Value", numeric: true }],
    [
      row("D<sub>xx</sub>", tensor.xx, "cm²/s"),
      row("D<sub>xy</sub>", tensor.xy, "cm²/s"),
      row("D<sub>yy</sub>", tensor.yy, "cm²/s"),
      row("along the major axis", tensor.major, "cm²/s"),
      row("along the minor axis", tensor.minor, "cm²/s"),
      row("major axis from x", tensor.angle_deg, "°"),
    ],
    { caption: "Diffusion tensor" },
  );
}

export function densityTable(density: NonNullable<Result["density"]>): string {
  const rows: { cells: string[] }[] = [
    {
      cells: [
        `density (${density.from})`,
        e(`${concise(density.density_per_cm2.value, density.density_per_cm2.u)} cm⁻²`),
      ],
    },
  ];
  const { degeneracy_temperature_k: t, filling, degenerate_mobility: mu } = density;
  if (t !== null) rows.push({ cells: ["degeneracy temperature", e(`${concise(t.value, t.u)} K`)] });
  if (filling !== null) rows.push({ cells: ["filling n/n<sub>Q</sub>", e(plain(filling, 3))] });
  if (mu !== null)
    rows.push({ cells: ["mobility by the degenerate relation", e(`${concise(mu.value, mu.u)} cm²/(V s)`)] });
  return table([{ text: "Quantity" }, { text: "Value", numeric: true }], rows, {
    caption: "Density at the centre of the first spot",
  });
}

export function budgetTables(result: Result): string[] {
  const names = ["diffusion_coefficient", "diffusion_length", "mobility"] as const;
  return names.flatMap((name) => {
    const rows = result.budget.filter((row) => row.quantity === name);
    const quantity = result.quantities[name];
    if (rows.length === 0 || quantity === null) return [];
    const unit = unitText(quantity.unit);
    const variance = rows.reduce((sum, row) => sum + row.contribution ** 2, 0) || 1;
    const body = rows.map((row) => ({
      cells: [
        e(row.input),
        row.type,
        e(`${plain(row.u, 2)}${row.unit === "1" ? "" : ` ${unitText(row.unit)}`}`),
        e(plain(row.sensitivity, 3)),
        e(plain(row.contribution, 2)),
        `${((100 * row.contribution ** 2) / variance).toFixed(0)} %`,
      ],
    }));
    const columns = [
      { text: "Input" },
      { text: "Type" },
      { text: "u", numeric: true },
      { text: "Sensitivity", numeric: true },
      { text: `Share of u (${unit})`, numeric: true },
      { text: "of u²", numeric: true },
    ];
    const caption = `${QUANTITY[name].name} ${QUANTITY[name].symbol}: u = ${plain(quantity.u, 2)} ${unit}`;
    return [scroll(table(columns, body, { caption }), `Uncertainty budget of ${QUANTITY[name].symbol}`)];
  });
}

/** Bias and coverage over stacks drawn from the fitted model. */
export function closureTable({ quantities }: NonNullable<Result["closure"]>): string {
  const rows = (["diffusion_coefficient", "lifetime", "diffusion_length"] as const).flatMap((name) => {
    const found = quantities[name];
    if (found === null) return [];
    const { truth, bias, mean_pull, u_mean_pull, spread, coverage, u_coverage, upper_limits } = found;
    return {
      cells: [
        `${e(QUANTITY[name].name)} (${unitText(CLOSURE_UNIT[name])})`,
        e(plain(truth, 4)),
        bias === null ? "–" : e(plain(bias, 2)),
        mean_pull === null || u_mean_pull === null ? "–" : e(concise(mean_pull, u_mean_pull)),
        spread === null ? "–" : spread.toFixed(2),
        e(`${(100 * coverage).toFixed(1)} % ± ${(100 * u_coverage).toFixed(1)} %`),
        String(upper_limits),
      ],
    };
  });
  const columns = ["Truth", "Bias", "Bias / u", "Spread / u", "Coverage of 95 %", "Upper limits"];
  return table([{ text: "Quantity" }, ...columns.map((text) => ({ text, numeric: true }))], rows, {
    caption: "Bias / u should be 0, spread / u 1, coverage 95 %",
  });
}

const CLOSURE_UNIT = { diffusion_coefficient: "cm^2/s", lifetime: "ns", diffusion_length: "µm" } as const;

export function lawTables(result: Result): string[] {
  const spread = laws("Laws of spread", result.transport.models, result.transport.preferred, TRANSPORT_LAW);
  if (result.decay === null) return [spread];
  return [spread, laws("Laws of decay", result.decay.models, result.decay.preferred, DECAY_LAW)];
}

function laws<Name extends string>(
  caption: string,
  models: Readonly<Partial<Record<Name, Law | null>>>,
  preferred: Name,
  words: Readonly<Record<Name, string>>,
): string {
  const entries = (Object.entries(models) as [Name, Law | null][]).map(([name, law]) => ({
    chosen: name === preferred,
    cells: [`${e(words[name])}${name === preferred ? " (preferred)" : ""}`, ...lawCells(law)],
  }));
  const columns = [
    { text: "Law" },
    { text: "Formula and parameters" },
    { text: "χ²/dof", numeric: true },
    { text: "p", numeric: true },
    { text: "Weight", numeric: true },
  ];
  return scroll(table(columns, entries, { caption }), caption);
}

function lawCells(law: Law | null): string[] {
  if (law === null) return ["not fitted", "", "", ""];
  const parameters = Object.entries(law.parameters).map(([name, value]) => {
    const unit = value.unit === "1" || value.unit === "" ? "" : ` ${unitText(value.unit)}`;
    return formula(`${symbols(name)} = ${concise(value.value, value.u)}${unit}`);
  });
  const lines = [
    formula(symbols(law.formula)),
    ...parameters,
    ...(law.converged ? [] : ["the fit did not converge"]),
  ];
  const ratio = law.degrees_of_freedom > 0 ? (law.chi2 / law.degrees_of_freedom).toFixed(2) : "–";
  return [
    `<span class="formula">${lines.join("<br>")}</span>`,
    ratio,
    e(probability(law.p_value)),
    law.weight.toFixed(2),
  ];
}

/** t^α and t_a as they are written by hand. */
function formula(text: string): string {
  return e(text)
    .replace(/\^(\p{L}+)/gu, "<sup>$1</sup>")
    .replace(/(?<=\p{L})_(\p{L}+)/gu, "<sub>$1</sub>");
}

export function settingsTable(result: Result): string {
  const rows = Object.entries(result.acquisition).map(([key, setting]) => ({
    cells: [`<code>${e(key)}</code>`, e(setting.text), e(setting.from)],
  }));
  const options = Object.entries(result.provenance.options).map(([key, value]) => ({
    cells: [`<code>${e(key)}</code>`, e(String(value)), "option of the analysis"],
  }));
  return scroll(
    table([{ text: "Setting" }, { text: "Used" }, { text: "From" }], [...rows, ...options]),
    "Settings",
  );
}

export function framesTable(result: Result): string {
  const both = (value: number | null, u: number | null) =>
    value === null ? "" : u === null ? plain(value, 4) : concise(value, u);
  const rows = result.frames.map((row) => ({
    cells: [
      String(row.index),
      e(plain(row.delay_ns)),
      e(both(row.photons, row.u_photons)),
      e(both(row.variance_um2, row.u_variance_um2)),
      e(both(row.msd_um2, row.u_msd_um2)),
      e(row.reduced_chi2 === null ? "" : row.reduced_chi2.toFixed(2)),
      row.used ? "yes" : "no",
      row.used_in_decay ? "yes" : "no",
      e(row.flags.map((flag) => FLAG[flag]).join(", ")),
    ],
  }));
  const columns = [
    { text: "Frame", numeric: true },
    { text: "Delay (ns)", numeric: true },
    { text: "Light (photons)", numeric: true },
    { text: "Variance per axis (µm²)", numeric: true },
    { text: "MSD (µm²)", numeric: true },
    { text: "χ²ᵣ", numeric: true },
    { text: "Width used" },
    { text: "Light used" },
    { text: "Set aside as" },
  ];
  return scroll(table(columns, rows, { className: "frames-table" }), "All frames", true);
}
