/** One picture to write, row-major. */
export interface Picture {
  readonly width: number;
  readonly height: number;
  readonly data: Uint16Array | Float32Array;
}

export interface WriteOptions {
  /** ImageDescription of the first page, ASCII. */
  readonly description?: string;
  /** Packs the pixels, in the zlib format. */
  readonly deflate?: (bytes: Uint8Array) => Uint8Array;
}

/** Tags of one page, as [tag, type, value]; type 3 is 16 bits, 4 is 32 bits. */
type Tag = readonly [tag: number, type: 3 | 4, value: number];

const HEADER_BYTES = 8;
/** Offsets of a classic TIFF have 32 bits. */
const MOST_BYTES = 2 ** 32;
const ASCII = 2;
const DESCRIPTION_TAG = 270;

/**
 * Writes pictures as a classic little-endian TIFF, one page and one strip each: baseline greyscale of TIFF 6.0, and
 * its section 19 for floating point.
 *
 * @throws RangeError when there is no picture, a picture's size and data differ, or the file would pass 4 GB
 */
export function writeTiff(pictures: readonly Picture[], options: WriteOptions = {}): Uint8Array {
  if (pictures.length === 0) throw new RangeError("no picture to write");
  const text = options.description === undefined ? null : asciiBytes(options.description);
  const strips = pictures.map((picture) => stripOf(picture, options.deflate));
  const size = HEADER_BYTES + even(text?.length ?? 0) + totalBytes(strips, text !== null);
  if (size >= MOST_BYTES)
    throw new RangeError(`${size} bytes do not fit in a classic TIFF; write fewer frames`);

  const file = new Uint8Array(size);
  const view = new DataView(file.buffer);
  view.setUint32(0, 0x002a4949, true);
  if (text !== null) file.set(text, HEADER_BYTES);
  let at = HEADER_BYTES + even(text?.length ?? 0);
  let pointer = 4;
  for (const [index, strip] of strips.entries()) {
    file.set(strip, at);
    const tags = tagsOf(pictures[index]!, at, strip.length, options.deflate !== undefined);
    at += even(strip.length);
    view.setUint32(pointer, at, true);
    const described =
      index === 0 && text !== null ? { value: descriptionValue(text), length: text.length } : null;
    at = writeDirectory(view, at, tags, described);
    pointer = at - 4;
  }
  return file;
}

function tagsOf({ width, height, data }: Picture, offset: number, bytes: number, deflated: boolean): Tag[] {
  return [
    [256, 4, width],
    [257, 4, height],
    [258, 3, 8 * data.BYTES_PER_ELEMENT],
    [259, 3, deflated ? 8 : 1],
    [262, 3, 1],
    [273, 4, offset],
    [277, 3, 1],
    [278, 4, height],
    [279, 4, bytes],
    [339, 3, data instanceof Float32Array ? 3 : 1],
  ];
}

/** @returns where the directory ends */
function writeDirectory(
  view: DataView,
  at: number,
  tags: readonly Tag[],
  description: { value: number; length: number } | null,
): number {
  const entries: [number, number, number, number][] = tags.map(([tag, type, value]) => [tag, type, 1, value]);
  if (description !== null) entries.push([DESCRIPTION_TAG, ASCII, description.length, description.value]);
  entries.sort((a, b) => a[0] - b[0]);
  view.setUint16(at, entries.length, true);
  for (const [i, [tag, type, count, value]] of entries.entries()) {
    const entry = at + 2 + 12 * i;
    view.setUint16(entry, tag, true);
    view.setUint16(entry + 2, type, true);
    view.setUint32(entry + 4, count, true);
    view.setUint32(entry + 8, value, true);
  }
  return at + 2 + 12 * entries.length + 4;
}

function totalBytes(strips: readonly Uint8Array[], described: boolean): number {
  const directory = 2 + 12 * 10 + 4;
  const pixels = strips.reduce((sum, strip) => sum + even(strip.length), 0);
  return pixels + strips.length * directory + (described ? 12 : 0);
}

function stripOf({ width, height, data }: Picture, deflate: WriteOptions["deflate"]): Uint8Array {
  if (data.length !== width * height) {
    throw new RangeError(`a picture of ${width} × ${height} holds ${data.length} values`);
  }
  const size = data.BYTES_PER_ELEMENT;
  const bytes = new Uint8Array(data.length * size);
  const view = new DataView(bytes.buffer);
  for (let i = 0; i < data.length; i++) {
    if (data instanceof Uint16Array) view.setUint16(i * size, data[i]!, true);
    else view.setFloat32(i * size, data[i]!, true);
  }
  return deflate === undefined ? bytes : deflate(bytes);
}

/** The end mark included. */
function asciiBytes(text: string): Uint8Array {
  return new TextEncoder().encode(`${text}\0`);
}

/** Where the description lies; up to four bytes stand in the directory entry itself. */
function descriptionValue(bytes: Uint8Array): number {
  if (bytes.length > 4) return HEADER_BYTES;
  return bytes.reduce((value, byte, i) => value + byte * 256 ** i, 0);
}

/** Offsets in a TIFF are even. */
function even(length: number): number {
  return length + (length % 2);
}
