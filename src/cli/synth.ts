import { basename, dirname } from "node:path";
import { deflateSync } from "node:zlib";
import { readScenario } from "../field/scenario.ts";
import { picturesOf, synthesise } from "../field/synthesise.ts";
import { discardUnfinished, writeWhole } from "../report/write-whole.ts";
import { InputFault } from "../stack/fault.ts";
import { readTextFile } from "../stack/file-source.ts";
import { writeTiff } from "../stack/tiff/write.ts";
import { seedFrom } from "./arguments.ts";
import { checkFolder, writing } from "./folder.ts";
import { uninterrupted } from "./interrupt.ts";
import { ExitCode } from "./shell.ts";

export interface SynthOptions {
  readonly output: string;
  readonly seed?: string;
}

/** `gleamwalk synth`: a synthetic recording, its acquisition file and the truth about it, all three or none. */
export async function synth(file: string, options: SynthOptions): Promise<ExitCode> {
  const { output } = options;
  const stem = stemOf(output);
  await checkFolder(dirname(output), "-o");
  const scenario = readScenario(readTextFile(file), file);
  const made = synthesise({ ...scenario, seed: seedFrom(options.seed) ?? scenario.seed });
  const files = new Map<string, string | Uint8Array>([
    [basename(output), writeTiff(picturesOf(made), { deflate: deflateSync })],
    [`${stem}.toml`, made.acquisitionToml],
    [`${stem}.truth.json`, `${JSON.stringify(made.truth, null, 2)}\n`],
  ]);
  const written = await writing(output, "-o", () =>
    uninterrupted(() => writeWhole(dirname(output), files), discardUnfinished),
  );
  process.stdout.write(`${written.join("\n")}\n`);
  return ExitCode.done;
}

function stemOf(output: string): string {
  const stem = /^(.+)\.tiff?$/i.exec(basename(output))?.[1];
  if (stem !== undefined) return stem;
  throw new InputFault(`-o ${output} does not end in .tif; name the stack to write, such as -o stack.tif`, {
    where: "-o",
  });
}
