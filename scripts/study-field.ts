// npm run study:field: how right the whole-stack fit is. Draws many recordings from mean stacks that another solver
// made, reads and fits each as the command line does, and prints the pulls of every parameter and the choices.
//
//   npm run study:field -- [--stacks 200] [--cases annihilation,capture] [--first 0] [--threads 2] [--lines FILE]
//
// --first 200 goes on with further stacks where counting error leaves doubt; --lines keeps every answer as it comes.

import { appendFileSync } from "node:fs";
import { availableParallelism } from "node:os";
import { parseArgs } from "node:util";
import { isMainThread, parentPort, Worker, workerData } from "node:worker_threads";
import { type Answer, answer, CASES, draw, prepare } from "../test/field/stack-fit/field-stacks.ts";

interface Work {
  readonly name: string;
  readonly first: number;
  readonly last: number;
  readonly stride: number;
}

type Reply = (Answer & { readonly k: number }) | { readonly k: number; readonly error: string };

function work({ name, first, last, stride }: Work): void {
  const prepared = prepare(name);
  for (let k = first; k < last; k += stride) {
    try {
      parentPort!.postMessage({ k, ...answer(prepared, draw(prepared, k)) });
    } catch (error) {
      parentPort!.postMessage({ k, error: error instanceof Error ? error.message : String(error) });
    }
  }
}

function runCase(name: string, first: number, stacks: number, threads: number, lines?: string) {
  const replies: Reply[] = [];
  return new Promise<Reply[]>((resolve, reject) => {
    let running = threads;
    for (let w = 0; w < threads; w++) {
      const workerData: Work = { name, first: first + w, last: first + stacks, stride: threads };
      const worker = new Worker(new URL(import.meta.url), { workerData });
      worker.on("message", (reply: Reply) => {
        replies.push(reply);
        if (lines !== undefined) appendFileSync(lines, `${JSON.stringify({ name, ...reply })}\n`);
        if (process.stderr.isTTY) process.stderr.write(`\r${name}: ${replies.length}/${stacks} `);
      });
      worker.on("error", reject);
      worker.on("exit", () => {
        running--;
        if (running === 0) resolve(replies.sort((a, b) => a.k - b.k));
      });
    }
  });
}

/** Mean and spread of pulls with the counting error of each, and how many lie within 1.96. */
function row(name: string, key: string, pulls: readonly number[]): string {
  const n = pulls.length;
  const mean = pulls.reduce((a, b) => a + b, 0) / n;
  const spread = Math.sqrt(pulls.reduce((a, b) => a + (b - mean) ** 2, 0) / (n - 1));
  const covered = pulls.filter((pull) => Math.abs(pull) < 1.96).length / n;
  const shown = (value: number, u: number) => `${value.toFixed(2)} ± ${u.toFixed(2)}`;
  const cells = [
    name,
    key,
    shown(mean, spread / Math.sqrt(n)),
    shown(spread, spread / Math.sqrt(2 * (n - 1))),
    `${(100 * covered).toFixed(1)} %`,
    n,
  ];
  return cells.join(" | ");
}

function report(name: string, replies: readonly Reply[]): void {
  const done = replies.filter((each) => "pulls" in each);
  const keys = [...new Set(done.flatMap((each) => Object.keys(each.pulls)))];
  for (const key of keys) {
    const pulls = done.flatMap((each) => each.pulls[key] ?? []);
    if (pulls.length > 1) console.log(row(name, key, pulls));
  }
  const { made } = CASES[name]!;
  const share = (part: readonly unknown[]) => `${part.length}/${done.length}`;
  const chosen = done.filter((each) => each.preferred === made);
  const others = [...new Set(done.map((each) => each.preferred))].filter((each) => each !== made);
  const unlikely = done.filter((each) => each.p !== null && each.p < 0.05);
  const failed = replies.flatMap((each) => ("error" in each ? [each.error] : []));
  console.log(
    [
      name,
      `chose ${made} ${share(chosen)}${others.length > 0 ? ` (else ${others.join(", ")})` : ""}`,
      `converged ${share(done.filter((each) => each.converged))}`,
      `p < 0.05 in ${share(unlikely)}`,
      `${failed.length} failed${failed.length > 0 ? ` (${failed[0]})` : ""}`,
    ].join(" | "),
  );
}

async function main(): Promise<void> {
  const { values } = parseArgs({
    options: {
      stacks: { type: "string", default: "200" },
      cases: { type: "string", default: Object.keys(CASES).join(",") },
      first: { type: "string", default: "0" },
      threads: { type: "string", default: String(availableParallelism()) },
      lines: { type: "string" },
    },
  });
  console.log("case | quantity | mean pull | spread of pulls | within 1.96 u | draws");
  for (const name of values.cases.split(",")) {
    const { first, stacks, threads, lines } = values;
    report(name, await runCase(name, Number(first), Number(stacks), Number(threads), lines));
  }
}

if (isMainThread) await main();
else work(workerData);
