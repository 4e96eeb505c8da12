import { type Examined, examine } from "../outcome/analyse.ts";
import type { Analysis, AnalysisOptions } from "../outcome/analysis.ts";
import { closurePlan } from "../outcome/closure.ts";
import { hireArtist } from "../report/draw-aside.ts";
import { renderTerminal } from "../report/terminal.ts";
import { CANDIDATE } from "../report/wording.ts";
import { writeReports } from "../report/write.ts";
import { discardUnfinished } from "../report/write-whole.ts";
import { openStack } from "../stack/open.ts";
import type { Stack } from "../stack/stack.ts";
import { seedFrom, windowFrom } from "./arguments.ts";
import { runClosure, stacksFrom } from "./closure.ts";
import { checkFolder, writing } from "./folder.ts";
import { uninterrupted } from "./interrupt.ts";
import { showNote, showProgress } from "./progress.ts";
import { openOptions, type SettingOptions } from "./settings.ts";
import { ExitCode, textWidth, wantsColour } from "./shell.ts";

export interface SpreadOptions extends SettingOptions {
  readonly output?: string;
  readonly from?: string;
  readonly to?: string;
  readonly field?: boolean;
  readonly closure?: string;
  readonly seed?: string;
  readonly json?: boolean;
  readonly quiet?: boolean;
}

/** `gleamwalk spread`: one recording to D, τ, L and μ, with files to keep and a summary to read. */
export async function spread(file: string, options: SpreadOptions): Promise<ExitCode> {
  const seed = seedFrom(options.seed);
  const stacks = stacksFrom(options.closure);
  const field = options.field === undefined ? "auto" : options.field ? "always" : "never";
  const wanted = {
    ...windowFrom(options.from, options.to),
    field,
    ...(seed === undefined ? {} : { seed }),
  } as const;
  const folder = options.output ?? `${withoutEnding(file)}.gleamwalk`;
  await checkFolder(folder, "-o");

  const artist = hireArtist();
  try {
    const checksum = artist.checksum(file);
    const stack = await openStack(file, { ...openOptions(options), sha256: "" });
    const stream = options.quiet === true ? null : process.stderr;
    const examined = analyseWatched(stack, wanted, stream);
    const { analysis } = examined;
    analysis.result.input.sha256 = await checksum;
    if (stacks !== undefined) {
      const plan = closurePlan(examined, wanted);
      analysis.result.closure = await runClosure(plan, stacks, showProgress(stream, "stacks"));
    }
    await writing(folder, "-o", () =>
      uninterrupted(() => writeReports(analysis, folder, artist.draw), discardUnfinished),
    );
    return report(analysis, folder, options);
  } finally {
    artist.end();
  }
}

function report(analysis: Analysis, folder: string, options: SpreadOptions): ExitCode {
  if (options.json === true) process.stdout.write(`${JSON.stringify(analysis.result, null, 2)}\n`);
  else if (options.quiet !== true) process.stdout.write(summary(analysis, folder));
  return analysis.result.verdict.level === "unsound" ? ExitCode.unsound : ExitCode.done;
}

function analyseWatched(stack: Stack, wanted: AnalysisOptions, stream: NodeJS.WriteStream | null): Examined {
  const progress = showProgress(stream);
  const note = showNote(stream);
  try {
    return examine(stack, {
      ...wanted,
      onProgress: progress.update,
      onCandidate(name) {
        progress.end();
        note.update(`whole stack: ${CANDIDATE[name]}`);
      },
    });
  } finally {
    progress.end();
    note.end();
  }
}

function summary(analysis: Analysis, folder: string): string {
  return renderTerminal(analysis, {
    colour: wantsColour(process.stdout),
    width: textWidth(process.stdout),
    report: `${folder}/report.html`,
  });
}

/** NAME of NAME.tif, NAME.tiff and NAME.ome.tif. */
function withoutEnding(file: string): string {
  return file.replace(/(?:\.ome)?\.tiff?$/i, "");
}
