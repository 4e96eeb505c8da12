// Builds dist/: the library with its types by tsc, the command line as one bundle by esbuild (a bundle starts in a
// third of the time), and the JSON Schema of result.json.
import { execFileSync } from "node:child_process";
import { rmSync } from "node:fs";
import { chmod, mkdir, readFile, writeFile } from "node:fs/promises";
import { build } from "esbuild";

rmSync("dist", { recursive: true, force: true });
execFileSync(process.execPath, ["node_modules/typescript/bin/tsc", "-p", "tsconfig.build.json"], {
  stdio: "inherit",
});

const { version } = JSON.parse(await readFile("package.json", "utf8"));
rmSync("dist/cli", { recursive: true, force: true });
await build({
  entryPoints: { main: "src/cli/main.ts" },
  outdir: "dist/cli",
  bundle: true,
  splitting: true,
  platform: "node",
  format: "esm",
  target: "node20",
  minifySyntax: true,
  legalComments: "none",
  // some bundled packages still call require() for Node's own modules
  banner: {
    js: "import { createRequire as __createRequire } from 'node:module'; const require = __createRequire(import.meta.url);",
  },
  define: { __GLEAMWALK_VERSION__: JSON.stringify(version) },
});
await chmod("dist/cli/main.js", 0o755);

const { z } = await import("zod");
const { resultSchema } = await import("../dist/outcome/result.js");
await mkdir("dist", { recursive: true });
await writeFile("dist/result.schema.json", `${JSON.stringify(z.toJSONSchema(resultSchema), null, 2)}\n`);
