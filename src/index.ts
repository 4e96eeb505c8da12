export type { Acquisition } from "./stack/acquisition.ts";
