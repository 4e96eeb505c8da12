import type { Scenario } from "../field/scenario.ts";
import { analyse } from "../outcome/analyse.ts";
import { forecast as foresee } from "../outcome/forecast.ts";
import { type PlanChanges, planFromResult, planFromScenario } from "../outcome/plan.ts";
import { readTextFile } from "../stack/file-source.ts";
import { openStack } from "../stack/open.ts";
import { forecastText } from "./forecast-text.ts";
import { ExitCode, textWidth } from "./shell.ts";

export interface ForecastOptions extends PlanChanges {
  readonly json?: boolean;
}

/** `gleamwalk forecast`: how precise a planned recording will be, from a scenario or a pilot recording. */
export async function forecast(file: string, options: ForecastOptions): Promise<ExitCode> {
  const plan = await planOf(file, options);
  const told = foresee(plan);
  process.stdout.write(
    options.json === true
      ? `${JSON.stringify(told, null, 2)}\n`
      : forecastText(told, textWidth(process.stdout)),
  );
  return ExitCode.done;
}

/** A recording is analysed first, with the acquisition file beside it. */
async function planOf(file: string, changes: PlanChanges): Promise<Scenario> {
  if (/\.tiff?$/i.test(file)) {
    const { result } = analyse(await openStack(file, {}));
    return planFromResult(JSON.stringify(result), file, changes);
  }
  const text = readTextFile(file);
  return /\.json$/i.test(file) ? planFromResult(text, file, changes) : planFromScenario(text, file, changes);
}
