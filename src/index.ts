/**
 * The library's public face: everything here is free of Node's own modules and runs in a page as well.
 * What opens and writes files is in the entry point "gleamwalk/node".
 */
export { readScenario, type Scenario } from "./field/scenario.ts";
export { picturesOf, type Synthetic, synthesise } from "./field/synthesise.ts";
export type { Truth } from "./field/truth.ts";
export type { Covariance, FrameFlag, Spot } from "./frame/spot.ts";
export { analyse } from "./outcome/analyse.ts";
export type { Analysis, AnalysisOptions, CurvePoint } from "./outcome/analysis.ts";
export { type Forecast, forecast } from "./outcome/forecast.ts";
export { type PlanChanges, planFromResult, planFromScenario } from "./outcome/plan.ts";
export {
  type DecayLaw,
  type FrameRow,
  type Law,
  type Quantity,
  type Result,
  resultSchema,
  type TransportLaw,
} from "./outcome/result.ts";
export { framesCsv } from "./report/csv.ts";
export { renderFigures } from "./report/figures.ts";
export { renderReport } from "./report/html.ts";
export { renderTerminal, type TerminalOptions } from "./report/terminal.ts";
export type { Acquisition, Condition, Detector, Measured, Response, Setting } from "./stack/acquisition.ts";
export { acquisitionDefaults } from "./stack/defaults.ts";
export { InputFault } from "./stack/fault.ts";
export { memoryStack } from "./stack/memory-stack.ts";
export type { Stack } from "./stack/stack.ts";
export { writeTiff } from "./stack/tiff/write.ts";
export { version } from "./version.ts";
