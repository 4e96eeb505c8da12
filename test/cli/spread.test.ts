import { spawn, spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { basename, dirname, join } from "node:path";
import { describe, expect, test } from "vitest";
import { type Result, resultSchema } from "../../src/outcome/result.ts";
import { gleamwalk, MAIN, PLAIN_TOML, place, scratchFolder, spotStack } from "./command-line.ts";

const folder = scratchFolder();
// The stack's own truth: 1.5 pixel² a frame at 0.1 µm and 0.5 ns is 2D = 0.03 µm²/ns, D = 0.15 cm²/s;
// the light falls by e in 8 frames, τ = 4 ns.
const file = place(folder, "scan", spotStack({ size: 48 }));
const fresh = (name: string): string => join(folder, name);

function result(...args: readonly string[]): Result {
  const { out, err } = gleamwalk(["spread", file, "--json", "-o", fresh("json"), ...args]);
  expect(err).toBe("");
  return resultSchema.parse(JSON.parse(out));
}

/** What the recording gives without any option, run once for all tests that compare with it. */
const plain = result();

describe("spread", () => {
  test("writes the result, the table, the figures and the report, and nothing else", () => {
    const home = fresh("files");
    expect(gleamwalk(["spread", file, "-o", home]).code).toBe(0);
    expect(readdirSync(home, { recursive: true }).sort()).toEqual([
      "figures",
      join("figures", "light.svg"),
      join("figures", "profiles.svg"),
      join("figures", "spread.svg"),
      "frames.csv",
      "report.html",
      "result.json",
    ]);
  });

  test("writes beside the recording where no folder is named, from any working folder", () => {
    const home = fresh("elsewhere");
    mkdirSync(home);
    place(home, "scan", readFileSync(file));
    expect(gleamwalk(["spread", "scan.tif"], home).code).toBe(0);
    expect(existsSync(join(home, "scan.gleamwalk", "report.html"))).toBe(true);
    expect(gleamwalk(["spread", join(basename(home), "scan.tif"), "-q"], dirname(home)).code).toBe(0);
  });

  test("finds the spot's D and τ inside the intervals it gives", () => {
    const { quantities } = plain;
    const [low, high] = quantities.diffusion_coefficient.interval95;
    expect(low).toBeLessThan(0.15);
    expect(high).toBeGreaterThan(0.15);
    expect(quantities.lifetime?.interval95[0]).toBeLessThan(4);
    expect(quantities.lifetime?.interval95[1]).toBeGreaterThan(4);
  });

  test("--json prints the result that it writes, and nothing else", () => {
    const home = fresh("printed");
    const { out } = gleamwalk(["spread", file, "--json", "-o", home]);
    expect(JSON.parse(out)).toEqual(JSON.parse(readFileSync(join(home, "result.json"), "utf8")));
  });

  test("the window follows --from and --to, in any unit of time", () => {
    expect(result("--from", "1 ns", "--to", "4000 ps").transport.window).toMatchObject({
      from_ns: 1,
      to_ns: 4,
      frames: 7,
    });
  });

  test("an override changes the result and is named as coming from the command line", () => {
    const doubled = result("--pixel", "0.200 um ± 1 %");
    expect(doubled.acquisition["space.pixel"]).toEqual({ text: "0.200 um ± 1 %", from: "command line" });
    expect(
      doubled.quantities.diffusion_coefficient.value / plain.quantities.diffusion_coefficient.value,
    ).toBeCloseTo(4, 6);
  });

  test("the same seed gives the same numbers", () => {
    const numbers = () => JSON.stringify(result("--seed", "7").quantities);
    expect(numbers()).toBe(numbers());
  });

  test("ends with 3 where the verdict is unsound, all files written", () => {
    const cut = place(folder, "cut-off", spotStack({ size: 10 }));
    const { code, out } = gleamwalk(["spread", cut, "-o", fresh("unsound")]);
    expect(code).toBe(3);
    expect(out).toContain("UNSOUND");
    expect(existsSync(join(fresh("unsound"), "report.html"))).toBe(true);
  });
});

describe("what it prints", () => {
  test("fits 80 columns, says the numbers and where the report lies, without colour where no terminal is", () => {
    const { out, err } = gleamwalk(["spread", file, "-o", fresh("print")]);
    expect(err).toBe("");
    expect(out).not.toContain("\u001b");
    expect(out).toMatch(/ D {2}0\.\d+\(\d+\) cm²\/s/);
    expect(out).toContain(join(fresh("print"), "report.html"));
    const long = out.split("\n").filter((line) => [...line].length > 80);
    expect(long.filter((line) => !line.includes(folder))).toEqual([]);
  });

  test("--quiet prints nothing", () => {
    expect(gleamwalk(["spread", file, "-q", "-o", fresh("quiet")])).toEqual({ code: 0, out: "", err: "" });
  });

  test("a reader that stops early is no fault", () => {
    const command = `"${process.execPath}" "${MAIN}" spread "${file}" --json -o "${fresh("pipe")}" | head -c 10`;
    const { stderr, stdout } = spawnSync("sh", ["-c", command], { encoding: "utf8" });
    expect(stderr).toBe("");
    expect(stdout).toHaveLength(10);
  });

  test("files of the user's in the same folder stay", () => {
    const home = fresh("mine");
    mkdirSync(home);
    writeFileSync(join(home, "notes.txt"), "mine");
    gleamwalk(["spread", file, "-q", "-o", home]);
    expect(readFileSync(join(home, "notes.txt"), "utf8")).toBe("mine");
  });
});

test.each(["SIGINT", "SIGTERM"] as const)(
  "%s leaves no half-written file, and an older result as it was",
  async (signal) => {
    const home = fresh(`stopped-${signal}`);
    const large = place(folder, "large", spotStack({ size: 128, frames: 60 }), PLAIN_TOML);
    gleamwalk(["spread", file, "-q", "-o", home]);
    const before = readFileSync(join(home, "result.json"), "utf8");
    for (const wait of [100, 400]) {
      const child = spawn(process.execPath, [MAIN, "spread", large, "-q", "-o", home], { stdio: "ignore" });
      await new Promise((resolve) => setTimeout(resolve, wait));
      child.kill(signal);
      const [code, by] = await new Promise<[number | null, string | null]>((resolve) => {
        child.on("exit", (...ended) => resolve(ended));
      });
      expect(by ?? code).toBe(by === null ? { SIGINT: 130, SIGTERM: 143 }[signal] : signal);
      expect(readdirSync(home, { recursive: true }).filter((name) => String(name).endsWith(".part"))).toEqual(
        [],
      );
      expect(readFileSync(join(home, "result.json"), "utf8")).toBe(before);
    }
  },
);
