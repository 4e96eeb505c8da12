import { XMLParser, XMLValidator } from "fast-xml-parser";
import { describe, expect, it } from "vitest";
import { decadeText } from "../../src/report/figure-light.ts";
import { type Figures, renderFigures } from "../../src/report/figures.ts";
import { makeAnalysis } from "./fixture.ts";

const good = makeAnalysis("good");
const trapped = makeAnalysis("trapped");
const figures = { good: await renderFigures(good), trapped: await renderFigures(trapped) };
const NAMES = ["spread", "light", "profiles"] as const satisfies readonly (keyof Figures)[];

/** Every element of one name, with its attributes, in the order of the text. */
function elements(svg: string, name: string): Record<string, string>[] {
  return [...svg.matchAll(new RegExp(`<${name}\\b([^>]*)>`, "g"))].map((match) =>
    Object.fromEntries(
      [...(match[1] ?? "").matchAll(/([\w:-]+)="([^"]*)"/g)].map((pair) => [pair[1], pair[2]]),
    ),
  );
}

describe.each(NAMES)("figure %s", (name) => {
  const svg = figures.good[name];

  it("is a well-formed SVG file with its own namespace and size", () => {
    expect(XMLValidator.validate(svg)).toBe(true);
    expect(svg.startsWith('<svg xmlns="http://www.w3.org/2000/svg"')).toBe(true);
    const root = new XMLParser({ ignoreAttributes: false, attributeNamePrefix: "" }).parse(svg).svg;
    expect(root.viewBox).toBe(`0 0 ${root.width} ${root.height}`);
  });

  it("refers to nothing outside itself", () => {
    expect(svg.replaceAll("http://www.w3.org/2000/svg", "")).not.toMatch(
      /https?:|url\((?!#)|<style|<script|@import/,
    );
  });

  it("says in words what it shows, and holds no number that is not one", () => {
    expect(svg).toMatch(
      /<title id="\w+-title">.+alder\.tif<\/title><desc id="\w+-description">.{60,}<\/desc>/,
    );
    expect(svg).not.toMatch(/NaN|undefined|Infinity/);
  });
});

describe("spread figure", () => {
  const dots = elements(figures.good.spread, "circle").filter((circle) => circle.r === "2.6");

  it("has a dot for every frame used", () => {
    expect(dots).toHaveLength(good.result.transport.window.frames);
  });

  it("puts variance upwards in proportion: three dots lie as their values do", () => {
    const used = good.result.frames.filter((row) => row.used);
    const value = (i: number) => used[i]?.variance_um2 ?? 0;
    const height = (i: number) => Number(dots[i]?.cy);
    expect((height(20) - height(0)) / (height(40) - height(0))).toBeCloseTo(
      (value(20) - value(0)) / (value(40) - value(0)),
      6,
    );
    expect(height(40)).toBeLessThan(height(0));
  });

  it("names each reason for setting frames aside beside its symbol", () => {
    expect(figures.good.spread).toContain(">too dim</text>");
    expect(figures.trapped.spread).toContain(">trap-dominated</text>");
    expect(figures.trapped.spread).toContain("Set aside: 33 trap-dominated, 2 before-pulse.");
  });
});

describe("light figure", () => {
  it("shows a residual for every frame in the decay", () => {
    const count = good.lightResiduals.filter((residual) => residual !== null).length;
    expect(elements(figures.good.light, "circle").filter((circle) => circle.r === "2.4")).toHaveLength(count);
  });

  it("is not flattened by a frame with hardly any light, which is counted at the edge instead", async () => {
    const frames = good.result.frames.map((row) =>
      row.index === 0 ? { ...row, photons: 0.3, u_photons: 1 } : row,
    );
    const { light } = await renderFigures({ ...good, result: { ...good.result, frames } });
    expect(light).toContain(">1 below the axis</text>");
    expect(light).not.toContain(">10⁰<");
  });

  it("labels whole decades, and 2 and 5 where there are fewer than two of them", () => {
    expect(decadeText(1000, [50, 5000])).toBe("10³");
    expect(decadeText(2000, [50, 5000])).toBe("");
    expect(decadeText(2000, [500, 5000])).toBe("2×10³");
    expect(decadeText(3000, [500, 5000])).toBe("");
  });
});

describe("a recording of which little is known", () => {
  it("is drawn without a decay, a curve or a spot", async () => {
    const { result } = good;
    const bare = {
      ...good,
      spots: good.spots.map(() => null),
      spreadCurve: [],
      lightCurve: [],
      lightResiduals: good.lightResiduals.map(() => null),
      result: {
        ...result,
        decay: null,
        frames: result.frames.map((row) => ({ ...row, variance_um2: null, photons: null, used: false })),
      },
    };
    const drawn = await renderFigures(bare);
    for (const name of NAMES) {
      expect(XMLValidator.validate(drawn[name])).toBe(true);
      expect(drawn[name]).not.toMatch(/NaN|undefined|Infinity/);
    }
  });
});
