import type { Result } from "../outcome/result.ts";
import { escapeText as e } from "./figure-parts.ts";
import { between, concise, plain } from "./notation.ts";
import { scroll, table } from "./page-tables.ts";
import { CANDIDATE, probability } from "./wording.ts";

type Field = NonNullable<Result["field"]>;
type Candidate = Field["candidates"][number];

/** The whole-stack fit: its candidates side by side, the preferred one's parameters with their intervals, and what they mean. */
export function candidateTables({ field, verdict }: Result): string[] {
  if (field === null) return [];
  const fits = !verdict.reasons.some(({ code }) => code === "no-model-fits");
  return [
    `<p>${e(standing(field, fits))}</p>`,
    candidates(field),
    `<p class="soft">p: the probability of residuals this large or larger, in rings around the spot and groups of frames, if the candidate is true. ΔAICc: how far a candidate lies behind the best by the corrected Akaike criterion; a richer one must lead by 4 for each parameter that it adds.</p>`,
    parameters(field),
    ...remarks(field).map((text) => `<p>${e(text)}</p>`),
  ];
}

function standing({ adopted, preferred }: Field, fits: boolean): string {
  const model = CANDIDATE[preferred];
  if (adopted) return `The numbers at the top come from the preferred candidate, ${model}.`;
  return fits
    ? `The numbers at the top come from the widths; the preferred candidate, ${model}, stands beside them.`
    : "No candidate describes the recording, and the numbers at the top do not come from this fit. The maps above show what the preferred one leaves over: choose the whole stack as the model there.";
}

/** The parameters beside D: heading and name; repulsion only where it was a candidate. */
const RATES = [
  ["τ (ns)", "tau"],
  ["k·n₀ (1/ns)", "k_n0"],
  ["c (1/ns)", "capture"],
  ["τ of traps (ns)", "trap_lifetime"],
  ["β", "repulsion"],
] as const;

function candidates(field: Field): string {
  const rates = RATES.filter(
    ([, name]) => name !== "repulsion" || field.candidates.some((each) => each.name === "repulsion"),
  );
  const best = Math.min(...field.candidates.flatMap((each) => (each.converged ? [each.aicc] : [])));
  const rows = field.candidates.map((candidate) => {
    const { name, parameters: found, p_value, aicc, weight, converged, reason } = candidate;
    const chosen = name === field.preferred;
    const head = `${CANDIDATE[name]}${chosen ? " (preferred)" : ""}`;
    if (!converged) {
      const none = { html: e(`no result: ${reason}`), span: 1 + rates.length };
      return { chosen, cells: [head, none, e(probability(p_value)), "–", "–"] };
    }
    // 1 µm²/ns is 10 cm²/s
    const motion = ["D", "D_xx", "D_xy", "D_yy"].flatMap((key) => {
      const text = numberOf(found[key], 10);
      return text === null ? [] : [key === "D" ? e(text) : `<sub>${key.slice(2)}</sub> ${e(text)}`];
    });
    const others = rates.map(([, key]) => e(numberOf(found[key]) ?? "–"));
    const behind = Number.isFinite(best) ? plain(Math.round(aicc - best)) : "–";
    const quality = [e(probability(p_value)), behind, weight.toFixed(2)];
    return { chosen, cells: [head, motion.join("<br>"), ...others, ...quality] };
  });
  const caption = "Candidates for the whole stack";
  const headings = ["D (cm²/s)", ...rates.map(([text]) => text), "p", "ΔAICc", "Weight"];
  const columns = [{ text: "Candidate" }, ...headings.map((text) => ({ text, numeric: true }))];
  return scroll(table(columns, rows, { caption, className: "candidates" }), caption);
}

function numberOf(parameter: Candidate["parameters"][string] | undefined, factor = 1): string | null {
  if (parameter === undefined) return null;
  const { value, u } = parameter;
  return u === null ? "not determined" : concise(factor * value, factor * u);
}

/** The preferred candidate's parameters, each with its interval and what it stands for. */
function parameters(field: Field): string {
  const row = (name: string, unit: string, given: Field["D"] | Field["k"]): { cells: string[] }[] => {
    if (given === null) return [];
    const { value, u } = given;
    const number = u === null ? "not determined" : `${concise(value, u)} ${unit}`.trimEnd();
    const ends = "interval95" in given ? given.interval95 : normalEnds(value, u);
    return [{ cells: [name, e(number), e(intervalText(ends, u))] }];
  };
  const rows = [
    ...row("diffusion coefficient D", "cm²/s", field.D),
    ...row("lifetime τ of free excitons", "ns", field.tau),
    ...row("diffusion length L", "µm", field.diffusion_length),
    ...row("annihilation k·n₀ at the centre right after the pulse", "1/ns", field.k_n0),
    ...row("annihilation k, by the stated density", "cm²/s", field.k),
    ...row("capture into traps c", "1/ns", field.capture),
    ...row("lifetime in traps", "ns", field.trap_lifetime),
    ...row("repulsion β = u₀n₀/k_BT at the centre right after the pulse", "", field.repulsion),
    ...row("blue shift u₀n₀ that β means", "meV", field.u0_n0),
    ...row("repulsion u₀, by the stated density", "µeV µm²", field.u0),
  ];
  const columns = [
    { text: "Parameter" },
    { text: "Value", numeric: true },
    { text: "95 % interval", numeric: true },
  ];
  const caption = `Preferred: ${CANDIDATE[field.preferred]}, counting uncertainties`;
  return scroll(table(columns, rows, { caption }), caption);
}

type Ends = Field["D"]["interval95"];

function normalEnds(value: number, u: number | null): Ends {
  return u === null ? [null, null] : [value - 1.96 * u, value + 1.96 * u];
}

function intervalText([low, high]: Ends, u: number | null): string {
  if (low === null) return high === null ? "not determined" : `< ${plain(high, 3)}`;
  return high === null ? `> ${plain(low, 3)}` : between(low, high, u ?? 0);
}

/** Names of parameters as a reader of the table knows them. */
const NAMES: Readonly<Record<string, string>> = {
  amplitude: "light",
  background: "background",
  s: "first width",
  s_xx: "first width along x",
  s_xy: "first tilt",
  s_yy: "first width along y",
  D_xx: "D along x",
  D_xy: "D_xy",
  D_yy: "D along y",
  tau: "τ",
  repulsion: "repulsion",
  k_n0: "k·n₀",
  capture: "c",
  trap_lifetime: "τ of traps",
  foot_share: "share of the foot",
  foot_ratio: "width of the foot",
};

function remarks(field: Field): string[] {
  const pairs = field.correlations.map(({ a, b, r }) => {
    return `${NAMES[a] ?? a} and ${NAMES[b] ?? b} (r = ${r.toFixed(2).replace("-", "−")})`;
  });
  return [
    ...startRemark(field),
    ...(field.capture === null
      ? []
      : ["Trapped excitons are taken to shine like free ones: τ and c rest on that, D and L do not."]),
    ...(pairs.length === 0
      ? []
      : [
          `Strongly correlated, so that an error in one goes with an error in the other: ${pairs.join(", ")}.`,
        ]),
  ];
}

/** What the spot starts as, where that is no Gaussian. */
function startRemark({ candidates, preferred }: Field): string[] {
  const { foot_share: share, foot_ratio: ratio } =
    candidates.find(({ name }) => name === preferred)?.parameters ?? {};
  if (share === undefined || ratio === undefined) return [];
  // ratio is of variances; more than all in the wide Gaussian leaves a dip for the narrow one
  return share.value > 1
    ? ["The spot starts with a flat top: all candidates begin with a wide Gaussian less a narrow one."]
    : [
        `The spot starts as a core on a foot: all candidates begin with two Gaussians, of which the wider, ${plain(Math.sqrt(ratio.value), 2)} times as wide, holds ${plain(100 * share.value, 2)} % of the excitons.`,
      ];
}
