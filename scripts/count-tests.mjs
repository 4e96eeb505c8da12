// Prints "N passed, N failed" from the test runner's JSON report. A test file that could not be loaded has no
// tests of its own and counts as one failed.
import { readFileSync } from "node:fs";

const report = JSON.parse(readFileSync(process.argv[2], "utf8"));
const unloaded = report.testResults.filter(
  (file) => file.status === "failed" && file.assertionResults.length === 0,
).length;
console.log(`${report.numPassedTests} passed, ${report.numFailedTests + unloaded} failed`);
