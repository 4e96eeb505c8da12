import { deflateSync } from "node:zlib";
import { parseHTML } from "linkedom";
import { describe, expect, it } from "vitest";
import type { Analysis } from "../../src/outcome/analysis.ts";
import { renderFigures } from "../../src/report/figures.ts";
import { renderReport } from "../../src/report/html.ts";
import { methodsText } from "../../src/report/methods.ts";
import { viewerData } from "../../src/report/viewer-data.ts";
import { makeAnalysis } from "./fixture.ts";

async function report(analysis: Analysis): Promise<string> {
  const viewer = viewerData(analysis, (bytes) => deflateSync(bytes).toString("base64"));
  return renderReport(analysis, await renderFigures(analysis), viewer);
}

const good = makeAnalysis("good");
const html = await report(good);
const { document } = parseHTML(html);

describe("renderReport", () => {
  it("fetches nothing: no address apart from the name of SVG, and a policy that forbids it", () => {
    expect(html.replaceAll("http://www.w3.org/2000/svg", "")).not.toMatch(/https?:\/\//);
    expect(html).not.toMatch(/<(link|script|img|iframe)[^>]+(src|href)="(?!data:)/);
    expect(html).toContain(`http-equiv="Content-Security-Policy" content="default-src 'none';`);
  });

  it("opens with the verdict in words, then the four numbers", () => {
    const text = (document.querySelector("main > section")?.textContent ?? "").replace(/\s+/g, " ");
    expect(text).toMatch(
      /^ ?✓ Sound No check speaks against these numbers\. Diffusion coefficient D 0\.512\(34\) cm²\/s 95 %: 0\.445 to 0\.579/,
    );
    for (const number of ["8.21(13) ns", "0.648(22) µm", "20.1(1.3) cm²/(V s)"])
      expect(text).toContain(number);
  });

  it("shows what is text to the user as text, whatever it holds", async () => {
    const analysis = makeAnalysis("good", { file: `<img src=x onerror="alert(1)">&'.tif` });
    analysis.result.acquisition["sample.name"] = { text: "</script><img src=x>", from: "acquisition file" };
    const hostile = await report(analysis);
    expect(hostile).not.toContain("<img");
    expect(hostile.split("</script>")).toHaveLength(html.split("</script>").length);
    expect(parseHTML(hostile).document.querySelector("h1")?.textContent).toBe(analysis.result.input.file);
    expect(document.body.textContent).toContain("Alder <bath 2>");
  });

  it("makes sentences of findings, and heads the page with the file's name alone", async () => {
    const analysis = makeAnalysis("good", { file: "D:\\lab\\june/alder.tif" });
    analysis.result.verdict.reasons[0] = {
      code: "spot-drifts",
      level: "note",
      text: "the spot drifts",
      advice: "none",
    };
    const page = parseHTML(await report(analysis)).document;
    expect(page.querySelector("h1")?.textContent).toBe("alder.tif");
    expect(page.querySelector(".reasons")?.textContent).toMatch(
      /Spot drifts\s*note\s*The spot drifts\.\s*None\./,
    );
    expect(page.querySelector("footer")?.textContent).toContain("D:\\lab\\june/alder.tif");
  });

  it("lists every setting with where it came from", () => {
    const text = document.body.textContent ?? "";
    for (const [key, setting] of Object.entries(good.result.acquisition)) {
      expect(text).toContain(key);
      expect(text).toContain(setting.from);
    }
  });

  it("has every frame in a table, and each law tried with its weight", () => {
    expect(document.querySelectorAll(".frames-table tbody tr")).toHaveLength(good.result.frames.length);
    expect(document.body.textContent).toContain("straight line (preferred)");
    expect(document.body.textContent).toContain("√(4Dτ)");
  });

  it("gives every control a name and every heading level its order", () => {
    expect(document.querySelector('label[for="frame"]')?.textContent).toContain("50 frames");
    for (const button of document.querySelectorAll("button"))
      expect(button.getAttribute("aria-label")).toMatch(/frame$/);
    const levels = [...document.querySelectorAll("h1, h2, h3")].map((heading) => Number(heading.tagName[1]));
    expect(levels[0]).toBe(1);
    for (const [i, level] of levels.entries())
      expect(level - (levels[i - 1] ?? level)).toBeLessThanOrEqual(1);
    const ids = [...document.querySelectorAll("[id]")].map((element) => element.id);
    expect(new Set(ids).size).toBe(ids.length);
  });

  it("says what is doubtful and what to do, beside the word for its weight", async () => {
    const text =
      parseHTML(await report(makeAnalysis("trapped"))).document.querySelector("main > section")
        ?.textContent ?? "";
    expect(text).toContain("Unsound");
    expect(text).toMatch(/Trap limited\s*unsound\s*The spot stops growing/);
    expect(text).toContain("Quote D of the early window");
  });

  it("holds no NaN or undefined in what is read, in any case", async () => {
    for (const analysis of [makeAnalysis("still"), makeAnalysis("trapped", { kind: "trace", side: 90 })]) {
      const page = parseHTML(await report(analysis)).document;
      for (const script of page.querySelectorAll("script, style")) script.remove();
      expect(page.body.textContent).not.toMatch(/NaN|undefined|Infinity|\[object/);
    }
  });
});

describe("methodsText", () => {
  it("states model, estimator, window, formulas and version", () => {
    const text = methodsText(good).join("\n");
    expect(text).toContain("two-dimensional Gaussian");
    expect(text).toContain(
      "maximum likelihood for the camera's noise (variance 2·gain·signal + (6 counts)², gain 8 counts per photon",
    );
    expect(text).toContain("from 0 to 20 ns (41 frames)");
    expect(text).toContain("Σ = Σ₀ + 2Dt");
    expect(text).toContain("N = N₀ exp(−t/τ), averaged over the gate of 0.25 ns;");
    expect(text).toContain("D = 0.512(34) cm²/s");
    expect(text).toContain("μ = eD/(k_B\u00a0T) at T = 295.0(2.0) K");
    expect(text).toContain("gleamwalk 0.1.0");
  });

  it("claims no mobility and no length that were not given", () => {
    const text = methodsText(makeAnalysis("still")).join("\n");
    expect(text).not.toContain("mobility");
    expect(text).toContain("L < 0.21 µm");
  });
});
