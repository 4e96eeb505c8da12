import { InputFault } from "../fault.ts";

/**
 * How many pictures an ImageDescription of "key=value" lines declares (`images=7`), or null where it does not say.
 *
 * @throws InputFault when the pictures are not one series in time: several channels, or depth as well as time
 */
export function declaredImages(file: string, description: string): number | null {
  const entry = (key: string) => {
    const text = new RegExp(`^${key}=(\\d+)\\s*$`, "m").exec(description)?.[1];
    return text === undefined ? null : Number(text);
  };
  if ((entry("channels") ?? 1) > 1 || ((entry("slices") ?? 1) > 1 && (entry("frames") ?? 1) > 1)) {
    throw new InputFault(
      `${file} holds several channels or depths besides time; save the one channel to analyse as a stack of frames`,
      { file },
    );
  }
  return entry("images");
}
