import { InputFault } from "../fault.ts";
import type { ByteSource } from "./source.ts";

/** The tags of one image file directory that matter here, each as numbers or, for text, as a string. */
export interface Directory {
  readonly numbers: ReadonlyMap<number, readonly number[]>;
  readonly texts: ReadonlyMap<number, string>;
}

export interface Directories {
  readonly littleEndian: boolean;
  readonly list: readonly Directory[];
}

/** Tag numbers of TIFF 6.0 (Adobe 1992), sections 8 to 19. */
export const TAG = {
  newSubfileType: 254,
  subfileType: 255,
  width: 256,
  height: 257,
  bitsPerSample: 258,
  compression: 259,
  photometric: 262,
  fillOrder: 266,
  description: 270,
  stripOffsets: 273,
  orientation: 274,
  samplesPerPixel: 277,
  rowsPerStrip: 278,
  stripByteCounts: 279,
  predictor: 317,
  tileWidth: 322,
  tileHeight: 323,
  tileOffsets: 324,
  tileByteCounts: 325,
  sampleFormat: 339,
} as const;

const WANTED = new Set<number>(Object.values(TAG));

/** Bytes of one value by field type: TIFF 6.0 section 2, and 13 and 16 to 18 of BigTIFF. */
const TYPE_BYTES: Readonly<Record<number, number>> = {
  1: 1,
  2: 1,
  3: 2,
  4: 4,
  5: 8,
  6: 1,
  7: 1,
  8: 2,
  9: 4,
  10: 8,
  11: 4,
  12: 8,
  13: 4,
  16: 8,
  17: 8,
  18: 8,
};

/** More tags than this in one directory, or more pages in one file, and the file is taken for damaged. */
const MOST_TAGS = 4096;
const MOST_PAGES = 200_000;
const TEXT_TYPE = 2;
/** Only unsigned fields carry a meaning for the tags read here. */
const UNSIGNED_TYPES: ReadonlySet<number> = new Set([1, 3, 4, 13, 16, 18]);

interface Format {
  readonly littleEndian: boolean;
  readonly big: boolean;
}

/**
 * Walks the chain of image file directories of a classic TIFF or a BigTIFF.
 *
 * Every offset and count is checked against the size of the file before it is followed.
 * @throws InputFault when the file is no TIFF, is cut, or its directories run in a circle
 */
export function readDirectories(source: ByteSource): Directories {
  const format = readFormat(source);
  const list: Directory[] = [];
  const seen = new Set<number>();
  let offset = format.first;
  while (offset !== 0) {
    if (seen.has(offset)) {
      throw damaged(source, `its directories run in a circle after page ${list.length}`);
    }
    if (list.length >= MOST_PAGES) throw damaged(source, `it lists more than ${MOST_PAGES} pages`);
    seen.add(offset);
    const { directory, next } = readDirectory(source, format, offset, list.length + 1);
    list.push(directory);
    offset = next;
  }
  if (list.length === 0) throw damaged(source, "it holds no page");
  return { littleEndian: format.littleEndian, list };
}

function readFormat(source: ByteSource): Format & { first: number } {
  if (source.size === 0) {
    throw new InputFault(`${source.name} is empty (0 bytes); copy or save the recording again`, {
      file: source.name,
    });
  }
  const head =
    source.size >= 8 ? new Uint8Array(source.read(0, Math.min(16, source.size))) : new Uint8Array(8);
  const littleEndian = head[0] === 0x49 && head[1] === 0x49;
  const bigEndian = head[0] === 0x4d && head[1] === 0x4d;
  const view = new DataView(head.buffer);
  const magic = view.getUint16(2, littleEndian);
  if (!(littleEndian || bigEndian) || !(magic === 42 || magic === 43)) {
    throw new InputFault(`${source.name} is not a TIFF image; give a recording saved as TIFF`, {
      file: source.name,
    });
  }
  if (magic === 42) return { littleEndian, big: false, first: view.getUint32(4, littleEndian) };
  if (head.length < 16 || view.getUint16(4, littleEndian) !== 8) {
    throw damaged(source, "its BigTIFF header is not complete");
  }
  return { littleEndian, big: true, first: Number(view.getBigUint64(8, littleEndian)) };
}

function readDirectory(source: ByteSource, format: Format, offset: number, page: number) {
  const { littleEndian, big } = format;
  const countBytes = big ? 8 : 2;
  const entryBytes = big ? 20 : 12;
  const pointerBytes = big ? 8 : 4;
  const what = `the directory of page ${page}`;
  const count = toNumber(view(source, offset, countBytes, what), 0, countBytes, littleEndian);
  if (count > MOST_TAGS) throw damaged(source, `${what} lists ${count} tags`);
  const block = view(source, offset + countBytes, count * entryBytes + pointerBytes, what);
  const numbers = new Map<number, readonly number[]>();
  const texts = new Map<number, string>();
  for (let i = 0; i < count; i++) {
    const at = i * entryBytes;
    const tag = block.getUint16(at, littleEndian);
    if (!WANTED.has(tag)) continue;
    const type = block.getUint16(at + 2, littleEndian);
    const bytes = valueBytes(source, format, block, at, `tag ${tag} of page ${page}`);
    if (type === TEXT_TYPE) texts.set(tag, decodeText(bytes));
    else if (UNSIGNED_TYPES.has(type)) numbers.set(tag, decodeNumbers(bytes, type, littleEndian));
    else throw damaged(source, `tag ${tag} of page ${page} holds no whole number`);
  }
  const next = toNumber(block, count * entryBytes, pointerBytes, littleEndian);
  return { directory: { numbers, texts }, next };
}

/** The bytes of one entry's value, from inside the entry where they fit there, else from where it points to. */
function valueBytes(source: ByteSource, format: Format, block: DataView, at: number, what: string): DataView {
  const { littleEndian, big } = format;
  const inlineBytes = big ? 8 : 4;
  const size = TYPE_BYTES[block.getUint16(at + 2, littleEndian)];
  if (size === undefined) throw damaged(source, `${what} has a field type that does not exist`);
  const length = size * toNumber(block, at + 4, inlineBytes, littleEndian);
  if (length <= inlineBytes)
    return new DataView(block.buffer, block.byteOffset + at + 4 + inlineBytes, length);
  return view(source, toNumber(block, at + 4 + inlineBytes, inlineBytes, littleEndian), length, what);
}

function view(source: ByteSource, offset: number, length: number, what: string): DataView {
  if (!(offset + length <= source.size)) {
    throw damaged(source, `${what} lies beyond the end of the file (${source.size} bytes)`);
  }
  // Copied: the source may use its buffer again for the next read.
  return new DataView(new Uint8Array(source.read(offset, length)).buffer);
}

function toNumber(block: DataView, at: number, bytes: number, littleEndian: boolean): number {
  if (bytes === 2) return block.getUint16(at, littleEndian);
  if (bytes === 4) return block.getUint32(at, littleEndian);
  return Number(block.getBigUint64(at, littleEndian));
}

function decodeNumbers(bytes: DataView, type: number, littleEndian: boolean): number[] {
  const size = TYPE_BYTES[type] ?? 1;
  const values = new Array<number>(bytes.byteLength / size);
  for (let i = 0; i < values.length; i++) {
    values[i] = size === 1 ? bytes.getUint8(i) : toNumber(bytes, i * size, size, littleEndian);
  }
  return values;
}

function decodeText(bytes: DataView): string {
  const text = new TextDecoder().decode(bytes);
  const end = text.indexOf("\0");
  return end < 0 ? text : text.slice(0, end);
}

/** The fault of a file that is a TIFF but not a whole one. */
export function damaged(source: ByteSource, why: string): InputFault {
  return new InputFault(
    `${source.name} is damaged or was cut: ${why}; copy it again from where it was recorded`,
    {
      file: source.name,
    },
  );
}
