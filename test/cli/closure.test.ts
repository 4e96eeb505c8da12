import { spawn } from "node:child_process";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, test } from "vitest";
import { resultSchema } from "../../src/outcome/result.ts";
import { gleamwalk, MAIN, place, scratchFolder, spotStack } from "./command-line.ts";

const folder = scratchFolder();
const file = place(folder, "alder", spotStack());

const resultIn = (name: string) =>
  resultSchema.parse(JSON.parse(readFileSync(join(folder, name, "result.json"), "utf8")));

describe("spread --closure", () => {
  test("draws as many stacks as asked and tells it in the terminal, the result and the report", () => {
    const { code, out, err } = gleamwalk(["spread", file, "--closure", "4", "-o", "four"], folder);
    expect({ code, err }).toEqual({ code: 0, err: "" });
    expect(out).toContain("4 stacks drawn from the fitted model, seed 1");
    expect(resultIn("four").closure).toMatchObject({ stacks: 4, asked: 4, failed: 0, seed: 1 });
    expect(readFileSync(join(folder, "four", "report.html"), "utf8")).toContain('<h2 id="closure">');
  });

  test("gives the same figures for the same seed, however the work falls to the threads", () => {
    gleamwalk(["spread", file, "--closure", "4", "-o", "again"], folder);
    expect(resultIn("again").closure).toEqual(resultIn("four").closure);
  });

  test("is left out where it is not asked for", () => {
    expect(gleamwalk(["spread", file, "-o", "plain"], folder).out).not.toContain("Closure");
    expect(resultIn("plain").closure).toBe(null);
  });

  test("takes a whole number from 2 and says so", () => {
    const { code, err } = gleamwalk(["spread", file, "--closure", "some"], folder);
    expect(code).toBe(2);
    expect(err).toContain('--closure "some" is not a whole number from 2');
  });

  test("reports on what is done when it is interrupted", async () => {
    const child = spawn(process.execPath, [MAIN, "spread", file, "--closure", "100000", "-o", "cut"], {
      cwd: folder,
      stdio: "ignore",
    });
    const ended = new Promise<number | null>((resolve) => child.once("exit", resolve));
    await new Promise((resolve) => setTimeout(resolve, 4000));
    child.kill("SIGINT");
    expect(await ended).toBe(0);
    const { stacks, asked } = resultIn("cut").closure!;
    expect(asked).toBe(100_000);
    expect(stacks).toBeGreaterThan(0);
    expect(stacks).toBeLessThan(asked);
  }, 20_000);
});
