/**
 * The library's public face: everything here is free of Node's own modules and runs in a page as well.
 * What opens and writes files is in the entry point "gleamwalk/node".
 */
export type { Acquisition } from "./stack/acquisition.ts";
export { InputFault } from "./stack/fault.ts";
export type { Stack } from "./stack/stack.ts";
export { version } from "./version.ts";
