#!/usr/bin/env node
import { runProgram } from "./program.ts";
import { keepQuietAboutClosedPipes, reportFault } from "./shell.ts";

keepQuietAboutClosedPipes();
process.exitCode = await runProgram(process.argv.slice(2)).catch(reportFault);
