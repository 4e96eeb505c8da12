import { describe, expect, it } from "vitest";
import type { Result } from "../../src/outcome/result.ts";
import { fieldUncertaintyText, rangedText, startText } from "../../src/report/ranged-text.ts";

type Field = NonNullable<Result["field"]>;
const of = (
  u: number | null,
  interval95: Field["D"]["interval95"],
  interval_from: Field["D"]["interval_from"] = "profile",
): Field["D"] => ({ value: 0.02, u, interval95, interval_from });

describe("rangedText", () => {
  it("gives value and uncertainty, and the interval where it is lopsided", () => {
    expect(rangedText(of(0.003, [0.0141, 0.0259], "covariance"), "/ns")).toBe("0.0200(30) /ns");
    expect(rangedText(of(0.003, [0.01412, 0.02734]), "/ns")).toBe(
      "0.0200(30) /ns (95 %: 0.0141 to 0.0273 /ns)",
    );
  });

  it("gives a limit where the data set one end only, and says which they do not", () => {
    expect(rangedText(of(0.01, [0.012, null]), "ns")).toBe(
      "at least 0.012 ns (95 %, not determined from above)",
    );
    expect(rangedText(of(0.01, [null, 0.05]), "/ns")).toBe(
      "at most 0.05 /ns (95 %, not determined from below)",
    );
    expect(rangedText(of(0.01, [null, null]), "/ns")).toBe("0.02 /ns (not determined from below or above)");
  });

  it("gives a value without uncertainty as not determined", () => {
    expect(rangedText(of(null, [null, null]), "/ns")).toBe("0.02 /ns (not determined)");
  });
});

describe("fieldUncertaintyText", () => {
  const field = {
    D: of(0.001, [0.018, 0.022], "covariance"),
    tau: of(0.1, [1, 2], "covariance"),
    k_n0: null,
    capture: of(0.003, [0.01, 0.03]),
    trap_lifetime: null,
    chi2: 50,
    degrees_of_freedom: 50,
  } as unknown as Field;

  it("names the intervals that are the likelihood's profile", () => {
    expect(fieldUncertaintyText(field)).toMatch(
      /inverse Fisher matrix\. The 95 % interval of the rate of capture is where .* by no more than 3\.84 \(profile/,
    );
  });

  it("says by what the uncertainties were widened, the candidates' by their own factor", () => {
    // √(200/50)
    const text = fieldUncertaintyText({ ...field, chi2: 200 });
    expect(text).toContain("widened by √(χ²/dof) = 2.00 (Birge), as each candidate's by its own");
    expect(text).toContain("3.84 times the square of that factor");
  });

  it("says that there are none where the data do not determine the fit", () => {
    expect(fieldUncertaintyText({ ...field, D: of(null, [null, null]) })).toContain("no uncertainties");
  });
});

describe("startText", () => {
  const starting = (parameters: Record<string, { value: number; u: number | null; unit: string }>): Field =>
    ({ preferred: "diffusion", candidates: [{ name: "diffusion", parameters }] }) as unknown as Field;

  it("describes a start of two Gaussians, and says nothing of one", () => {
    expect(startText(starting({}))).toBe("");
    const text = startText(
      starting({
        foot_share: { value: 0.1, u: 0.002, unit: "1" },
        foot_ratio: { value: 9, u: null, unit: "1" },
      }),
    );
    expect(text).toContain("the wider one with 9 times the variance and 0.1000(20) of the excitons. ");
    const flat = starting({
      foot_share: { value: 1.3, u: 0.02, unit: "1" },
      foot_ratio: { value: 2, u: 0.1, unit: "1" },
    });
    expect(startText(flat)).toContain("the narrower one taken off it");
  });
});
