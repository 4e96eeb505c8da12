/**
 * PackBits, TIFF 6.0 section 9: a head byte n ≥ 0 is followed by n + 1 bytes as they are, −1 ≥ n ≥ −127 by one byte
 * to repeat 1 − n times, and −128 by nothing.
 *
 * @param length bytes to give
 * @throws RangeError when the packed bytes end before
 */
export function unpackBits(packed: Uint8Array, length: number): Uint8Array {
  const out = new Uint8Array(length);
  let from = 0;
  let to = 0;
  while (to < length) {
    if (from >= packed.length) throw new RangeError("packed bytes end too soon");
    const head = packed[from++]!;
    if (head === 128) continue;
    const run = head < 128 ? head + 1 : 257 - head;
    const taken = head < 128 ? run : 1;
    if (from + taken > packed.length) throw new RangeError("packed bytes end too soon");
    const room = Math.min(run, length - to);
    if (head < 128) out.set(packed.subarray(from, from + room), to);
    else out.fill(packed[from]!, to, to + room);
    from += taken;
    to += room;
  }
  return out;
}
