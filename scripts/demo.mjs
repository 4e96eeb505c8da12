// npm run demo: the main job on the recordings in sample-data/, as a user would run it.
import { spawnSync } from "node:child_process";
import { readdirSync } from "node:fs";
import { join } from "node:path";

const recordings = readdirSync("sample-data").filter((name) => name.endsWith(".tif"));
const reports = [];
let failed = false;
for (const name of recordings) {
  const folder = join("demo.gleamwalk", name.replace(/\.tif$/, ""));
  console.log(`\n$ gleamwalk spread sample-data/${name}\n`);
  const { status } = spawnSync(
    process.execPath,
    ["dist/cli/main.js", "spread", join("sample-data", name), "-o", folder],
    { stdio: "inherit" },
  );
  if (status === 0 || status === 3) reports.push(join(folder, "report.html"));
  else if (status === 2) console.log("(a recording that is refused on purpose)");
  else failed = true;
}
console.log(`\nThe reports lie in:\n${reports.map((path) => `  ${path}`).join("\n")}`);
process.exitCode = failed || reports.length === 0 ? 1 : 0;
