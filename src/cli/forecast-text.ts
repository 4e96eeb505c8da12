import type { Forecast, ForecastQuantity, Remedy, RemedyName } from "../outcome/forecast.ts";
import { concise, plain, symbols } from "../report/notation.ts";

const ROAD: Readonly<Record<Forecast["road"], string>> = {
  widths: "from the spot's widths and light, as gleamwalk spread finds D and the lifetime",
  whole_stack: "from the whole stack at once, as gleamwalk spread --field fits it",
};

const UNIT: Readonly<Record<string, string>> = {
  "cm^2/s": "cm²/s",
  um: "µm",
  "1/ns": "/ns",
  ns: "ns",
  "1": "",
};

/** The forecast for a person, in lines of at most `width` columns. */
export function forecastText(told: Forecast, width: number): string {
  const blocks = [
    [told.plan, ...planLines(told).map((line) => `  ${line}`)],
    [`What counting leaves at best (k = 1), ${ROAD[told.road]}`, ...quantityLines(told), systematic(told)],
    ["To halve the error of D, one of", ...remedyLines(told)],
    ...told.cautions.map((caution) => [caution]),
  ];
  return `${blocks.map((block) => block.flatMap((line) => fold(line, width)).join("\n")).join("\n\n")}\n`;
}

function planLines({ kind, frames, first_ns, last_ns, photons, sigma0_um }: Forecast): string[] {
  return [
    `${kind}, ${frames} frames from ${plain(first_ns)} to ${plain(last_ns)} ns`,
    `${plain(photons, 3)} photons in the first frame after the pulse, spot σ₀ ${plain(sigma0_um, 3)} µm`,
  ];
}

function quantityLines({ quantities: q }: Forecast): string[] {
  const rows: [string, ForecastQuantity | null][] = [
    ["D", q.diffusion_coefficient],
    ["τ", q.lifetime],
    ["L", q.diffusion_length],
    ["β", q.repulsion],
    [symbols("k_n0"), q.k_n0],
    ["c", q.capture],
    ["τ_m", q.trap_lifetime],
  ];
  return rows.flatMap(([name, one]) => {
    if (one === null) return [];
    const value = `${concise(one.value, one.u)} ${UNIT[one.unit]}`.trimEnd();
    const relative = one.value === 0 ? "" : `${plain((100 * one.u) / Math.abs(one.value), 2)} %`;
    return [`  ${name.padEnd(5)}${value.padEnd(26)}${relative}`.trimEnd()];
  });
}

function systematic({ systematic_relative_u: u }: Forecast): string {
  return u === 0
    ? "  Pixel size and time base are stated without uncertainty; theirs adds to this."
    : `  Pixel size and time base add ${plain(100 * u, 2)} % to D, whatever the light.`;
}

const REMEDIES: readonly [RemedyName, string, string][] = [
  ["light", "more light", "light"],
  ["window", "longer delays", "time step"],
  ["spot", "a smaller spot", "σ₀"],
];

function remedyLines({ halving }: Forecast): string[] {
  return REMEDIES.map(([name, title, what]) => `  ${title.padEnd(16)}${remedyText(halving[name], what)}`);
}

function remedyText({ factor, best }: Remedy, what: string): string {
  if (factor !== null) return `${what} × ${plain(factor, 2)}`;
  if (best.factor === 1) return "does not help here";
  return `does not do it alone: at best ${what} × ${plain(best.factor, 2)}, error × ${plain(best.error_ratio, 2)}`;
}

/** Breaks a line at spaces; what follows is set in by the line's own indent. */
function fold(line: string, width: number): string[] {
  const indent = /^ */.exec(line)?.[0] ?? "";
  const lines: string[] = [];
  let rest = line;
  while (rest.length > width) {
    const at = rest.lastIndexOf(" ", width);
    if (at <= indent.length) break;
    lines.push(rest.slice(0, at));
    rest = indent + rest.slice(at + 1);
  }
  return [...lines, rest];
}
