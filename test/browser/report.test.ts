import { existsSync, mkdtempSync } from "node:fs";
import { tmpdir } from "node:os";
import { delimiter, join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it, vi } from "vitest";
import { writeReports } from "../../src/report/write.ts";
import { makeAnalysis } from "../report/fixture.ts";
import { makeClosure, withField } from "../report/fixture-field.ts";

/** The page in a real browser: Chromium from CHROMIUM, or the first of its usual names on PATH. */
function findChromium(): string {
  const names = ["chromium", "chromium-browser", "google-chrome"];
  const onPath = (process.env.PATH ?? "")
    .split(delimiter)
    .flatMap((folder) => names.map((name) => join(folder, name)));
  const found = [process.env.CHROMIUM ?? "", ...onPath].find((path) => path !== "" && existsSync(path));
  if (found === undefined) {
    throw new Error("no Chromium found: install it (apt-get install chromium) or set CHROMIUM to its path");
  }
  return found;
}

// a browser on a busy machine of two cores can take seconds to open a page
vi.setConfig({ testTimeout: 60_000 });

const FLAGS = [
  "--no-sandbox",
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];

let browser: Browser;
const addresses = { map: "", trace: "", whole: "", beside: "" };

beforeAll(async () => {
  const folder = mkdtempSync(join(tmpdir(), "gleamwalk-page-"));
  await writeReports(makeAnalysis("trapped"), join(folder, "map"));
  await writeReports(makeAnalysis("good", { kind: "trace", side: 120 }), join(folder, "trace"));
  const whole = withField("trapped");
  whole.result.closure = makeClosure();
  await writeReports(whole, join(folder, "whole"));
  await writeReports(withField("good", { adopted: false }), join(folder, "beside"));
  for (const name of ["whole", "beside"] as const)
    addresses[name] = pathToFileURL(join(folder, name, "report.html")).href;
  addresses.map = pathToFileURL(join(folder, "map/report.html")).href;
  addresses.trace = pathToFileURL(join(folder, "trace/report.html")).href;
  browser = await chromium.launch({ executablePath: findChromium(), headless: true, args: FLAGS });
}, 60_000);

afterAll(async () => {
  await browser?.close();
});

interface Visit {
  readonly page: Page;
  /** Console errors and warnings, and uncaught errors. */
  readonly complaints: string[];
  readonly requests: string[];
}

async function visit(address: string, size = { width: 1280, height: 900 }, script = true): Promise<Visit> {
  const context = await browser.newContext({ viewport: size, javaScriptEnabled: script });
  const page = await context.newPage();
  const complaints: string[] = [];
  const requests: string[] = [];
  page.on("console", (message) => {
    if (message.type() === "error" || message.type() === "warning") complaints.push(message.text());
  });
  page.on("pageerror", (error) => complaints.push(error.message));
  page.on("request", (request) => requests.push(request.url()));
  await page.goto(address);
  if (script) await page.locator("#viewer").waitFor({ state: "visible" });
  return { page, complaints, requests };
}

/** The pixels of a canvas, as one text to compare. */
function pixels(page: Page, id: string): Promise<string> {
  return page.evaluate((name) => (document.getElementById(name) as HTMLCanvasElement).toDataURL(), id);
}

function bytes(page: Page, id: string): Promise<number[]> {
  return page.evaluate((name) => {
    const canvas = document.getElementById(name) as HTMLCanvasElement;
    return [...(canvas.getContext("2d")?.getImageData(0, 0, canvas.width, canvas.height).data ?? [])];
  }, id);
}

describe.each([
  ["map", "map"],
  ["trace", "trace"],
  ["map with a whole-stack fit and closure", "whole"],
] as const)("the report of a %s in Chromium", (_, kind) => {
  it("opens without a complaint and asks for nothing but itself", async () => {
    const { page, complaints, requests } = await visit(addresses[kind]);
    for (const scheme of ["dark", "light"] as const) await page.emulateMedia({ colorScheme: scheme });
    await page.emulateMedia({ media: "print" });
    expect(complaints).toEqual([]);
    expect(requests.filter((url) => !url.startsWith("data:"))).toEqual([addresses[kind]]);
    await page.context().close();
  });

  it("is stepped through with the keyboard alone", async () => {
    const { page, complaints } = await visit(addresses[kind]);
    const slider = page.locator("#frame");
    const state = page.locator("#frame-text");
    for (let presses = 0; presses < 30; presses++) {
      await page.keyboard.press("Tab");
      if (await slider.evaluate((element) => element === document.activeElement)) break;
    }
    expect(await slider.evaluate((element) => getComputedStyle(element).outlineStyle)).toBe("solid");
    expect(await state.textContent()).toMatch(/^Frame 2 \(0 to 49\), 0 ns: used/);
    const before = {
      residual: await pixels(page, "residual"),
      cut: await page.locator("#cut-x").innerHTML(),
    };
    await page.keyboard.press("ArrowRight");
    expect(await state.textContent()).toMatch(/^Frame 3 \(0 to 49\), 0\.5 ns: used/);
    expect(await slider.getAttribute("aria-valuetext")).toBe(await state.textContent());
    expect(await page.locator("#cut-x").innerHTML()).not.toBe(before.cut);
    if (kind !== "trace") expect(await pixels(page, "residual")).not.toBe(before.residual);
    await page.keyboard.press("End");
    expect(await state.textContent()).toMatch(/^Frame 49 /);
    await page.keyboard.press("Home");
    expect(await state.textContent()).toMatch(
      kind === "whole"
        ? /^Frame 0 \(0 to 49\), −1 ns: set aside: before the pulse, spot fit failed; the whole-stack fit leaves it out$/
        : /^Frame 0 \(0 to 49\), −1 ns: set aside: before the pulse, spot fit failed; no spot was fitted$/,
    );
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it.each([1280, 390])("has no sideways scroll at %i px", async (width) => {
    const { page } = await visit(addresses[kind], { width, height: 844 });
    const beyond = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth);
    expect(beyond).toBeLessThanOrEqual(0);
    await page.context().close();
  });
});

describe("the viewer's pictures", () => {
  it("give residuals the scatter that counting gives: mean 0, standard deviation 1 where there is light", async () => {
    const { page } = await visit(addresses.map);
    const ramp = await bytes(page, "residual-bar");
    const place = new Map(Array.from({ length: 256 }, (_, i) => [ramp.slice(4 * i, 4 * i + 3).join(), i]));
    const canvas = await page.evaluate(() => {
      const element = document.getElementById("residual") as HTMLCanvasElement;
      return { width: element.width, height: element.height };
    });
    const data = await bytes(page, "residual");
    const values: number[] = [];
    for (let y = 0; y < canvas.height; y++) {
      for (let x = 0; x < canvas.width; x++) {
        const distance = Math.hypot(x - (canvas.width - 1) / 2, y - (canvas.height - 1) / 2);
        const at = 4 * (y * canvas.width + x);
        // within 2 σ of the spot (σ = 3.5 pixels), where every cell holds tens of photons
        if (distance < 6)
          values.push((8 * (place.get(data.slice(at, at + 3).join()) ?? Number.NaN)) / 255 - 4);
      }
    }
    const mean = values.reduce((a, b) => a + b, 0) / values.length;
    const sd = Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0) / (values.length - 1));
    // four standard errors of a mean and of a standard deviation of as many normal draws
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(values.length));
    expect(Math.abs(sd - 1)).toBeLessThan(4 / Math.sqrt(2 * values.length));
    await page.context().close();
  });

  it("keep one light scale for all frames where asked", async () => {
    const { page } = await visit(addresses.map);
    await page.locator("#same-scale").press("Space");
    const high = () => page.locator("#light-high").textContent();
    const first = await high();
    await page.locator("#frame").press("End");
    expect(await high()).toBe(first);
    await page.locator("#same-scale").press("Space");
    expect(await high()).not.toBe(first);
    await page.context().close();
  });
});

describe("the choice of the model", () => {
  /** Presses Tab until the radio button that is checked has the focus. */
  async function reach(page: Page): Promise<void> {
    for (let presses = 0; presses < 30; presses++) {
      await page.keyboard.press("Tab");
      const found = await page.evaluate(() => document.activeElement?.getAttribute("name") === "model");
      if (found) return;
    }
  }

  const shown = async (page: Page) => ({
    focus: await page.evaluate(() => document.activeElement?.id),
    model: await page.locator("#model-name").textContent(),
    pixels: [await pixels(page, "model"), await pixels(page, "residual"), await pixels(page, "sum-2")].join(),
    rms: Number((await page.locator("#sum-2-rms").textContent())?.replace("rms ", "")),
  });

  it("is made with the keyboard alone, stays over frames, and changes map, residual and what is left over", async () => {
    const { page, complaints } = await visit(addresses.whole);
    await reach(page);
    const whole = await shown(page);
    expect(whole).toMatchObject({ focus: "model-whole", model: "Model: whole stack" });
    expect(await page.evaluate(() => getComputedStyle(document.activeElement as Element).outlineStyle)).toBe(
      "solid",
    );
    await page.keyboard.press("ArrowLeft");
    const spot = await shown(page);
    expect(spot).toMatchObject({ focus: "model-spot", model: "Model: each frame's spot" });
    expect(spot.pixels).not.toBe(whole.pixels);
    // the recording was drawn from these spots: their residuals are chance, and those of another light are not
    expect(Math.abs(spot.rms - 1)).toBeLessThan(0.2);
    expect(whole.rms).toBeGreaterThan(3);
    await page.locator("#frame").press("End");
    await page.locator("#frame").press("Home");
    expect(await page.locator("#frame-text").textContent()).toMatch(/no spot was fitted$/);
    await page.locator("#model-spot").press("ArrowRight");
    expect(await page.locator("#frame-text").textContent()).toMatch(/the whole-stack fit leaves it out$/);
    expect(complaints).toEqual([]);
    await page.context().close();
  });

  it("begins with each frame's spot where the headline comes from the widths", async () => {
    const { page } = await visit(addresses.beside);
    expect(await page.locator("#model-spot").isChecked()).toBe(true);
    expect(await page.locator("#model-name").textContent()).toBe("Model: each frame's spot");
    expect(await page.locator("fieldset.choice legend").textContent()).toBe("Model");
    expect(await page.locator("label:has(#model-whole)").textContent()).toContain(
      "whole stack (diffusion and annihilation)",
    );
    await page.context().close();
  });

  it("is not offered where no whole-stack fit was made", async () => {
    const { page } = await visit(addresses.map);
    expect(await page.locator('input[name="model"]').count()).toBe(0);
    expect(await page.locator("#model-name").textContent()).toBe("Model");
    await page.context().close();
  });
});

describe("what the model leaves over", () => {
  it("is chance where the model is right: an rms near 1 early, in the middle and late", async () => {
    const { page } = await visit(addresses.map);
    for (const [i, reach] of [
      [0, "0 to 2 ns, 5 frames"],
      [1, "2.5 to 4.5 ns, 5 frames"],
      [2, "5 to 7 ns, 5 frames"],
    ] as const) {
      expect(await page.locator(`#sum-${i}-text`).textContent()).toBe(reach);
      const rms = Number((await page.locator(`#sum-${i}-rms`).textContent())?.replace("rms ", ""));
      // some hundred cells hold light enough: four standard errors of an rms are 4/√200
      expect(Math.abs(rms - 1)).toBeLessThan(4 / Math.sqrt(200));
    }
    await page.context().close();
  });

  it("is one map over all delays on a trace", async () => {
    const { page } = await visit(addresses.trace);
    expect(await page.locator("#sum-0-text").textContent()).toBe("0 to 20 ns, 41 frames");
    expect(await page.locator(".sums canvas").count()).toBe(1);
    const size = await page.evaluate(() => (document.getElementById("sum-0") as HTMLCanvasElement).height);
    expect(size).toBe(24);
    await page.context().close();
  });
});

describe("the report without scripts", () => {
  it("still shows verdict, numbers and figures, and says where the frames are", async () => {
    const { page, requests } = await visit(addresses.map, { width: 1280, height: 900 }, false);
    expect(await page.locator("#viewer").isVisible()).toBe(false);
    expect(await page.locator("noscript").textContent()).toContain("The frame viewer needs scripts");
    expect(await page.locator("svg.figure").count()).toBe(3);
    expect(requests.filter((url) => !url.startsWith("data:"))).toEqual([addresses.map]);
    await page.context().close();
  });
});
