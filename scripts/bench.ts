// npm run bench [-- --runs 5] [-- --yardstick "python3 fit.py STACK 0.1 0.25"] [-- --quick]
// Times `gleamwalk spread` as a whole process, all outputs written, against the floor (scripts/floor.mjs) and, where
// given, another command on the same file. Runs alternate, so that a busy moment hits all alike; medians are given,
// and ratios from the same runs. Numbers of one machine are no promise for another: the ratios are what to compare.
import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readFileSync, rmSync, statSync, writeFileSync } from "node:fs";
import { cpus } from "node:os";
import { join } from "node:path";
import { parseArgs } from "node:util";
import { createRandom } from "../src/numerics/random.ts";
import { writeTiff } from "../test/fuzzing/tiff-file.ts";

const { values: options } = parseArgs({
  options: {
    runs: { type: "string", default: "5" },
    yardstick: { type: "string", default: process.env.GLEAMWALK_YARDSTICK ?? "" },
    quick: { type: "boolean", default: false },
  },
});
const RUNS = Number(options.runs);
const FOLDER = ".bench";
mkdirSync(FOLDER, { recursive: true });

/**
 * A plain stack: one photon-counted spot, 3·10⁵ photons in the first frame, spreading with D = 0.5 cm²/s over ten
 * nanoseconds while it fades with τ = 8 ns; pixels of 0.1 µm.
 */
function makeStack(size: number, frames: number): string {
  const file = join(FOLDER, `plain-${size}-${frames}.tif`);
  if (existsSync(file)) return file;
  const random = createRandom(1);
  const step = (0.25 * 40) / Math.max(frames, 40);
  const stack = Array.from({ length: frames }, (_, i) => {
    const variance = 0.36 + 2 * 0.05 * i * step;
    const peak = (3e5 * Math.exp((-i * step) / 8) * 0.01) / (2 * Math.PI * variance);
    const profile = Array.from({ length: size }, (_, x) =>
      Math.exp(-((0.1 * (x - size / 2)) ** 2) / (2 * variance)),
    );
    return profile.flatMap((row) =>
      profile.map((column) => Math.min(65535, random.poisson(peak * row * column + 2))),
    );
  });
  const layout = { littleEndian: true, bits: 16, format: 1, rowsPerStrip: size, compression: 1 } as const;
  writeFileSync(file, writeTiff(stack, { ...layout, width: size, height: size }).bytes);
  const toml = `[space]\npixel = "0.1 um"\n[time]\nfirst = "0 ns"\nstep = "${step} ns"\n`;
  writeFileSync(file.replace(/tif$/, "toml"), toml);
  return file;
}

type CommandLine = readonly string[];
const ours = (file: string): CommandLine => [
  process.execPath,
  "dist/cli/main.js",
  "spread",
  file,
  "--quiet",
  "-o",
  join(FOLDER, "result"),
];
const floor = (file: string): CommandLine => [process.execPath, "scripts/floor.mjs", file];
const yardstick = (file: string): CommandLine =>
  options.yardstick.split(/\s+/).map((w) => (w === "STACK" ? file : w));

/** Seconds from start to end of the whole process. */
function time([command = "", ...args]: CommandLine, env: NodeJS.ProcessEnv = process.env): number {
  const begin = performance.now();
  const { status, stderr } = spawnSync(command, args, {
    env,
    stdio: ["ignore", "ignore", "pipe"],
    encoding: "utf8",
  });
  if (status !== 0 && status !== 3)
    throw new Error(`${command} ${args.join(" ")} ended with ${status}: ${stderr}`);
  return (performance.now() - begin) / 1000;
}

/** Largest resident memory of a Node process in MB, as the process itself reports it when it ends. */
function peakMemory(command: CommandLine): number {
  const note = join(FOLDER, "peak.txt");
  const hook = `import { writeFileSync } from "node:fs";
    process.on("exit", () => writeFileSync(${JSON.stringify(note)}, String(process.resourceUsage().maxRSS)));`;
  time(command, {
    ...process.env,
    NODE_OPTIONS: `--import=data:text/javascript,${encodeURIComponent(hook)}`,
  });
  return Number(readFileSync(note, "utf8")) / 1000;
}

const median = (list: readonly number[]): number =>
  [...list].sort((a, b) => a - b)[list.length >> 1] ?? Number.NaN;

/** Medians of several commands, one run of each in turn. */
function alternate(commands: readonly CommandLine[], runs: number): number[] {
  const seconds = commands.map((): number[] => []);
  for (let run = 0; run < runs; run++)
    for (const [i, command] of commands.entries()) seconds[i]?.push(time(command));
  return seconds.map(median);
}

const line = (name: string, ...cells: string[]): void =>
  console.log(`${name.padEnd(30)}${cells.map((cell) => cell.padStart(20)).join("")}`);

function mainTable(): void {
  const file = makeStack(256, 200);
  const megabytes = statSync(file).size / 1e6;
  const commands = [ours(file), floor(file), ...(options.yardstick === "" ? [] : [yardstick(file)])];
  time(ours(file)); // the file into the disk cache
  const [spread = 0, bare = 0, other] = alternate(commands, RUNS);
  console.log(`256 × 256 × 200 stack, ${megabytes.toFixed(1)} MB; medians of ${RUNS} whole processes\n`);
  line("", "seconds", "gleamwalk is");
  line("gleamwalk spread, all files", spread.toFixed(2));
  line("floor: decode and add up", bare.toFixed(2), `${(spread / bare).toFixed(2)} × floor`);
  if (other !== undefined) line("yardstick", other.toFixed(2), `${(other / spread).toFixed(1)} × faster`);
  const peak = peakMemory(ours(file));
  console.log(
    `\npeak memory ${peak.toFixed(0)} MB = file + ${(peak - megabytes).toFixed(0)} MB (at most file + 300 MB)`,
  );
}

interface Step {
  readonly label: string;
  readonly size: number;
  readonly frames: number;
}

/** What every further million pixels costs: the same down the column where the cost grows linearly. */
function growthTable(title: string, steps: readonly Step[]): void {
  const seconds = alternate(
    steps.map(({ size, frames }) => ours(makeStack(size, frames))),
    Math.min(RUNS, 3),
  );
  const megapixels = steps.map(({ size, frames }) => (size * size * frames) / 1e6);
  console.log(`\n${title}`);
  line("", "seconds", "million pixels", "s a further million");
  for (const [i, { label }] of steps.entries()) {
    const [spent = 0, before = 0] = [seconds[i], seconds[i - 1]];
    const [pixels = 0, fewer = 0] = [megapixels[i], megapixels[i - 1]];
    const further = i === 0 ? "" : ((spent - before) / (pixels - fewer)).toFixed(3);
    line(label, spent.toFixed(2), pixels.toFixed(1), further);
  }
}

console.log(`${cpus()[0]?.model ?? "unknown processor"}, Node ${process.version}\n`);
mainTable();
if (!options.quick) {
  const frames = [50, 100, 200, 400].map((n) => ({ label: `${n} frames`, size: 256, frames: n }));
  growthTable("cost over frames, 256 × 256 pixels", frames);
  const sizes = [64, 128, 256, 512].map((n) => ({ label: `${n} × ${n}`, size: n, frames: 200 }));
  growthTable("cost over pixels, 200 frames", sizes);
}
rmSync(join(FOLDER, "result"), { recursive: true, force: true });
