import { describe, expect, it } from "vitest";
import { renderTerminal, wrap } from "../../src/report/terminal.ts";
import { makeAnalysis } from "./fixture.ts";

const CASES = ["good", "trapped", "still"] as const;

describe("renderTerminal", () => {
  it("opens with the verdict, then the four numbers, then how they were found", () => {
    expect(
      renderTerminal(makeAnalysis("good"), { colour: false, report: "alder.gleamwalk/report.html" }),
    ).toMatchInlineSnapshot(`
      "alder.tif, 50 × 72 × 72 (TYX)
      ✓ SOUND. No check speaks against these numbers.

        D  0.512(34) cm²/s           95 %: 0.445 to 0.579       straight line
        τ  8.21(13) ns               95 %: 7.96 to 8.46         decay of the light
        L  0.648(22) µm              95 %: 0.605 to 0.691       D and the decay
        μ  20.1(1.3) cm²/(V s)       95 %: 17.5 to 22.8         D and temperature

      Window         0 to 20 ns, 41 frames used
      Law of spread  straight line, weight 0.72 among 3 laws; χ²/dof = 1.04 (p = 0.41,
                     39 dof); runs test p = 0.37
                     exponent α = 1.020(60)
      Law of decay   one exponential, weight 0.70 among 2 laws; χ²/dof = 1.02
                     (p = 0.41, 40 dof)
      Set aside      9 of 50 frames: 7 too dim, 2 before the pulse

      · spot-cut-off: In the last 4 frames used, 2 % of the spot lies outside the
        picture.
        → Nothing to do: the fit accounts for it.

      Report         alder.gleamwalk/report.html
      "
    `);
  });

  it("names what is wrong with a doubtful recording, and what to do", () => {
    expect(renderTerminal(makeAnalysis("trapped"), { colour: false })).toMatchInlineSnapshot(`
      "birch.tif, 50 × 72 × 72 (TYX)
      ✕ UNSOUND. Do not quote these numbers: the recording does not support them.

        D  0.610(52) cm²/s           95 %: 0.508 to 0.712       law of arrest
        τ  8.21(13) ns               95 %: 7.96 to 8.46         decay of the light
        L  0.648(22) µm              95 %: 0.605 to 0.691       D and the decay
        μ  24.0(1.3) cm²/(V s)       95 %: 21.4 to 26.6         D and temperature

      Window         0 to 7 ns, 15 frames used
      Law of spread  law of arrest, weight 0.86 among 3 laws; χ²/dof = 1.12 (p = 0.41,
                     12 dof); runs test p = 0.37; uncertainties widened by 1.23
                     (Birge)
                     exponent α = 0.620(60)
      Law of decay   two exponentials, weight 0.97 among 2 laws; χ²/dof = 1.03
                     (p = 0.41, 38 dof)
      Set aside      35 of 50 frames: 33 trap-dominated, 2 before the pulse

      ✕ trap-limited: The spot stops growing after about 4 ns while the decay slows
        from 4 ns to 25 ns: most of the late light comes from excitons that no longer
        move.
        → Quote D of the early window (0 to 7 ns) together with the arrest time, and
          measure at another temperature: traps freeze in when cold.
      ! line-does-not-fit: A straight line leaves χ²/dof = 2.60 (p < 0.001).
        → Use the arrest law's initial slope, as printed here.
      "
    `);
  });

  it("gives limits where nothing moved, and says why a number is missing", () => {
    expect(renderTerminal(makeAnalysis("still"), { colour: false })).toMatchInlineSnapshot(`
      "still.tif, 50 × 72 × 72 (TYX)
      ! CAUTION. Quote these numbers only with the reservations below.

        D  0.004(11) cm²/s           95 %: −0.017 to 0.025      straight line
        τ  8.21(13) ns               95 %: 7.96 to 8.46         decay of the light
        L  < 0.21 µm                 95 % upper limit           D and the decay
        μ  not given: no sample.temperature stated

      Window         0 to 14 ns, 29 frames used
      Law of spread  straight line, weight 0.72 among 3 laws; χ²/dof = 1.04 (p = 0.41,
                     27 dof); runs test p = 0.37
                     exponent α = 1.020(60)
      Law of decay   one exponential, weight 0.70 among 2 laws; χ²/dof = 1.02
                     (p = 0.41, 40 dof)
      Set aside      21 of 50 frames: 19 too dim, 2 before the pulse

      ! no-motion-detected: D is 0.004(11) cm²/s, consistent with zero.
        → Quote the upper limits. To see more, use a smaller spot or collect more
          light at late delays.
      "
    `);
  });

  it.each(CASES)("stays within 80 columns, and within 60 where asked (%s)", (name) => {
    const analysis = makeAnalysis(name, {
      file: "a-rather-long-name-of-a-recording-of-june-2.tif",
    });
    const longest = (width?: number) =>
      Math.max(
        ...renderTerminal(analysis, { colour: false, ...(width === undefined ? {} : { width }) })
          .split("\n")
          .map((line) => line.length),
      );
    expect(longest()).toBeLessThanOrEqual(80);
    expect(longest(60)).toBeLessThanOrEqual(60);
  });

  it.each(CASES)("says the same in colour as without (%s)", (name) => {
    const analysis = makeAnalysis(name);
    const coloured = renderTerminal(analysis, { colour: true });
    const control = String.fromCharCode(27);
    expect(coloured).toContain(`${control}[1;`);
    expect(coloured.replace(new RegExp(`${control}\\[[\\d;]*m`, "g"), "")).toBe(
      renderTerminal(analysis, { colour: false }),
    );
  });

  it("counts every frame set aside once", () => {
    const text = renderTerminal(makeAnalysis("trapped"), { colour: false });
    expect(text).toContain("35 of 50 frames: 33 trap-dominated, 2 before the pulse");
  });
});

describe("wrap", () => {
  it("breaks at spaces, hangs later lines, and leaves a word that is too long whole", () => {
    expect(wrap("one two three", 8, "  ")).toEqual(["one two", "  three"]);
    expect(wrap("extraordinarily", 8, "")).toEqual(["extraordinarily"]);
    expect(wrap("a extraordinarily", 8, "  ")).toEqual(["a", "  extraordinarily"]);
  });
});
