import type { SampleType } from "./page.ts";

type Samples =
  | Uint8Array
  | Int8Array
  | Uint16Array
  | Int16Array
  | Uint32Array
  | Int32Array
  | Float32Array
  | Float64Array
  | BigUint64Array
  | BigInt64Array;

const HOST_LITTLE_ENDIAN = new Uint8Array(new Uint16Array([1]).buffer)[0] === 1;

const INTEGERS = {
  uint: { 1: Uint8Array, 2: Uint16Array, 4: Uint32Array, 8: BigUint64Array },
  int: { 1: Int8Array, 2: Int16Array, 4: Int32Array, 8: BigInt64Array },
} as const;

/**
 * Bytes as samples, without a copy where order and alignment allow.
 * @param bytes a whole number of samples
 */
export function asSamples(bytes: Uint8Array, type: SampleType, littleEndian: boolean): Samples {
  const ordered =
    littleEndian === HOST_LITTLE_ENDIAN || type.bytes === 1 ? bytes : swapped(bytes, type.bytes);
  const aligned = ordered.byteOffset % type.bytes === 0 ? ordered : new Uint8Array(ordered);
  const count = bytes.length / type.bytes;
  if (type.kind === "float") {
    const Floats = type.bytes === 4 ? Float32Array : Float64Array;
    return new Floats(aligned.buffer as ArrayBuffer, aligned.byteOffset, count);
  }
  const Integers = INTEGERS[type.kind][type.bytes];
  return new Integers(aligned.buffer as ArrayBuffer, aligned.byteOffset, count);
}

function swapped(bytes: Uint8Array, size: number): Uint8Array {
  const out = new Uint8Array(bytes.length);
  for (let at = 0; at < bytes.length; at += size) {
    for (let k = 0; k < size; k++) out[at + k] = bytes[at + size - 1 - k]!;
  }
  return out;
}

/**
 * Undoes the predictors on whole unpacked rows and gives their samples: 2 is the horizontal difference of TIFF 6.0
 * section 14, 3 the one for floating point of Adobe's Technical Note 3 (2005).
 * @param width samples in a row
 */
export function unpredicted(
  bytes: Uint8Array,
  type: SampleType,
  littleEndian: boolean,
  width: number,
  predictor: number,
): Samples {
  if (predictor === 3) return asSamples(undoFloatPredictor(bytes, type.bytes, width), type, false);
  if (predictor !== 2) return asSamples(bytes, type, littleEndian);
  // The differences wrap around at the sample's width whatever its kind, so they are summed as unsigned integers.
  const sums = asSamples(new Uint8Array(bytes), { kind: "uint", bytes: type.bytes }, littleEndian);
  if (sums instanceof BigUint64Array) accumulate(sums, width);
  else accumulate(sums as Uint32Array, width);
  return asSamples(new Uint8Array(sums.buffer, sums.byteOffset, sums.byteLength), type, HOST_LITTLE_ENDIAN);
}

function accumulate(samples: Uint32Array | BigUint64Array, width: number): void {
  if (samples instanceof BigUint64Array) {
    for (let i = 0; i < samples.length; i++) if (i % width !== 0) samples[i] = samples[i]! + samples[i - 1]!;
  } else {
    for (let i = 0; i < samples.length; i++) if (i % width !== 0) samples[i] = samples[i]! + samples[i - 1]!;
  }
}

/** Rows hold the samples' first bytes, then all second bytes, …, most significant first, each byte as a difference. */
function undoFloatPredictor(bytes: Uint8Array, size: number, width: number): Uint8Array {
  const rowBytes = width * size;
  const out = new Uint8Array(bytes.length);
  const row = new Uint8Array(rowBytes);
  for (let start = 0; start + rowBytes <= bytes.length; start += rowBytes) {
    row.set(bytes.subarray(start, start + rowBytes));
    for (let i = 1; i < rowBytes; i++) row[i] = row[i]! + row[i - 1]!;
    for (let x = 0; x < width; x++) {
      for (let k = 0; k < size; k++) out[start + x * size + k] = row[k * width + x]!;
    }
  }
  return out;
}

/** Copies samples into an array of numbers from `at` on. */
export function copySamples(samples: Samples, into: Float64Array, at: number): void {
  if (samples instanceof BigUint64Array || samples instanceof BigInt64Array) {
    for (let i = 0; i < samples.length; i++) into[at + i] = Number(samples[i]);
  } else {
    into.set(samples, at);
  }
}

/**
 * The largest number that 8- or 16-bit integers hold, where a camera's counts end if not before; null for wider
 * types, which no camera fills.
 */
export function largestCount({ kind, bytes }: SampleType): number | null {
  if (kind === "float" || bytes > 2) return null;
  return 2 ** (8 * bytes - (kind === "int" ? 1 : 0)) - 1;
}
