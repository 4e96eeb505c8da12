import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll } from "vitest";
import { type Picture, writeTiff } from "../../src/stack/tiff/write.ts";

/** A folder for one test file, removed at its end. */
export function testFolder(): {
  readonly path: string;
  put(name: string, content: Uint8Array | string): string;
} {
  const path = mkdtempSync(join(tmpdir(), "gleamwalk-"));
  afterAll(() => rmSync(path, { recursive: true, force: true }));
  return {
    path,
    put(name, content) {
      const file = join(path, name);
      writeFileSync(file, content);
      return file;
    },
  };
}

/** A picture of 16-bit counts, value(x, y) at each pixel. */
export function counts(width: number, height: number, value: (x: number, y: number) => number): Picture {
  return { width, height, data: Uint16Array.from(grid(width, height, value)) };
}

/** The same in 32-bit floating point. */
export function floats(width: number, height: number, value: (x: number, y: number) => number): Picture {
  return { width, height, data: Float32Array.from(grid(width, height, value)) };
}

function grid(width: number, height: number, value: (x: number, y: number) => number): number[] {
  return Array.from({ length: width * height }, (_, i) => value(i % width, Math.floor(i / width)));
}

/** A plain recording: `frames` pictures of 8 × 6 that differ from one another. */
export function plainRecording(frames = 4): Uint8Array {
  return writeTiff(Array.from({ length: frames }, (_, k) => counts(8, 6, (x, y) => 10 * k + x + 2 * y)));
}

/** The least acquisition file that opens. */
export const LEAST_TOML = '[space]\npixel = "0.1 um"\n[time]\nstep = "0.5 ns"\n';
