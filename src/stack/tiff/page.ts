import { InputFault } from "../fault.ts";
import { COMPRESSION, compressionName } from "./codecs.ts";
import { type Directory, damaged, TAG } from "./directory.ts";
import type { ByteSource } from "./source.ts";

/** How one sample is stored. */
export interface SampleType {
  readonly kind: "uint" | "int" | "float";
  readonly bytes: 1 | 2 | 4 | 8;
}

/** One page of grey values: its size, how its samples are stored, and where its strips or tiles lie. */
export interface Page {
  readonly width: number;
  readonly height: number;
  readonly sample: SampleType;
  readonly compression: number;
  readonly predictor: number;
  /** Width and height of one segment: a strip is as wide as the page. */
  readonly segmentWidth: number;
  readonly segmentHeight: number;
  readonly tiled: boolean;
  /** Row-major over the page. */
  readonly offsets: readonly number[];
  readonly byteCounts: readonly number[];
  readonly description: string;
}

/** Above this a page is refused: one frame alone would take half a gigabyte as numbers. */
const MOST_PIXELS = 2 ** 26;

/** No codec here packs tighter: LZW reaches about 1365 : 1, deflate 1032 : 1 (zlib's own documentation), PackBits 64 : 1. */
const TIGHTEST = 1400;

/**
 * The directories that hold frames: those marked as masks, or as a smaller version of another page (NewSubfileType,
 * or SubfileType 2 of older files), are passed over. A page marked as smaller that is not smaller is a frame.
 */
export function frameDirectories(list: readonly Directory[]): readonly Directory[] {
  const pixels = (directory: Directory) => first(directory, TAG.width, 0) * first(directory, TAG.height, 0);
  const isMask = (directory: Directory) =>
    (first(directory, TAG.newSubfileType, 0) & 4) !== 0 && first(directory, TAG.photometric, 1) === 4;
  const isMarked = (directory: Directory) =>
    (first(directory, TAG.newSubfileType, 0) & 1) !== 0 || first(directory, TAG.subfileType, 1) === 2;
  const pictures = list.filter((directory) => !isMask(directory));
  const whole = pictures.find((directory) => !isMarked(directory)) ?? pictures[0];
  const isSmaller = (directory: Directory) => pixels(directory) > 0 && pixels(directory) < pixels(whole!);
  return pictures.filter((directory) => !(isMarked(directory) && isSmaller(directory)));
}

/**
 * Checks one directory and says where its pixels lie.
 * @param number the page as the user counts it, from 1
 * @throws InputFault when the page is coloured, of a kind that is not read, or not wholly inside the file
 */
export function readPage(source: ByteSource, directory: Directory, number: number): Page {
  const refuse = (why: string, mend: string) =>
    new InputFault(`${source.name}, page ${number}, ${why}; ${mend}`, {
      file: source.name,
      where: `frame ${number}`,
    });
  refuseForeign(directory, refuse);
  const sample = sampleType(directory, refuse);
  const width = first(directory, TAG.width, 0);
  const height = first(directory, TAG.height, 0);
  if (!(width > 0 && height > 0)) throw damaged(source, `page ${number} has no width or no height`);
  if (width * height > MOST_PIXELS) {
    throw refuse(
      `claims ${width} × ${height} pixels`,
      "crop it to the spot, or copy it again if it is smaller",
    );
  }
  const page: Page = {
    width,
    height,
    sample,
    compression: first(directory, TAG.compression, COMPRESSION.none),
    predictor: first(directory, TAG.predictor, 1),
    ...segments(directory, width, height),
    description: directory.texts.get(TAG.description) ?? "",
  };
  checkCoding(page, refuse);
  return withCheckedSegments(source, page, number);
}

type Refuse = (why: string, mend: string) => InputFault;

function refuseForeign(directory: Directory, refuse: Refuse): void {
  const photometric = first(directory, TAG.photometric, 1);
  if (first(directory, TAG.samplesPerPixel, 1) !== 1 || (photometric !== 0 && photometric !== 1)) {
    throw refuse("is a colour image", "save the camera's grey values, one number a pixel");
  }
  if (photometric === 0) {
    throw refuse(
      "stores white as zero, so its numbers fall where the light rises",
      "save it with black as zero",
    );
  }
  if (first(directory, TAG.orientation, 1) > 1) {
    throw refuse("asks to be turned or mirrored for display", "save it the way it is to be read");
  }
  if (first(directory, TAG.fillOrder, 1) !== 1) {
    throw refuse("stores its bits in reverse order", "save it as plain TIFF");
  }
}

function sampleType(directory: Directory, refuse: Refuse): SampleType {
  const bits = first(directory, TAG.bitsPerSample, 1);
  const format = first(directory, TAG.sampleFormat, 1);
  const bytes = bits / 8;
  const known = bytes === 1 || bytes === 2 || bytes === 4 || bytes === 8;
  const kind = format === 2 ? "int" : format === 3 ? "float" : format === 1 || format === 4 ? "uint" : null;
  if (!known || kind === null || (kind === "float" && bytes < 4)) {
    throw refuse(
      `stores ${bits}-bit samples of format ${format}`,
      "save it as 8-, 16- or 32-bit integers or 32-bit floating point",
    );
  }
  return { kind, bytes };
}

function segments(directory: Directory, width: number, height: number) {
  const tiled = directory.numbers.has(TAG.tileOffsets);
  const { numbers } = directory;
  return {
    tiled,
    segmentWidth: tiled ? first(directory, TAG.tileWidth, 0) : width,
    segmentHeight: tiled
      ? first(directory, TAG.tileHeight, 0)
      : Math.min(first(directory, TAG.rowsPerStrip, height), height),
    offsets: numbers.get(tiled ? TAG.tileOffsets : TAG.stripOffsets) ?? [],
    byteCounts: numbers.get(tiled ? TAG.tileByteCounts : TAG.stripByteCounts) ?? [],
  };
}

function checkCoding(page: Page, refuse: Refuse): void {
  if (!Object.values<number>(COMPRESSION).includes(page.compression)) {
    throw refuse(
      `is compressed by ${compressionName(page.compression)}, which is not read`,
      "save it uncompressed, or with LZW or deflate",
    );
  }
  const { predictor, sample, compression } = page;
  const fits = predictor === 1 || predictor === 2 || (predictor === 3 && sample.kind === "float");
  if (usesPredictor(compression) && !fits) {
    throw refuse(`uses predictor ${predictor}, which is not read`, "save it without a predictor");
  }
}

/** Whether a predictor may stand before this compression. */
export function usesPredictor(compression: number): boolean {
  const { lzw, deflate, oldDeflate } = COMPRESSION;
  return compression === lzw || compression === deflate || compression === oldDeflate;
}

/** Bytes of segment `index` once unpacked: the last strip may be shorter, a tile is always whole. */
export function unpackedBytes(page: Page, index: number): number {
  const rows = page.tiled
    ? page.segmentHeight
    : Math.min(page.segmentHeight, page.height - index * page.segmentHeight);
  return page.segmentWidth * rows * page.sample.bytes;
}

function withCheckedSegments(source: ByteSource, page: Page, number: number): Page {
  const { segmentWidth, segmentHeight, offsets, compression } = page;
  if (!(segmentWidth > 0 && segmentHeight > 0) || segmentWidth * segmentHeight > MOST_PIXELS) {
    throw damaged(source, `page ${number} has strips or tiles of an impossible size`);
  }
  const needed = Math.ceil(page.width / segmentWidth) * Math.ceil(page.height / segmentHeight);
  const plain = compression === COMPRESSION.none;
  // TIFF 6.0 asks for the byte counts; old writers left them out of plain files, where they follow from the size.
  const byteCounts =
    page.byteCounts.length === 0 && plain ? offsets.map((_, i) => unpackedBytes(page, i)) : page.byteCounts;
  if (offsets.length < needed || byteCounts.length < needed) {
    throw damaged(source, `page ${number} lists ${offsets.length} of the ${needed} strips or tiles it needs`);
  }
  for (let i = 0; i < needed; i++) checkSegment(source, page, i, byteCounts[i]!, number);
  return { ...page, byteCounts };
}

function checkSegment(source: ByteSource, page: Page, index: number, stored: number, number: number): void {
  const offset = page.offsets[index]!;
  if (!(offset >= 8 && stored > 0 && offset + stored <= source.size)) {
    throw damaged(source, `page ${number} needs bytes ${offset} to ${offset + stored} of ${source.size}`);
  }
  const unpacked = unpackedBytes(page, index);
  if (!isPlausible(page, stored, unpacked)) {
    throw damaged(source, `page ${number} keeps ${unpacked} bytes of pixels in ${stored} bytes`);
  }
}

/**
 * Plain pixels may be padded, up to a whole strip at the end of a page, but bytes by half more than fit mean that the
 * page's size or sample type is wrong. Packed pixels may be somewhat larger than plain ones.
 */
function isPlausible(page: Page, stored: number, unpacked: number): boolean {
  if (page.compression !== COMPRESSION.none)
    return stored * TIGHTEST >= unpacked && stored <= 2 * unpacked + 1024;
  const whole = page.segmentWidth * page.segmentHeight * page.sample.bytes;
  return stored >= unpacked && stored < 1.5 * whole;
}

function first(directory: Directory, tag: number, otherwise: number): number {
  return directory.numbers.get(tag)?.[0] ?? otherwise;
}
