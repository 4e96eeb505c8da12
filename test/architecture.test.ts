import { readdirSync, readFileSync } from "node:fs";
import { dirname, join, relative, resolve } from "node:path";
import { describe, expect, test } from "vitest";
import * as library from "../src/index.ts";
import * as node from "../src/node.ts";
import { version } from "../src/version.ts";

const root = resolve(import.meta.dirname, "..");
const source = join(root, "src");

/** What each layer may import from, besides itself. */
const LAYERS: Readonly<Record<string, readonly string[]>> = {
  numerics: [],
  stack: ["numerics"],
  frame: ["numerics", "stack"],
  transport: ["numerics", "stack", "frame"],
  decay: ["numerics", "stack", "frame"],
  field: ["numerics", "stack", "frame"],
  outcome: ["numerics", "stack", "frame", "transport", "decay", "field"],
  compare: ["numerics", "stack", "frame", "transport", "decay", "field", "outcome"],
  report: ["numerics", "stack", "frame", "transport", "decay", "field", "outcome", "compare"],
  cli: ["numerics", "stack", "frame", "transport", "decay", "field", "outcome", "compare", "report"],
};

/** The files that may use Node's own modules: opening files, writing files, and the command line. */
const SHELL = [
  /^cli\//,
  /^node\.ts$/,
  /^stack\/open[\w-]*\.ts$/,
  /^stack\/[\w/-]*file[\w-]*\.ts$/,
  /^report\/write[\w-]*\.ts$/,
  // the thread that draws figures beside the page that is being written
  /^report\/(draw-aside|figure-worker)\.ts$/,
];

interface Import {
  readonly from: string;
  readonly to: string;
  readonly typeOnly: boolean;
}

const files = readdirSync(source, { recursive: true, encoding: "utf8" }).filter((file) =>
  file.endsWith(".ts"),
);
const imports = files.flatMap(importsOf);

function importsOf(file: string): Import[] {
  const text = readFileSync(join(source, file), "utf8");
  const statements = text.matchAll(
    /(?:^|\n)\s*(import|export)(\s+type)?\s[^;]*?from\s+"([^"]+)"|import\("([^"]+)"\)|(?:^|\n)import\s+"([^"]+)"/g,
  );
  return [...statements].map(([, , type, named, dynamic, bare]) => ({
    from: file,
    to: target(file, named ?? dynamic ?? bare ?? ""),
    typeOnly: type !== undefined,
  }));
}

function target(file: string, specifier: string): string {
  return specifier.startsWith(".") ? relative(source, resolve(source, dirname(file), specifier)) : specifier;
}

const layerOf = (file: string): string | undefined => (file.includes("/") ? file.split("/")[0] : undefined);

describe("the layout", () => {
  test("imports run one way: numerics, stack ← frame ← transport, decay, field ← outcome ← compare ← report ← cli", () => {
    const wrong = imports.filter(({ from, to }) => {
      const [importer, imported] = [layerOf(from), files.includes(to) ? layerOf(to) : undefined];
      if (importer === undefined || imported === undefined || importer === imported) return false;
      return !LAYERS[importer]?.includes(imported);
    });
    expect(wrong.map(({ from, to }) => `${from} → ${to}`)).toEqual([]);
  });

  test("every folder under src is a layer with a place in that order", () => {
    const folders = new Set(files.map(layerOf).filter((layer) => layer !== undefined));
    expect([...folders].filter((folder) => !(folder in LAYERS))).toEqual([]);
  });

  test("no file imports itself in a circle at run time", () => {
    expect(circles(imports.filter((one) => !one.typeOnly))).toEqual([]);
  });

  test("only file opening, report writing and the command line use Node's own modules", () => {
    const users = imports.filter(({ to }) => to.startsWith("node:")).map(({ from }) => from);
    expect([...new Set(users)].filter((file) => !SHELL.some((allowed) => allowed.test(file)))).toEqual([]);
  });

  test("the library's pure entry point reaches none of the files that use Node's own modules", () => {
    const reached = reachable("index.ts");
    const users = new Set(imports.filter(({ to }) => to.startsWith("node:")).map(({ from }) => from));
    expect([...reached].filter((file) => users.has(file))).toEqual([]);
  });

  test("every relative import names a file that exists, with its ending", () => {
    const lost = imports.filter(({ to }) => to.endsWith(".ts") && !files.includes(to));
    expect(lost.map(({ from, to }) => `${from} → ${to}`)).toEqual([]);
  });
});

describe("the public face", () => {
  test("the pure entry point exports these names and no others", () => {
    expect(Object.keys(library).sort()).toEqual([
      "InputFault",
      "acquisitionDefaults",
      "analyse",
      "forecast",
      "framesCsv",
      "memoryStack",
      "picturesOf",
      "planFromResult",
      "planFromScenario",
      "readScenario",
      "renderFigures",
      "renderReport",
      "renderTerminal",
      "resultSchema",
      "synthesise",
      "version",
      "writeTiff",
    ]);
  });

  test("the Node entry point adds files: reading a recording, writing a report", () => {
    expect(Object.keys(node).sort()).toEqual(["inspectStack", "openRaw", "openStack", "writeReports"]);
  });

  test("the version is the package's", () => {
    const manifest = JSON.parse(readFileSync(join(root, "package.json"), "utf8")) as { version: string };
    expect(version).toBe(manifest.version);
  });
});

function reachable(start: string): Set<string> {
  const seen = new Set([start]);
  for (const file of seen)
    for (const { from, to, typeOnly } of imports)
      if (from === file && !typeOnly && files.includes(to)) seen.add(to);
  return seen;
}

/** Depth-first search; each circle is given as the path that closes it. */
function circles(edges: readonly Import[]): string[] {
  const done = new Set<string>();
  const found: string[] = [];
  const visit = (file: string, path: readonly string[]): void => {
    if (path.includes(file)) found.push([...path.slice(path.indexOf(file)), file].join(" → "));
    if (done.has(file) || path.includes(file)) return;
    for (const edge of edges) if (edge.from === file) visit(edge.to, [...path, file]);
    done.add(file);
  };
  for (const file of files) visit(file, []);
  return found;
}
