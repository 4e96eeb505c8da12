// npm run fuzz [-- COUNT [FIRST]]
// Damages TIFF and acquisition files, seeded, and gives each to the command line as a user would. Each run must end
// within 10 s with 0, 2 or 3, say one sentence where it refuses and nothing on stderr where it does not, show no
// stack trace and no NaN, and read nothing as what it is not.
import { spawn } from "node:child_process";
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { type Case, fuzzCase, WHOLE_TIFFS, WHOLE_TOML } from "../test/fuzzing/cases.ts";
import { misreadTiff, misreadToml } from "../test/fuzzing/judge.ts";

const [count = 2000, first = 0] = process.argv.slice(2).map(Number);
const PARALLEL = 2;
const LIMIT_MS = 10_000;
const main = process.env.GLEAMWALK_MAIN ?? join("dist", "cli", "main.js");
const folder = mkdtempSync(join(tmpdir(), "gleamwalk-fuzz-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

interface Run {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
  readonly seconds: number;
}

/** A run over the limit is repeated once: on a busy machine the first may have waited for a turn. */
async function gleamwalk(...args: string[]): Promise<Run> {
  const run = await once(args);
  return run.code === null ? once(args) : run;
}

function once(args: readonly string[]): Promise<Run> {
  return new Promise((done) => {
    const begin = performance.now();
    const child = spawn(process.execPath, [main, ...args], { stdio: ["ignore", "pipe", "pipe"] });
    let [out, err] = ["", ""];
    child.stdout.setEncoding("utf8").on("data", (text: string) => {
      out += text;
    });
    child.stderr.setEncoding("utf8").on("data", (text: string) => {
      err += text;
    });
    const timer = setTimeout(() => child.kill("SIGKILL"), LIMIT_MS);
    child.on("close", (code) => {
      clearTimeout(timer);
      done({ code, out, err, seconds: (performance.now() - begin) / 1000 });
    });
  });
}

/** Why a run is not what a user may expect; null where it is. */
function complaint({ code, out, err }: Run): string | null {
  if (code === null) return "did not end in time";
  if (![0, 2, 3].includes(code)) return `exit code ${code}`;
  if (/^\s+at .*:\d+/m.test(err)) return "shows a stack trace";
  // "(NaN)" says what a pixel is, "key = NaN" repeats what the user wrote
  const own = (out + err).replace(/\(NaN\)|= "?-?(NaN|Infinity)\b/g, "");
  if (/\bNaN\b|\bInfinity\b|undefined/.test(own)) return "shows a number that is none";
  if (code !== 2) return err === "" ? null : "says something on stderr though it went on";
  if (out !== "") return "prints a result though it refused";
  return /^gleamwalk: [^\n]+\n$/.test(err) ? null : "does not say one sentence";
}

function place(index: number, tiff: Buffer, toml: string): string {
  const home = join(folder, String(index));
  mkdirSync(home);
  writeFileSync(join(home, "scan.tif"), tiff);
  writeFileSync(join(home, "scan.toml"), toml);
  return join(home, "scan.tif");
}

async function check(
  index: number,
): Promise<{ fault: string | null; codes: string; slowest: number; said: string }> {
  const one = fuzzCase(index);
  const whole = WHOLE_TIFFS[0]?.bytes ?? Buffer.alloc(0);
  const tiff = one.kind === "tiff" ? one.bytes : whole;
  const file = place(index, tiff, one.kind === "toml" ? one.text : WHOLE_TOML);
  const inspected = one.kind === "tiff" ? await gleamwalk("inspect", file, "--json") : null;
  const spread = await gleamwalk("spread", file, "--json");
  const faults = [inspected && complaint(inspected), complaint(spread), misreading(one, inspected, spread)];
  rmSync(join(folder, String(index)), { recursive: true, force: true });
  return {
    fault: faults.find((fault) => fault !== null) ?? null,
    codes: `${one.kind} ${spread.code}`,
    slowest: Math.max(inspected?.seconds ?? 0, spread.seconds),
    said: spread.err,
  };
}

function misreading(one: Case, inspected: Run | null, spread: Run): string | null {
  try {
    if (one.kind === "tiff") {
      return inspected?.code === 0 ? misreadTiff(one.bytes, one.whole, JSON.parse(inspected.out)) : null;
    }
    const accepted = spread.code === 0 || spread.code === 3;
    return accepted ? misreadToml(one.text, JSON.parse(spread.out).acquisition) : null;
  } catch (error) {
    return `accepted, but ${error instanceof Error ? error.message : error}`;
  }
}

const faults: string[] = [];
const tally = new Map<string, number>();
const sentences = new Map<string, number>();
let [next, slowest] = [first, 0];
async function worker(): Promise<void> {
  while (next < first + count) {
    const index = next++;
    const { fault, codes, slowest: seconds, said } = await check(index);
    tally.set(codes, (tally.get(codes) ?? 0) + 1);
    slowest = Math.max(slowest, seconds);
    const kind = said.replace(/\/\S+/g, "FILE").replace(/\d+/g, "0").slice(0, 90).trim();
    if (kind !== "") sentences.set(kind, (sentences.get(kind) ?? 0) + 1);
    if (fault !== null) {
      faults.push(`case ${index}: ${fault}`);
      console.log(faults.at(-1), said.trim());
    }
    if ((index - first + 1) % 200 === 0) console.log(`${index - first + 1} files, ${faults.length} faults`);
  }
}
await Promise.all(Array.from({ length: PARALLEL }, worker));

console.log(
  `\n${count} damaged files from seed ${first}: ${faults.length} faults, slowest run ${slowest.toFixed(1)} s`,
);
for (const [codes, number] of [...tally].sort()) console.log(`  ${codes.padEnd(8)} ${number}`);
console.log("most frequent refusals:");
for (const [kind, number] of [...sentences].sort((a, b) => b[1] - a[1]).slice(0, 25))
  console.log(`  ${number}  ${kind}`);
process.exitCode = faults.length === 0 ? 0 : 1;
