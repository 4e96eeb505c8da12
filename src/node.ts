/** What opens and writes files: the part of the library that needs Node's own modules. */
export { writeReports } from "./report/write.ts";
export { type FrameInspection, type Inspection, inspectStack } from "./stack/inspect.ts";
export { type OpenOptions, openRaw, openStack, type RawStack } from "./stack/open.ts";
