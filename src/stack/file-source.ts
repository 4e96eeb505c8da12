import { createHash } from "node:crypto";
import { closeSync, openSync, readdirSync, readFileSync, readSync, statSync } from "node:fs";
import { basename, dirname, join } from "node:path";
import { inflateSync } from "node:zlib";
import { InputFault } from "./fault.ts";
import { nearest } from "./nearest.ts";
import type { Decompress } from "./tiff/codecs.ts";
import type { ByteSource } from "./tiff/source.ts";

const HASH_BLOCK = 4 * 2 ** 20;

/** A file system gives so many bytes for the price of one. */
const BLOCK = 4096;

/**
 * A file read piece by piece, never as a whole, through one buffer. Small pieces (a directory's fields) come from a
 * block that is read around them.
 */
export function fileSource(path: string): ByteSource {
  const size = fileSize(path);
  let buffer = new Uint8Array(0);
  const block = new Uint8Array(Math.min(BLOCK, size));
  let blockStart = Number.POSITIVE_INFINITY;
  const fill = (bytes: Uint8Array, offset: number): void => {
    if (attempt(path, () => readInto(source, bytes, offset)) === bytes.length) return;
    throw new InputFault(
      `${path} became shorter while it was read; wait until it is copied and start again`,
      { file: path },
    );
  };
  const source: ByteSource = {
    name: path,
    size,
    read(offset, length) {
      if (length > block.length / 2) {
        if (buffer.length < length) buffer = new Uint8Array(length);
        const bytes = buffer.subarray(0, length);
        fill(bytes, offset);
        return bytes;
      }
      if (offset < blockStart || offset + length > blockStart + block.length) {
        blockStart = Math.min(offset, size - block.length);
        fill(block, blockStart);
      }
      return block.subarray(offset - blockStart, offset - blockStart + length);
    },
  };
  return source;
}

/** SHA-256 of a whole source, in hexadecimal. */
export function sha256Of(source: ByteSource): string {
  const hash = createHash("sha256");
  for (let at = 0; at < source.size; at += HASH_BLOCK) {
    hash.update(source.read(at, Math.min(HASH_BLOCK, source.size - at)));
  }
  return hash.digest("hex");
}

/** Text of a file that a setting points to or that lies beside the recording. */
export function readTextFile(path: string): string {
  fileSize(path);
  const text = attempt(path, () => readFileSync(path));
  if (text.includes(0)) throw new InputFault(`${path} is not a text file; give plain text`, { file: path });
  return text.toString("utf8");
}

/** Deflate by zlib, which checks the data's checksum and stops at the length asked for. */
export const inflate: Decompress = (packed, length) =>
  inflateSync(packed, { maxOutputLength: Math.max(length, 1) });

/**
 * The source that was read last keeps its file open until another one is read: to open it for every frame would cost as
 * much as to read the frame, and many stacks at once still hold one file open.
 */
let open: { readonly source: ByteSource; readonly descriptor: number } | null = null;

function descriptorOf(source: ByteSource): number {
  if (open?.source !== source) {
    if (open !== null) closeSync(open.descriptor);
    open = null;
    open = { source, descriptor: openSync(source.name, "r") };
  }
  return open.descriptor;
}

function readInto(source: ByteSource, bytes: Uint8Array, offset: number): number {
  const descriptor = descriptorOf(source);
  let got = 0;
  while (got < bytes.length) {
    const more = readSync(descriptor, bytes, got, bytes.length - got, offset + got);
    if (more === 0) break;
    got += more;
  }
  return got;
}

function fileSize(path: string): number {
  const stat = attempt(path, () => statSync(path));
  if (stat.isDirectory()) {
    throw new InputFault(`${path} is a directory; give a file in it`, { file: path });
  }
  if (!stat.isFile()) throw new InputFault(`${path} is not a regular file; give a file`, { file: path });
  return stat.size;
}

function attempt<T>(path: string, action: () => T): T {
  try {
    return action();
  } catch (error) {
    const code = error instanceof Error && "code" in error ? String(error.code) : "";
    const context = { file: path, cause: error };
    if (code === "ENOENT" || code === "ENOTDIR") {
      throw new InputFault(`${path} does not exist; ${suggestion(path)}`, context);
    }
    if (code === "EACCES" || code === "EPERM") {
      throw new InputFault(`${path} may not be read; ask for the right to read it, or copy it`, context);
    }
    if (!code.startsWith("E") || error instanceof InputFault) throw error;
    throw new InputFault(`${path} could not be read (${code}); check the disk and start again`, context);
  }
}

function suggestion(path: string): string {
  const folder = dirname(path);
  let names: string[];
  try {
    names = readdirSync(folder);
  } catch {
    return `the folder ${folder} does not exist either`;
  }
  const near = nearest(basename(path), names);
  return near === null ? "check the name and the folder" : `did you mean ${join(folder, near)}?`;
}
