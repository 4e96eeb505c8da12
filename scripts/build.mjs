// Builds dist/: the library with its types by tsc, the command line as one bundle by esbuild (a bundle starts in a
// third of the time), and the JSON Schema of result.json. It is built aside and put in place at the end, so that a
// build that fails leaves the old one.
import { execFileSync } from "node:child_process";
import { chmod, mkdir, rename, rm, writeFile } from "node:fs/promises";
import { join, resolve } from "node:path";
import { pathToFileURL } from "node:url";
import { build } from "esbuild";

const out = join("node_modules", ".cache", "gleamwalk", `build-${process.pid}`);
await rm(out, { recursive: true, force: true });
await mkdir(out, { recursive: true });
try {
  await library();
  await commandLine();
  await schema();
  await putInPlace();
} finally {
  await rm(out, { recursive: true, force: true });
}

function library() {
  const tsc = join("node_modules", "typescript", "bin", "tsc");
  const args = ["-p", "tsconfig.build.json", "--outDir", out];
  execFileSync(process.execPath, [tsc, ...args], { stdio: "inherit" });
}

async function commandLine() {
  await rm(join(out, "cli"), { recursive: true, force: true });
  await build({
    // threads are started by their file's name beside the command line's
    entryPoints: {
      main: "src/cli/main.ts",
      "figure-worker": "src/report/figure-worker.ts",
      "closure-worker": "src/cli/closure-worker.ts",
    },
    outdir: join(out, "cli"),
    bundle: true,
    splitting: true,
    platform: "node",
    format: "esm",
    target: "node20",
    minify: true,
    legalComments: "linked",
    logLevel: "warning",
    // some bundled packages still call require() for Node's own modules
    banner: {
      js: "import { createRequire as __createRequire } from 'node:module'; const require = __createRequire(import.meta.url);",
    },
  });
  await chmod(join(out, "cli", "main.js"), 0o755);
}

async function schema() {
  const { z } = await import("zod");
  const { resultSchema } = await import(pathToFileURL(resolve(out, "outcome", "result.js")).href);
  const text = `${JSON.stringify(z.toJSONSchema(resultSchema), null, 2)}\n`;
  await writeFile(join(out, "result.schema.json"), text);
}

async function putInPlace() {
  const old = `${out}-old`;
  await rename("dist", old).catch(() => {});
  await rename(out, "dist");
  await rm(old, { recursive: true, force: true });
}
