import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { beforeEach, describe, expect, it } from "vitest";
import { writeReports, writeResult } from "../../src/report/write.ts";
import { discardUnfinished } from "../../src/report/write-whole.ts";
import { InputFault } from "../../src/stack/fault.ts";
import { makeAnalysis } from "./fixture.ts";

let folder = "";
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "gleamwalk-write-"));
});

const tree = (path: string) => readdirSync(path, { recursive: true }).map(String).sort();
const files = (text: string, names = ["result.json", "figures/spread.svg"]) =>
  new Map(names.map((name) => [name, text]));

describe("writeResult", () => {
  it("makes the folders it needs and leaves nothing but the files", () => {
    const written = writeResult(join(folder, "a/b"), files("new"));
    expect(written).toEqual([join(folder, "a/b/result.json"), join(folder, "a/b/figures/spread.svg")]);
    expect(tree(folder)).toEqual(["a", "a/b", "a/b/figures", "a/b/figures/spread.svg", "a/b/result.json"]);
  });

  it("replaces an older result, removes its files that are not made any more, and leaves other files alone", () => {
    writeResult(folder, files("old", ["result.json", "figures/light.svg", "report.html"]));
    writeFileSync(join(folder, "figures/mine.svg"), "mine");
    writeFileSync(join(folder, "notes.txt"), "mine");
    writeResult(folder, files("new"));
    expect(tree(folder)).toEqual([
      "figures",
      "figures/mine.svg",
      "figures/spread.svg",
      "notes.txt",
      "result.json",
    ]);
    expect(readFileSync(join(folder, "result.json"), "utf8")).toBe("new");
  });

  it("leaves the older result whole and no other trace where one file cannot be written", () => {
    writeResult(folder, files("old", ["result.json", "frames.csv"]));
    mkdirSync(join(folder, "report.html"));
    const before = tree(folder);
    expect(() =>
      writeResult(folder, files("new", ["result.json", "frames.csv", "figures/spread.svg", "report.html"])),
    ).toThrow(InputFault);
    expect(tree(folder)).toEqual(before);
    expect(readFileSync(join(folder, "result.json"), "utf8")).toBe("old");
  });

  it("takes away the folders it made where it fails", () => {
    const target = join(folder, "new/deep");
    expect(() => writeResult(target, files("x", ["result.json", `${"n".repeat(300)}.svg`]))).toThrow(
      /name is too long/,
    );
    expect(tree(folder)).toEqual([]);
  });

  it("says in one sentence which folder, why, and what to do where a file is in the way", () => {
    const target = join(folder, "taken");
    writeFileSync(target, "");
    expect(() => writeResult(target, files("x"))).toThrow(
      `${target}: the result cannot be written because a file is in the way; choose another folder with -o.`,
    );
  });

  it("has nothing to discard after a write that went well", () => {
    writeResult(folder, files("new"));
    discardUnfinished();
    expect(existsSync(join(folder, "result.json"))).toBe(true);
  });
});

describe("writeReports", () => {
  it("makes result.json, frames.csv, report.html and the figures", async () => {
    await writeReports(makeAnalysis("good"), folder);
    expect(tree(folder)).toEqual([
      "figures",
      "figures/light.svg",
      "figures/profiles.svg",
      "figures/spread.svg",
      "frames.csv",
      "report.html",
      "result.json",
    ]);
    expect(readFileSync(join(folder, "report.html"), "utf8")).toMatch(/^<!doctype html>[\s\S]*<\/html>\n$/);
  });
});
