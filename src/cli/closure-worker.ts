import { parentPort, workerData } from "node:worker_threads";
import { type ClosurePlan, drawClosure } from "../outcome/closure.ts";

// Draws and analyses the stacks whose numbers it is sent, one at a time.
const plan = workerData as ClosurePlan;
parentPort?.on("message", (index: number) => parentPort?.postMessage(drawClosure(plan, index)));
