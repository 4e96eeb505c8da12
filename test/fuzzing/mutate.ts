import { createRandom, type Random } from "../../src/numerics/random.ts";

const TELLING_NUMBERS = [
  0, 1, 2, 3, 7, 8, 16, 32, 255, 256, 32767, 32768, 65535, 0x7fffffff, 0x80000000, 0xffffffff,
];

const below = (random: Random, limit: number): number => Math.floor(random.uniform() * limit);
const oneOf = <T>(random: Random, list: readonly T[]): T => list[below(random, list.length)] as T;

/**
 * Damages a file in one to three places: flipped bits, bytes written over, numbers put to the edges of their range,
 * pieces cut out, doubled, moved, or the end cut off. The same seed gives the same damage.
 */
export function mutateBytes(original: Buffer, seed: number): Buffer {
  const random = createRandom(seed);
  let bytes: Buffer = Buffer.from(original);
  const wounds = 1 + below(random, 3);
  for (let i = 0; i < wounds && bytes.length > 0; i++) bytes = oneOf(random, BYTE_WOUNDS)(bytes, random);
  return bytes;
}

type ByteWound = (bytes: Buffer, random: Random) => Buffer;

const BYTE_WOUNDS: readonly ByteWound[] = [
  function flipBit(bytes, random) {
    const at = below(random, bytes.length);
    bytes[at] = (bytes[at] ?? 0) ^ (1 << below(random, 8));
    return bytes;
  },
  function overwrite(bytes, random) {
    bytes[below(random, bytes.length)] = below(random, 256);
    return bytes;
  },
  function number16(bytes, random) {
    const value = oneOf(random, TELLING_NUMBERS) & 0xffff;
    if (bytes.length < 2) return bytes;
    const at = below(random, bytes.length - 1);
    random.uniform() < 0.5 ? bytes.writeUInt16LE(value, at) : bytes.writeUInt16BE(value, at);
    return bytes;
  },
  function number32(bytes, random) {
    const value = oneOf(random, TELLING_NUMBERS);
    if (bytes.length < 4) return bytes;
    const at = below(random, bytes.length - 3);
    random.uniform() < 0.5 ? bytes.writeUInt32LE(value, at) : bytes.writeUInt32BE(value, at);
    return bytes;
  },
  function structureNumber(bytes, random) {
    // directories start where the header says, so aim at the first one's entries
    if (bytes.length < 8) return bytes;
    const little = bytes[0] === 0x49;
    const directory = little ? bytes.readUInt32LE(4) : bytes.readUInt32BE(4);
    const at = directory + 2 + 12 * below(random, 10) + oneOf(random, [0, 2, 4, 8]);
    if (at + 4 > bytes.length) return bytes;
    const value = oneOf(random, TELLING_NUMBERS);
    little ? bytes.writeUInt16LE(value & 0xffff, at) : bytes.writeUInt16BE(value & 0xffff, at);
    return bytes;
  },
  function cutEnd(bytes, random) {
    return bytes.subarray(0, below(random, bytes.length));
  },
  function cutOut(bytes, random) {
    const at = below(random, bytes.length);
    return Buffer.concat([bytes.subarray(0, at), bytes.subarray(at + 1 + below(random, 64))]);
  },
  function double(bytes, random) {
    const at = below(random, bytes.length);
    const piece = bytes.subarray(at, at + 1 + below(random, 64));
    return Buffer.concat([bytes.subarray(0, at), piece, bytes.subarray(at)]);
  },
  function zeroOut(bytes, random) {
    const at = below(random, bytes.length);
    return bytes.fill(0, at, Math.min(bytes.length, at + 1 + below(random, 64)));
  },
];

const SNIPPETS = [
  "nan",
  "inf",
  "-inf",
  "-1",
  "0",
  "1e308",
  "-1e-308",
  "9".repeat(40),
  '""',
  "[]",
  "{}",
  "true",
  "1979-05-27",
  '"µm"',
  '"1 parsec"',
  '"0 um"',
  '"-3 ns"',
  '"1 ns ± 200 %"',
  '"nan ns"',
  '"1(2 um"',
  "[time]",
  "__proto__ = 1",
  "constructor = 2",
  '"\\u0000"',
  "# ",
  '"""',
  "'''",
  "=",
  "\u0000",
  "\uFFFD",
  "±",
  "[[space]]",
  "pixel.x = 1",
];

/** Damages a text: letters, lines, values and brackets lost, doubled or replaced. */
export function mutateText(original: string, seed: number): string {
  const random = createRandom(seed);
  let text = original;
  const wounds = 1 + below(random, 3);
  for (let i = 0; i < wounds && text.length > 0; i++) text = oneOf(random, TEXT_WOUNDS)(text, random);
  return text;
}

type TextWound = (text: string, random: Random) => string;

const TEXT_WOUNDS: readonly TextWound[] = [
  function loseLetter(text, random) {
    const at = below(random, text.length);
    return text.slice(0, at) + text.slice(at + 1);
  },
  function changeLetter(text, random) {
    const at = below(random, text.length);
    return text.slice(0, at) + String.fromCharCode(32 + below(random, 95)) + text.slice(at + 1);
  },
  function insertSnippet(text, random) {
    const at = below(random, text.length);
    return text.slice(0, at) + oneOf(random, SNIPPETS) + text.slice(at);
  },
  function replaceValue(text, random) {
    const lines = text.split("\n");
    const at = below(random, lines.length);
    lines[at] = (lines[at] ?? "").replace(/=.*/, `= ${oneOf(random, SNIPPETS).replaceAll("$", "")}`);
    return lines.join("\n");
  },
  function loseLine(text, random) {
    const lines = text.split("\n");
    lines.splice(below(random, lines.length), 1);
    return lines.join("\n");
  },
  function doubleLine(text, random) {
    const lines = text.split("\n");
    const at = below(random, lines.length);
    lines.splice(at, 0, lines[at] ?? "");
    return lines.join("\n");
  },
  function swapLines(text, random) {
    const lines = text.split("\n");
    const [a, b] = [below(random, lines.length), below(random, lines.length)];
    [lines[a], lines[b]] = [lines[b] ?? "", lines[a] ?? ""];
    return lines.join("\n");
  },
  function scaleDigits(text, random) {
    const digits = [...text.matchAll(/\d+/g)];
    const match = digits[below(random, digits.length)];
    if (match === undefined) return text;
    return text.slice(0, match.index) + oneOf(random, SNIPPETS) + text.slice(match.index + match[0].length);
  },
  function cutEnd(text, random) {
    return text.slice(0, below(random, text.length));
  },
];
