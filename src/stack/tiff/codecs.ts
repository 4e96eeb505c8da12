import { unpackBits } from "./packbits.ts";

/** Compression schemes that are read: TIFF 6.0, and deflate of the Photoshop TIFF notes with its older number. */
export const COMPRESSION = {
  none: 1,
  lzw: 5,
  deflate: 8,
  oldDeflate: 32946,
  packBits: 32773,
} as const;

const OTHER_NAMES: Readonly<Record<number, string>> = {
  2: "CCITT run lengths",
  3: "CCITT fax",
  4: "CCITT fax",
  6: "JPEG",
  7: "JPEG",
  34712: "JPEG 2000",
  34925: "LZMA",
  50000: "Zstandard",
  50001: "WebP",
};

/** What a scheme that is not read is called. */
export function compressionName(compression: number): string {
  return OTHER_NAMES[compression] ?? `scheme ${compression}`;
}

/**
 * Unpacks one strip or tile.
 * @param length bytes it must give; more are dropped
 * @throws any error when the packed bytes are faulty or give fewer
 */
export type Decompress = (packed: Uint8Array, length: number) => Uint8Array;

/**
 * The decoder for a scheme, loaded only when a file needs it.
 * @param inflate a faster decoder for deflate, where the platform has one that checks its checksum
 */
export async function decompressorFor(compression: number, inflate?: Decompress): Promise<Decompress> {
  if (compression === COMPRESSION.packBits) return unpackBits;
  if (compression === COMPRESSION.none) return (packed, length) => packed.subarray(0, length);
  if (compression !== COMPRESSION.lzw && inflate !== undefined) return inflate;
  const { decode } = await import("tiff");
  return (packed, length) => {
    const page = decode(wrap(packed, length, compression))[0];
    if (!(page?.data instanceof Uint8Array)) throw new Error("no bytes came out");
    return page.data;
  };
}

/**
 * A one-strip picture of 8-bit samples around packed bytes. The `tiff` package then unpacks any kind of sample,
 * signed ones and those of a BigTIFF included, while their meaning is settled by this project's own code.
 */
function wrap(packed: Uint8Array, length: number, compression: number): Uint8Array {
  const tags: [tag: number, value: number][] = [
    [256, length],
    [257, 1],
    [258, 8],
    [259, compression],
    [262, 1],
    [273, 8],
    [277, 1],
    [278, 1],
    [279, packed.length],
  ];
  const ifd = 8 + packed.length + (packed.length % 2);
  const file = new Uint8Array(ifd + 2 + 12 * tags.length + 4);
  const view = new DataView(file.buffer);
  view.setUint32(0, 0x002a4949, true);
  view.setUint32(4, ifd, true);
  file.set(packed, 8);
  view.setUint16(ifd, tags.length, true);
  for (const [i, [tag, value]] of tags.entries()) {
    const at = ifd + 2 + 12 * i;
    view.setUint16(at, tag, true);
    view.setUint16(at + 2, 4, true);
    view.setUint32(at + 4, 1, true);
    view.setUint32(at + 8, value, true);
  }
  return file;
}
