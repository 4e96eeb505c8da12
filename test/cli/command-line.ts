import { spawnSync } from "node:child_process";
import { existsSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join, resolve } from "node:path";
import { afterAll } from "vitest";
import { createRandom } from "../../src/numerics/random.ts";
import { type TiffLayout, writeTiff } from "../fuzzing/tiff-file.ts";

export const MAIN = resolve(import.meta.dirname, "../../dist/cli/main.js");
if (!existsSync(MAIN)) throw new Error("these tests run the built command line: npm run build first");

export interface Ended {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
}

/** Runs the built command line as a user would, in the folder `cwd`. */
export function gleamwalk(args: readonly string[], cwd?: string, env: NodeJS.ProcessEnv = {}): Ended {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, ...args], {
    cwd,
    encoding: "utf8",
    env: { ...process.env, GLEAMWALK_DEBUG: "", ...env },
  });
  return { code: status, out: stdout, err: stderr };
}

/** A folder that is gone after the test file. */
export function scratchFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), "gleamwalk-test-"));
  afterAll(() => rmSync(folder, { recursive: true, force: true }));
  return folder;
}

export interface SpotStack {
  readonly size?: number;
  readonly frames?: number;
  readonly photons?: number;
  readonly layout?: Partial<TiffLayout>;
  /** Last word on each frame before it is written. */
  readonly change?: (frame: number[], index: number) => number[];
}

/** A spot with Poisson noise: variance 9 + 1.5 t pixel², light fading over 8 frames; in plain counted photons. */
export function spotStack({
  size = 24,
  frames = 12,
  photons = 25_000,
  layout = {},
  change,
}: SpotStack = {}): Buffer {
  const random = createRandom(20);
  const stack = Array.from({ length: frames }, (_, t) => {
    const variance = 9 + 1.5 * t;
    const peak = (photons * Math.exp(-t / 8)) / (2 * Math.PI * variance);
    const frame = Array.from({ length: size * size }, (_, i) => {
      const [x, y] = [(i % size) - size / 2, Math.floor(i / size) - size / 2];
      return random.poisson(peak * Math.exp(-(x * x + y * y) / (2 * variance)) + 0.5);
    });
    return change === undefined ? frame : change(frame, t);
  });
  const plain = { littleEndian: true, bits: 16, format: 1, rowsPerStrip: size, compression: 1 } as const;
  return writeTiff(stack, { ...plain, width: size, height: size, ...layout }).bytes;
}

export const PLAIN_TOML = `[space]
pixel = "0.100 um ± 1 %"
[time]
first = "0 ns"
step = "0.5 ns"
[sample]
name = "Alder"
temperature = "295 K ± 2 K"
`;

/** Puts NAME.tif and, where given, NAME.toml into a folder, and gives the path of the stack. */
export function place(
  folder: string,
  name: string,
  tiff: Buffer | string,
  toml: string | null = PLAIN_TOML,
): string {
  const file = join(folder, `${name}.tif`);
  writeFileSync(file, tiff);
  if (toml !== null) writeFileSync(join(folder, `${name}.toml`), toml);
  return file;
}
