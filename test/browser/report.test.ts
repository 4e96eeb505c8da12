import { existsSync, mkdtempSync } from "node:fs";
import { tmpdir } from "node:os";
import { delimiter, join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it, vi } from "vitest";
import { writeReports } from "../../src/report/write.ts";
import { makeAnalysis } from "../report/fixture.ts";

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
const addresses = { map: "", trace: "" };

beforeAll(async () => {
  const folder = mkdtempSync(join(tmpdir(), "gleamwalk-page-"));
  await writeReports(makeAnalysis("trapped"), join(folder, "map"));
  await writeReports(makeAnalysis("good", { kind: "trace", side: 120 }), join(folder, "trace"));
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

describe.each(["map", "trace"] as const)("the report of a %s in Chromium", (kind) => {
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
    if (kind === "map") expect(await pixels(page, "residual")).not.toBe(before.residual);
    await page.keyboard.press("End");
    expect(await state.textContent()).toMatch(/^Frame 49 /);
    await page.keyboard.press("Home");
    expect(await state.textContent()).toMatch(
      /^Frame 0 \(0 to 49\), −1 ns: set aside: before the pulse, spot fit failed; no spot was fitted$/,
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
