// npm run study: how right the intervals are. Draws many stacks of one scenario at three light levels, analyses each as
// the command line does, and holds the answers against the truth and against the Cramér–Rao bound.
//
//   node scripts/study.mjs [--stacks 1000] [--light 100000,10000,1000] [--first 0] [--scenario FILE.toml]
//
// The seed of stack k at every level is SEED + k, fixed beforehand; --first 1000 goes on with further stacks where
// counting error leaves doubt.

import { readFileSync } from "node:fs";
import { availableParallelism } from "node:os";
import { parseArgs } from "node:util";
import { isMainThread, parentPort, Worker, workerData } from "node:worker_threads";
import { readScenario } from "../dist/field/scenario.js";
import { drawFrames, expectation } from "../dist/field/synthesise.js";
import { createRandom } from "../dist/numerics/random.js";
import { analyse } from "../dist/outcome/analyse.js";
import { memoryStack } from "../dist/stack/memory-stack.js";
import { boundsAtTruth } from "./study-bound.mjs";

const SEED = 20_000;

const SCENARIO = `
[recording]
frames = 40
width = 64
height = 64
photons = 1e5
background = 0.5
seed = 1
[space]
pixel = "0.1 um"
[time]
first = "0 ns"
step = "0.25 ns"
[motion]
diffusion_coefficient = "0.5 cm^2/s"
sigma0 = "0.5 um"
centre_x = "3.17 um"
centre_y = "3.12 um"
[life]
lifetime = "5 ns"
`;

function scenarioAt(text, light) {
  return readScenario(text.replace(/^photons *=.*$/m, `photons = ${light}`), "scenario");
}

/** One stack's D, τ and L with their u and intervals. */
function analyseOne(scenario, mean, k) {
  const frames = drawFrames(scenario, mean, createRandom(SEED + k));
  const { rows: height, columns: width } = scenario.recording;
  const stack = memoryStack({ frames, height, width, acquisition: scenario.acquisition });
  const { result } = analyse(stack);
  const { diffusion_coefficient: d, lifetime: tau, diffusion_length: length } = result.quantities;
  return {
    d,
    tau,
    length,
    law: result.transport.preferred,
    decay: result.decay.preferred,
    level: result.verdict.level,
  };
}

function work() {
  const { text, light, first, last, stride } = workerData;
  const scenario = scenarioAt(text, light);
  const mean = expectation(scenario);
  for (let k = first; k < last; k += stride) {
    try {
      parentPort.postMessage({ k, ...analyseOne(scenario, mean, k) });
    } catch (error) {
      parentPort.postMessage({ k, error: String(error?.message ?? error) });
    }
  }
}

function runLevel(text, light, first, stacks) {
  const workers = Math.max(1, availableParallelism());
  const answers = [];
  return new Promise((resolve, reject) => {
    let running = workers;
    for (let w = 0; w < workers; w++) {
      const worker = new Worker(new URL(import.meta.url), {
        workerData: { text, light, first: first + w, last: first + stacks, stride: workers },
      });
      worker.on("message", (answer) => {
        answers.push(answer);
        if (process.stderr.isTTY) process.stderr.write(`\r${light}: ${answers.length}/${stacks} `);
      });
      worker.on("error", reject);
      worker.on("exit", () => {
        running--;
        if (running === 0) resolve(answers.sort((a, b) => a.k - b.k));
      });
    }
  });
}

/** Mean and spread of the pulls, coverage, variance over the bound; with the counting error of each. */
function summarise(estimates, truth, boundVariance) {
  const n = estimates.length;
  const pulls = estimates.filter((q) => !q.upper_limit).map((q) => (q.value - truth) / q.u);
  const mean = pulls.reduce((a, b) => a + b, 0) / pulls.length;
  const spread = Math.sqrt(pulls.reduce((a, b) => a + (b - mean) ** 2, 0) / (pulls.length - 1));
  const held = estimates.filter((q) => q.interval95[0] <= truth && truth <= q.interval95[1]).length / n;
  const average = estimates.reduce((a, q) => a + q.value, 0) / n;
  const variance = estimates.reduce((a, q) => a + (q.value - average) ** 2, 0) / (n - 1);
  return {
    mean,
    meanError: spread / Math.sqrt(pulls.length),
    spread,
    coverage: held,
    coverageError: Math.sqrt((held * (1 - held)) / n),
    overBound: variance / boundVariance,
    overBoundError: (variance / boundVariance) * Math.sqrt(2 / n),
    limits: n - pulls.length,
  };
}

async function main() {
  const { values } = parseArgs({
    options: {
      stacks: { type: "string", default: "1000" },
      light: { type: "string", default: "100000,10000,1000" },
      first: { type: "string", default: "0" },
      scenario: { type: "string" },
    },
  });
  const text = values.scenario === undefined ? SCENARIO : readFileSync(values.scenario, "utf8");
  console.log(
    "light in the first frame | quantity | mean pull | spread of pulls | coverage of 95 % | variance over bound",
  );
  for (const light of values.light.split(",").map(Number)) {
    const scenario = scenarioAt(text, light);
    const mean = expectation(scenario);
    const truth = mean.truth;
    const bounds = boundsAtTruth(scenario, mean);
    const answers = await runLevel(text, light, Number(values.first), Number(values.stacks));
    const done = answers.filter((answer) => answer.error === undefined);
    const rows = [
      ["D", "d", truth.diffusion_coefficient_cm2_per_s],
      ["tau", "tau", truth.lifetime_ns],
      ["L", "length", truth.diffusion_length_um],
    ];
    for (const [name, key, value] of rows) {
      const s = summarise(
        done.map((answer) => answer[key]),
        value,
        bounds[key],
      );
      console.log(
        `${light} | ${name} | ${s.mean.toFixed(3)} ± ${s.meanError.toFixed(3)} | ${s.spread.toFixed(3)} | ${(100 * s.coverage).toFixed(1)} ± ${(100 * s.coverageError).toFixed(1)} % | ${s.overBound.toFixed(3)} ± ${s.overBoundError.toFixed(3)}${s.limits > 0 ? ` | ${s.limits} upper limits` : ""}`,
      );
    }
    const count = (key, plain) => done.filter((answer) => answer[key] !== plain).length;
    console.log(
      `${light} | of ${done.length}: ${count("law", "line")} not a line, ${count("decay", "exponential")} not one exponential, ${count("level", "sound")} not sound; ${answers.length - done.length} failed${answers.length > done.length ? ` (${answers.find((a) => a.error).error})` : ""}`,
    );
  }
}

if (isMainThread) await main();
else work();
