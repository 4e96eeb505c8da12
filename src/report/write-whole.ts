import { randomBytes } from "node:crypto";
import {
  existsSync,
  mkdirSync,
  readdirSync,
  renameSync,
  rmdirSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import { basename, dirname, join } from "node:path";
import { InputFault } from "../stack/fault.ts";

const unfinished = new Set<string>();

/** Removes what an interrupted write left behind; for a handler of interrupts and for the end of the process. */
export function discardUnfinished(): void {
  const paths = [...unfinished];
  unfinished.clear();
  for (const path of paths) {
    try {
      rmSync(path, { force: true });
    } catch {
      // a name the disk refuses was never written; whatever stopped the write is what the user must hear about
    }
  }
}

/**
 * Writes files so that they appear whole or not at all: first all of them under temporary names in the same folder,
 * then renamed into place. If anything fails, the temporary files and any folder made for them go, and older files
 * stay as they were.
 *
 * @param files content by path relative to `directory`, with "/" between its parts
 * @returns the paths written
 * @throws InputFault where the folder cannot be written
 */
export function writeWhole(directory: string, files: ReadonlyMap<string, string | Uint8Array>): string[] {
  const made: string[] = [];
  const moves: { readonly from: string; readonly to: string }[] = [];
  try {
    for (const [name, content] of files) {
      const to = join(directory, name);
      makeFolder(dirname(to), made);
      refuseFolderInTheWay(to);
      const from = join(
        dirname(to),
        `.${basename(to)}.${process.pid}.${randomBytes(4).toString("hex")}.part`,
      );
      unfinished.add(from);
      writeFileSync(from, content, { flag: "wx" });
      moves.push({ from, to });
    }
    for (const { from, to } of moves) {
      renameSync(from, to);
      unfinished.delete(from);
    }
  } catch (cause) {
    discardUnfinished();
    for (const folder of made.reverse()) removeIfEmpty(folder);
    throw writeFault(directory, cause);
  }
  return moves.map(({ to }) => to);
}

function makeFolder(folder: string, made: string[]): void {
  if (existsSync(folder) && statSync(folder).isDirectory()) return;
  const parent = dirname(folder);
  if (parent !== folder) makeFolder(parent, made);
  mkdirSync(folder);
  made.push(folder);
}

function refuseFolderInTheWay(path: string): void {
  if (existsSync(path) && statSync(path).isDirectory()) {
    throw Object.assign(new Error(`${path} is a folder`), { code: "EISDIR", path });
  }
}

function removeIfEmpty(folder: string): void {
  if (existsSync(folder) && readdirSync(folder).length === 0) rmdirSync(folder);
}

const REASON: Readonly<Record<string, string>> = {
  EACCES: "you may not write there",
  EPERM: "you may not write there",
  EROFS: "the disk is read-only",
  ENOSPC: "the disk is full",
  EDQUOT: "your share of the disk is full",
  EEXIST: "a file is in the way",
  ENOTDIR: "a file is in the way",
  EISDIR: "a folder with the name of one of the result's files is in the way",
  ENAMETOOLONG: "the name is too long",
};

function writeFault(directory: string, cause: unknown): unknown {
  const code = cause instanceof Error && "code" in cause ? String(cause.code) : "";
  const reason = REASON[code];
  if (reason === undefined) return cause;
  return new InputFault(
    `${directory}: the result cannot be written because ${reason}; choose another folder with -o.`,
    {
      file: directory,
      where: "-o",
      cause,
    },
  );
}
