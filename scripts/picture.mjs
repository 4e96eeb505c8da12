// The README's picture: the top of a report as a PNG. Needs Chromium (on PATH, or CHROMIUM).
//   node scripts/picture.mjs REPORT.html PICTURE.png [height]
import { existsSync } from "node:fs";
import { delimiter, join, resolve } from "node:path";
import { pathToFileURL } from "node:url";
import { chromium } from "playwright-core";

const [report, picture, height = "960"] = process.argv.slice(2);
if (report === undefined || picture === undefined) {
  console.error("usage: node scripts/picture.mjs REPORT.html PICTURE.png [height]");
  process.exit(2);
}

const candidates = [
  process.env.CHROMIUM ?? "",
  ...(process.env.PATH ?? "").split(delimiter).map((folder) => join(folder, "chromium")),
];
const executablePath = candidates.find((path) => path !== "" && existsSync(path));
if (executablePath === undefined) {
  console.error("no Chromium found: install it (apt-get install chromium) or set CHROMIUM to its path");
  process.exit(2);
}

const browser = await chromium.launch({
  executablePath,
  args: [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--disable-background-networking",
    "--disable-sync",
  ],
});
try {
  const page = await browser.newPage({
    viewport: { width: 1120, height: Number(height) },
    colorScheme: "light",
  });
  await page.goto(pathToFileURL(resolve(report)).href);
  await page.locator("#viewer").waitFor({ state: "visible" });
  await page.screenshot({ path: picture });
} finally {
  await browser.close();
}
