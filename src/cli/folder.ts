import { stat } from "node:fs/promises";
import { dirname, resolve } from "node:path";
import { InputFault } from "../stack/fault.ts";

/**
 * Refuses a folder that cannot be made because a file stands in its way, before any work is done.
 *
 * @throws InputFault naming the option and the file in the way
 */
export async function checkFolder(folder: string, option: string): Promise<void> {
  for (let path = resolve(folder); ; path = dirname(path)) {
    const found = await stat(path).catch(() => null);
    if (found?.isDirectory()) return;
    if (found !== null)
      throw new InputFault(
        `cannot write to ${folder}: ${path} is a file, not a folder; name another folder with ${option}`,
        { file: path, where: option },
      );
    if (dirname(path) === path) return;
  }
}

/** Runs `write`; what the operating system refuses becomes a fault of the input that names the place. */
export async function writing<T>(place: string, option: string, write: () => T | Promise<T>): Promise<T> {
  try {
    return await write();
  } catch (error) {
    const code = error instanceof Error ? (error as NodeJS.ErrnoException).code : undefined;
    const reason = code === undefined ? undefined : REASONS[code];
    if (reason === undefined) throw error;
    throw new InputFault(`cannot write to ${place}: ${reason}; name another place with ${option}`, {
      file: place,
      where: option,
      cause: error,
    });
  }
}

const REASONS: Readonly<Record<string, string>> = {
  EACCES: "it is not writable for this user",
  EPERM: "it is not writable for this user",
  EROFS: "the disk is read-only",
  ENOENT: "the folder cannot be made there",
  ENOTDIR: "a file stands where a folder is needed",
  EEXIST: "a file stands where a folder is needed",
  EISDIR: "a folder stands where a file is needed",
  ENOTEMPTY: "a folder stands where a file is needed",
  ENOSPC: "the disk is full",
  EDQUOT: "the disk quota is used up",
  ENAMETOOLONG: "the name is too long",
  EMFILE: "too many files are open",
};
