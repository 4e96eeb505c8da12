import { Command, CommanderError, Option } from "commander";
import { version } from "../version.ts";
import type { ForecastOptions } from "./forecast.ts";
import type { InspectOptions } from "./inspect.ts";
import { addSetting, type SettingOptions } from "./settings.ts";
import { complain, ExitCode } from "./shell.ts";
import type { SpreadOptions } from "./spread.ts";
import type { SynthOptions } from "./synth.ts";

/**
 * Runs the command line `argv` (without node and script) and gives the exit code.
 *
 * Each command is loaded when it is called: what one does not need costs it no start-up time.
 */
export async function runProgram(argv: readonly string[]): Promise<ExitCode> {
  if (argv.length === 0) {
    complain("no command is given; start with gleamwalk spread STACK, or see gleamwalk --help");
    return ExitCode.wrongInput;
  }
  let code: ExitCode = ExitCode.done;
  const program = buildProgram((outcome) => {
    code = outcome;
  });
  try {
    await program.parseAsync(argv, { from: "user" });
    return code;
  } catch (error) {
    if (!(error instanceof CommanderError)) throw error;
    return error.exitCode === 0 ? ExitCode.done : ExitCode.wrongInput;
  }
}

function buildProgram(finish: (code: ExitCode) => void): Command {
  const program = new Command("gleamwalk")
    .description(
      "From a recording of a spreading spot of light to a diffusion coefficient, lifetime, " +
        "diffusion length and mobility, each with an uncertainty.",
    )
    .version(version, "-V, --version", "print the version")
    .helpOption("-h, --help", "print this help")
    .helpCommand("help [command]", "print the help of a command")
    .exitOverride()
    .configureOutput({ outputError: (text) => complain(oneSentence(text)) })
    .addHelpText(
      "after",
      "\nExit codes: 0 done; 2 the input or the call is wrong; 3 done, but the verdict\n" +
        "is unsound; 1 a fault of the program.",
    );

  spreadCommand(program).action(async (stack: string, options: SpreadOptions) => {
    finish(await (await import("./spread.ts")).spread(stack, options));
  });
  inspectCommand(program).action(async (stack: string, options: InspectOptions) => {
    finish(await (await import("./inspect.ts")).inspect(stack, options));
  });
  synthCommand(program).action(async (scenario: string, options: SynthOptions) => {
    finish(await (await import("./synth.ts")).synth(scenario, options));
  });
  forecastCommand(program).action(async (plan: string, options: ForecastOptions) => {
    finish(await (await import("./forecast.ts")).forecast(plan, options));
  });
  return program;
}

function spreadCommand(program: Command): Command {
  const command = program
    .command("spread")
    .summary("analyse a recording: D, lifetime, diffusion length, mobility, verdict, report")
    .description(
      "Analyse the recording STACK (a TIFF) and write result.json, frames.csv, figures/*.svg and " +
        "report.html. What the picture cannot tell (pixel size, delays, detector) is read from the " +
        "acquisition file, NAME.toml beside NAME.tif; the options below override it.",
    )
    .argument("<STACK>", "TIFF: one page a frame, or one page for a streak trace")
    .option("-o, --output <DIR>", "folder to write to (default: STACK without its ending plus .gleamwalk)")
    .option(
      "--from <TIME>",
      'first delay of the law of spread, such as "1 ns" or "500 ps"; a bare number is ns',
    )
    .option("--to <TIME>", "last delay of the law of spread")
    .option("--field", "fit the whole stack at once even where nothing speaks against the widths")
    .option("--no-field", "never fit the whole stack at once")
    .option("--closure <N>", "draw N stacks from the fitted model, analyse each, report bias and coverage")
    .option("--seed <N>", "seed of the Monte Carlo intervals and of --closure");
  return addSettingOptions(command)
    .option("--json", "print the result as JSON to stdout and nothing else there")
    .option("-q, --quiet", "print nothing but faults");
}

function inspectCommand(program: Command): Command {
  const command = program
    .command("inspect")
    .summary("say what a file holds, before any fit")
    .description(
      "Say what the file STACK holds: size, delays, light in each frame, noise, saturation, the " +
        "settings with where each came from, and what `gleamwalk spread` would still need.",
    )
    .argument("<STACK>", "TIFF: one page a frame, or one page for a streak trace");
  return addSettingOptions(command).option("--json", "print the facts as JSON to stdout and nothing else");
}

function synthCommand(program: Command): Command {
  return program
    .command("synth")
    .summary("write a synthetic recording with known truth")
    .description(
      "Write a synthetic recording from SCENARIO: the stack, its acquisition file (.toml) and the " +
        "truth (.truth.json) beside it. The same scenario and seed give the same files.",
    )
    .argument("<SCENARIO.toml>", "the scenario: spot, motion, decay, traps, detector, delays")
    .requiredOption("-o, --output <STACK.tif>", "the stack to write")
    .option("--seed <N>", "seed of the noise (default: the scenario's, else 1)");
}

function forecastCommand(program: Command): Command {
  return program
    .command("forecast")
    .summary("how precise a planned recording will be, and what would halve the error")
    .description(
      "Tell from PLAN how precise D, lifetime, diffusion length and trap parameters will be, and what " +
        "would halve the error of D. PLAN is a scenario as for `gleamwalk synth`, or a pilot recording " +
        "or its result.json; the options below change it.",
    )
    .argument("<PLAN>", "SCENARIO.toml, result.json or STACK.tif")
    .option("--photons <N>", "detected photons in the first frame after the pulse")
    .option("--frames <N>", "number of frames")
    .option("--first <TIME>", 'delay of the first frame, such as "-1 ns"; a bare number is ns')
    .option("--step <TIME>", "time from frame to frame")
    .option("--sigma0 <LENGTH>", 'standard deviation of the spot, such as "0.3 um"; a bare number is µm')
    .option("--json", "print the forecast as JSON to stdout and nothing else");
}

function addSettingOptions(command: Command): Command {
  return command
    .option("-a, --acquisition <FILE>", "acquisition file (default: STACK with the ending .toml)")
    .option("--axes <AXES>", "TYX for a stack; TX or XT for a streak trace")
    .option("--pixel <LENGTH>", 'side of a pixel at the sample, such as "0.100 um ± 1 %"')
    .option("--first <TIME>", "delay of the first frame; the pulse is at 0")
    .option("--step <TIME>", "time from frame to frame")
    .option("--gate <TIME>", "how long each frame collects")
    .option("--temperature <T>", 'such as "295 K ± 2 K"; without it no mobility is given')
    .addOption(
      new Option(
        "--set <KEY=VALUE>",
        "any other acquisition key, such as detector.offset=100 (repeatable)",
      ).argParser(addSetting),
    );
}

/** The library says "error: …" on one line and its suggestion in brackets on the next. */
function oneSentence(text: string): string {
  const sentence = text
    .trim()
    .replace(/^error: /, "")
    .replace(/\s*\n\s*/g, " ");
  return /\bhelp\b|^Usage/.test(sentence) ? sentence : `${sentence}; gleamwalk --help lists what there is`;
}

export type { SettingOptions };
