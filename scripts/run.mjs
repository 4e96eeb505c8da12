// Runs a TypeScript script of this folder: node scripts/run.mjs fuzz 200
import { spawnSync } from "node:child_process";
import { join } from "node:path";
import { build } from "esbuild";

const [name, ...args] = process.argv.slice(2);
const outfile = join("node_modules", ".cache", "gleamwalk", `${name}.mjs`);
await build({
  entryPoints: [join("scripts", `${name}.ts`)],
  outfile,
  bundle: true,
  packages: "external",
  platform: "node",
  format: "esm",
  target: "node20",
});
process.exit(spawnSync(process.execPath, [outfile, ...args], { stdio: "inherit" }).status ?? 1);
