import { InputFault } from "../fault.ts";
import { COMPRESSION, type Decompress, decompressorFor } from "./codecs.ts";
import { declaredImages } from "./description.ts";
import { damaged, readDirectories } from "./directory.ts";
import { frameDirectories, type Page, readPage, unpackedBytes, usesPredictor } from "./page.ts";
import { asSamples, copySamples, largestCount, unpredicted } from "./samples.ts";
import type { ByteSource } from "./source.ts";

/** Pictures of one size, one behind the other, as a TIFF holds them. */
export interface Pictures {
  readonly count: number;
  readonly height: number;
  readonly width: number;
  /** "uint16", "float32", … */
  readonly sampleType: string;
  /** See {@link largestCount}. */
  readonly largest: number | null;
  /** ImageDescription of the first page. */
  readonly description: string;
  /** Copies picture `index` (0-based) into `into`, row-major, as stored. */
  read(index: number, into: Float64Array): void;
}

/**
 * Reads the plan of a TIFF: its directories are walked and checked, its pixels stay where they are until asked for.
 *
 * @param inflate see {@link decompressorFor}
 * @throws InputFault when the file is not wholly readable as grey pictures of one size
 */
export async function openTiff(source: ByteSource, inflate?: Decompress): Promise<Pictures> {
  const { littleEndian, list } = readDirectories(source);
  const pages = frameDirectories(list).map((directory, index) => readPage(source, directory, index + 1));
  const [firstPage] = pages;
  if (firstPage === undefined) throw damaged(source, "it holds masks only");
  checkAlike(source, pages);
  const all = withContiguous(source, pages);
  refuseOverlap(source, all);
  const unpack = await decompressors(all, inflate);
  return {
    count: all.length,
    height: firstPage.height,
    width: firstPage.width,
    sampleType: `${firstPage.sample.kind}${8 * firstPage.sample.bytes}`,
    largest: largestCount(firstPage.sample),
    description: firstPage.description,
    read(index, into) {
      const page = all[index];
      if (page === undefined) throw new RangeError(`picture ${index} of ${all.length}`);
      if (page.compression === COMPRESSION.none && !page.tiled) readPlain(source, page, littleEndian, into);
      else readSegments(source, page, littleEndian, unpack.get(page.compression)!, into, index + 1);
    },
  };
}

function checkAlike(source: ByteSource, pages: readonly Page[]): void {
  const [one] = pages;
  const at = pages.findIndex((page) => page.width !== one?.width || page.height !== one.height);
  if (at < 0) return;
  const other = pages[at]!;
  throw new InputFault(
    `${source.name}: page ${at + 1} has ${other.width} × ${other.height} pixels where page 1 has ` +
      `${one?.width} × ${one?.height}; save frames of one size only`,
    { file: source.name, where: `frame ${at + 1}` },
  );
}

/**
 * Some writers keep a stack as one page, all further frames behind its pixels, and only the description says how
 * many there are. Where pages and description disagree in any other way, frames are missing.
 */
function withContiguous(source: ByteSource, pages: readonly Page[]): readonly Page[] {
  const declared = declaredImages(source.name, pages[0]!.description);
  if (declared === null || declared === pages.length) return pages;
  const page = pages[0]!;
  const frameBytes = page.width * page.height * page.sample.bytes;
  const contiguous = pages.length === 1 && page.compression === COMPRESSION.none && isContiguous(page);
  if (!contiguous || declared < 1) {
    throw damaged(source, `its description speaks of ${declared} images, it holds ${pages.length}`);
  }
  if (!(page.offsets[0]! + declared * frameBytes <= source.size)) {
    throw damaged(source, `its ${declared} frames need more bytes than the ${source.size} it has`);
  }
  return Array.from({ length: declared }, (_, k) => ({
    ...page,
    offsets: [page.offsets[0]! + k * frameBytes],
    byteCounts: [frameBytes],
    segmentHeight: page.height,
  }));
}

/** Pixels that two strips claim belong to one of them at most, so an offset is wrong. */
function refuseOverlap(source: ByteSource, pages: readonly Page[]): void {
  const pieces = pages.flatMap((page, number) => {
    const needed = Math.ceil(page.width / page.segmentWidth) * Math.ceil(page.height / page.segmentHeight);
    return page.offsets.slice(0, needed).map((start, i) => {
      // Byte counts of plain strips are sometimes rounded up; what is read counts.
      const plain = page.compression === COMPRESSION.none;
      return { number, start, end: start + (plain ? unpackedBytes(page, i) : page.byteCounts[i]!) };
    });
  });
  pieces.sort((a, b) => a.start - b.start);
  for (let i = 1; i < pieces.length; i++) {
    const [one, other] = [pieces[i - 1]!, pieces[i]!];
    if (other.start < one.end) {
      throw damaged(source, `pages ${one.number + 1} and ${other.number + 1} claim the same bytes`);
    }
  }
}

function isContiguous(page: Page): boolean {
  return !page.tiled && page.offsets.every((offset, i) => i === 0 || follows(page, i, offset));
}

function follows(page: Page, index: number, offset: number): boolean {
  return offset === page.offsets[index - 1]! + unpackedBytes(page, index - 1);
}

async function decompressors(pages: readonly Page[], inflate: Decompress | undefined) {
  const schemes = [...new Set(pages.map((page) => page.compression))];
  const loaded = schemes.map(async (scheme) => [scheme, await decompressorFor(scheme, inflate)] as const);
  return new Map(await Promise.all(loaded));
}

/** Plain strips, read together as far as they lie behind one another. */
function readPlain(source: ByteSource, page: Page, littleEndian: boolean, into: Float64Array): void {
  const strips = Math.ceil(page.height / page.segmentHeight);
  let at = 0;
  for (let i = 0; i < strips; ) {
    const offset = page.offsets[i]!;
    let length = unpackedBytes(page, i);
    for (i++; i < strips && follows(page, i, page.offsets[i]!); i++) length += unpackedBytes(page, i);
    copySamples(asSamples(source.read(offset, length), page.sample, littleEndian), into, at);
    at += length / page.sample.bytes;
  }
}

function readSegments(
  source: ByteSource,
  page: Page,
  littleEndian: boolean,
  unpack: Decompress,
  into: Float64Array,
  number: number,
): void {
  const { segmentWidth, segmentHeight, width, height } = page;
  const across = Math.ceil(width / segmentWidth);
  const down = Math.ceil(height / segmentHeight);
  const segment = new Float64Array(segmentWidth * segmentHeight);
  // As in libtiff, the tag means something for LZW and deflate only.
  const predictor = usesPredictor(page.compression) ? page.predictor : 1;
  for (let i = 0; i < across * down; i++) {
    const bytes = unpackSegment(source, page, i, unpack, number);
    copySamples(unpredicted(bytes, page.sample, littleEndian, segmentWidth, predictor), segment, 0);
    const left = (i % across) * segmentWidth;
    const top = Math.floor(i / across) * segmentHeight;
    const columns = Math.min(segmentWidth, width - left);
    for (let y = 0; y < Math.min(segmentHeight, height - top); y++) {
      const from = y * segmentWidth;
      into.set(segment.subarray(from, from + columns), (top + y) * width + left);
    }
  }
}

function unpackSegment(source: ByteSource, page: Page, index: number, unpack: Decompress, number: number) {
  const length = unpackedBytes(page, index);
  const packed = source.read(page.offsets[index]!, page.byteCounts[index]!);
  let bytes: Uint8Array;
  try {
    bytes = unpack(packed, length);
  } catch {
    throw damaged(source, `the packed pixels of page ${number} do not unpack`);
  }
  if (bytes.length < length) throw damaged(source, `page ${number} unpacks to too few pixels`);
  return bytes.subarray(0, length);
}
