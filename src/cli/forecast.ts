import { forecast as foresee } from "../outcome/forecast.ts";
import { type PlanChanges, planFromResult, planFromScenario } from "../outcome/plan.ts";
import { readTextFile } from "../stack/file-source.ts";
import { forecastText } from "./forecast-text.ts";
import { ExitCode, textWidth } from "./shell.ts";

export interface ForecastOptions extends PlanChanges {
  readonly json?: boolean;
}

/** `gleamwalk forecast`: how precise a planned recording will be, from a scenario or a pilot recording's result. */
export async function forecast(file: string, options: ForecastOptions): Promise<ExitCode> {
  const text = readTextFile(file);
  const plan = /\.json$/i.test(file)
    ? planFromResult(text, file, options)
    : planFromScenario(text, file, options);
  const told = foresee(plan);
  process.stdout.write(
    options.json === true
      ? `${JSON.stringify(told, null, 2)}\n`
      : forecastText(told, textWidth(process.stdout)),
  );
  return ExitCode.done;
}
