import { parseHTML } from "linkedom";
import { describe, expect, it } from "vitest";
import type { Result } from "../../src/outcome/result.ts";
import { closureFinding, closureTexts } from "../../src/report/closure-text.ts";
import { candidateTables } from "../../src/report/field-tables.ts";
import { closureTable } from "../../src/report/page-tables.ts";
import { fieldText } from "../../src/report/terminal.ts";
import { makeAnalysis } from "./fixture.ts";
import { makeClosure, makeField } from "./fixture-field.ts";

function resultWith(change: Parameters<typeof makeField>[0] = {}): Result {
  const { result } = makeAnalysis("good");
  result.field = makeField(change);
  return result;
}

const pageOf = (parts: readonly string[]) =>
  parseHTML(`<html><body>${parts.join("\n")}</body></html>`).document;

/** The texts of a table's cells by row. */
function rowsOf(table: Element | null | undefined): string[][] {
  return [...(table?.querySelectorAll("tr") ?? [])].map((row) =>
    [...row.querySelectorAll("th, td")].map((cell) => (cell.textContent ?? "").trim()),
  );
}

describe("the candidates of the whole-stack fit", () => {
  const page = pageOf(candidateTables(resultWith()));
  const rows = rowsOf(page.querySelector(".candidates"));

  it("stand side by side with D in cm²/s, rates, fit quality and weight (1 µm²/ns is 10 cm²/s)", () => {
    expect(rows[0]).toEqual([
      "Candidate",
      "D (cm²/s)",
      "τ (ns)",
      "k·n₀ (1/ns)",
      "c (1/ns)",
      "τ of traps (ns)",
      "p",
      "ΔAICc",
      "Weight",
    ]);
    expect(rows[1]).toEqual([
      "diffusion",
      "0.560(10)",
      "4.740(80)",
      "–",
      "–",
      "–",
      "< 0.001",
      "27500",
      "0.00",
    ]);
  });

  it("mark the preferred one in words and in weight of type", () => {
    expect(page.querySelectorAll(".candidates tr.chosen")).toHaveLength(1);
    expect(page.querySelector("tr.chosen")?.textContent).toMatch(
      /^diffusion and annihilation \(preferred\)0\.5000\(30\)6\.030\(11\)0\.8070\(60\)––0\.1300\.90$/,
    );
  });

  it("that the data do not determine give no numbers but say so", () => {
    expect(rows[3]).toEqual([
      "diffusion and capture into traps",
      "no result: the data do not determine every parameter",
      "< 0.001",
      "–",
      "–",
    ]);
    const span = page.querySelector(".candidates td[colspan]")?.getAttribute("colspan");
    expect(Number(span) + 4).toBe(rows[0]?.length);
  });

  it("show the components of a tensor one by one", () => {
    expect(rows[4]?.slice(1, 3)).toEqual(["xx 0.5120(40)xy −0.0210(20)yy 0.4880(40)", "6.10(10)"]);
    expect(rows[4]?.slice(-2)).toEqual(["4", "0.10"]);
  });

  it("gain a column of β only where repulsion is one of them", () => {
    const { candidates } = makeField();
    const beta = { value: 0.42, u: 0.05, unit: "1" };
    const last = { ...candidates[0]!, name: "repulsion" as const };
    const repelled = { ...last, parameters: { ...last.parameters, repulsion: beta } };
    const table = rowsOf(
      pageOf(candidateTables(resultWith({ candidates: [...candidates, repelled] }))).querySelector(
        ".candidates",
      ),
    );
    expect(table[0]).toContain("β");
    expect(table[5]).toContain("0.420(50)");
    expect(rows[0]).not.toContain("β");
  });

  it("are no table where no whole-stack fit was made", () => {
    expect(candidateTables(makeAnalysis("good").result)).toEqual([]);
  });
});

describe("the preferred candidate's parameters", () => {
  it("stand with their 95 % intervals, an open end as a limit", () => {
    const page = pageOf(
      candidateTables(
        resultWith({
          capture: { value: 0.02, u: 0.03, interval95: [null, 0.0712], interval_from: "profile" },
          trap_lifetime: { value: 90, u: null, interval95: [41.2, null], interval_from: "profile" },
        }),
      ),
    );
    const rows = rowsOf([...page.querySelectorAll("table")].at(-1));
    expect(rows).toContainEqual(["diffusion coefficient D", "0.5000(30) cm²/s", "0.4941 to 0.5059"]);
    expect(rows).toContainEqual(["capture into traps c", "0.020(30) 1/ns", "< 0.0712"]);
    expect(rows).toContainEqual(["lifetime in traps", "not determined", "> 41.2"]);
  });

  it("say what the spot starts as where that is no Gaussian: 2.25 times the variance is 1.5 times as wide", () => {
    const start = (share: number) => {
      const { candidates } = makeField();
      const extra = {
        foot_share: { value: share, u: 0.01, unit: "1" },
        foot_ratio: { value: 2.25, u: 0.1, unit: "1" },
      };
      const footed = candidates.map((each) => ({ ...each, parameters: { ...each.parameters, ...extra } }));
      return pageOf(candidateTables(resultWith({ candidates: footed }))).body.textContent;
    };
    expect(start(0.291)).toContain("the wider, 1.5 times as wide, holds 29 % of the excitons");
    expect(start(1.3)).toContain("starts with a flat top");
    expect(pageOf(candidateTables(resultWith())).body.textContent).not.toContain("starts");
  });

  it("name strong correlations by what the tables call the parameters", () => {
    const text = pageOf(candidateTables(resultWith())).body.textContent;
    expect(text).toContain("light and k·n₀ (r = 0.87), τ and k·n₀ (r = −0.81)");
  });

  it.each([
    ["come from the preferred candidate", { adopted: true }, []],
    ["come from the widths; the preferred candidate", { adopted: false }, []],
    ["No candidate describes the recording", { adopted: false }, ["no-model-fits"]],
  ] as const)("say where the headline comes from: …%s…", (text, change, codes) => {
    const result = resultWith(change);
    result.verdict.reasons = codes.map((code) => ({ code, level: "unsound", text: "", advice: "" }));
    expect(candidateTables(result)[0]).toContain(text);
  });
});

describe("fieldText", () => {
  const read = (change: Parameters<typeof makeField>[0]) =>
    fieldText(makeField(change)).replaceAll("\u00a0", " ");

  it("gives model, D, rates and p in one line", () => {
    expect(read({})).toBe(
      "diffusion and annihilation; D = 0.5000(30) cm²/s, k·n₀ = 0.8070(60) /ns; p = 0.13",
    );
  });

  it("writes a small p and a limit without an equals sign", () => {
    const capture = { value: 0.02, u: 0.03, interval95: [null, 0.0712], interval_from: "profile" } as const;
    expect(read({ p_value: 1e-7, k_n0: null, capture: { ...capture, interval95: [null, 0.0712] } })).toBe(
      "diffusion and annihilation; D = 0.5000(30) cm²/s, c at most 0.0712 /ns (95 %, not determined from below); p < 0.001",
    );
  });

  it("breaks no line between a number and its name or unit", () => {
    for (const part of ["D = 0.5000(30) cm²/s", "k·n₀ = 0.8070(60) /ns"])
      expect(fieldText(makeField())).toContain(part.replaceAll(" ", "\u00a0"));
  });
});

describe("closure", () => {
  it("stands in the terminal as bias in u and coverage with its counting error", () => {
    expect(closureTexts(makeClosure())).toEqual([
      "98 of 100 stacks drawn from the fitted model, seed 1; 1 could not be analysed",
      "D: bias −0.11(10) u, 95 % interval holds in 94 ± 2 %",
      "L: 95 % interval holds in 96 ± 2 % (98 upper limits)",
    ]);
  });

  it("says whether the intervals hold, and which does not (3 counting errors: 0.06 of 98 stacks)", () => {
    const closure = makeClosure();
    expect(closureFinding(closure)).toBe(
      "The 95 % intervals hold as often as they should, within counting error.",
    );
    closure.quantities.diffusion_coefficient!.coverage = 0.84;
    expect(closureFinding(closure)).toBe(
      "Not every 95 % interval is right for this recording: the one of D is too small, it holds in 84 %.",
    );
  });

  it("stands in the report as a table, with a dash for what there is not", () => {
    const rows = rowsOf(pageOf([closureTable(makeClosure())]).querySelector("table"));
    expect(rows[1]).toEqual([
      "Diffusion coefficient (cm²/s)",
      "0.5",
      "−0.0011",
      "−0.11(10)",
      "1.02",
      "94.0 % ± 2.2 %",
      "0",
    ]);
    expect(rows[2]).toEqual(["Diffusion length (µm)", "0.456", "–", "–", "–", "96.0 % ± 2.2 %", "98"]);
  });
});
