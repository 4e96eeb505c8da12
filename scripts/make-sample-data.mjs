// Writes sample-data/ from sample-data/scenarios/*.toml with the built library: npm run build first.
// Each scenario gives NAME.tif, its acquisition file NAME.toml and its truth NAME.truth.json; alder-cut is the first
// half of a good file, as an interrupted copy leaves it.
import { mkdir, readdir, readFile, writeFile } from "node:fs/promises";
import { basename, join } from "node:path";
import { fileURLToPath } from "node:url";
import { deflateSync } from "node:zlib";
import { readScenario } from "../dist/field/scenario.js";
import { picturesOf, synthesise } from "../dist/field/synthesise.js";
import { writeTiff } from "../dist/stack/tiff/write.js";

const folder = fileURLToPath(new URL("../sample-data/", import.meta.url));
const deflate = (bytes) => deflateSync(bytes, { level: 9 });
/** Digits beyond these are of no use to a reader. */
const shorter = (_, value) => (typeof value === "number" ? Number(value.toPrecision(10)) : value);

await mkdir(folder, { recursive: true });
let cut;
let total = 0;
for (const file of (await readdir(join(folder, "scenarios"))).sort()) {
  const name = basename(file, ".toml");
  const scenario = readScenario(await readFile(join(folder, "scenarios", file), "utf8"), file);
  const made = synthesise(scenario);
  const image = writeTiff(picturesOf(made), { deflate });
  await writeFile(join(folder, `${name}.tif`), image);
  await writeFile(join(folder, `${name}.toml`), made.acquisitionToml);
  await writeFile(join(folder, `${name}.truth.json`), `${JSON.stringify(made.truth, shorter, 1)}\n`);
  total += image.length;
  console.log(`${name}.tif  ${made.frames.length} frames, ${(image.length / 1e3).toFixed(0)} kB`);
  if (name === "alder-spot3") cut = { image, acquisition: made.acquisitionToml };
}
await writeFile(join(folder, "alder-cut.tif"), cut.image.subarray(0, cut.image.length >> 1));
await writeFile(join(folder, "alder-cut.toml"), cut.acquisition.replace('spot = "3"', 'spot = "7"'));
console.log(`alder-cut.tif  cut in half; ${((total + (cut.image.length >> 1)) / 1e6).toFixed(2)} MB in all`);
