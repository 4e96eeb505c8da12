/** Where bytes come from: a file, a browser's array, a test's array. */
export interface ByteSource {
  /** How messages call it: the path the user gave. */
  readonly name: string;
  /** Bytes in all. */
  readonly size: number;
  /**
   * The bytes [offset, offset + length), which callers check against `size` beforehand.
   * They stay valid until the next call only, so that a file can be read through one buffer.
   */
  read(offset: number, length: number): Uint8Array;
}

/** A source over bytes that are already in memory. */
export function memorySource(name: string, bytes: Uint8Array): ByteSource {
  return { name, size: bytes.length, read: (offset, length) => bytes.subarray(offset, offset + length) };
}
