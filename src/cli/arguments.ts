import { InputFault } from "../stack/fault.ts";
import { parseQuantity, QuantityFault } from "../stack/quantity.ts";

/**
 * A delay given on the command line, in ns: "1 ns", "500 ps", or a bare number of ns.
 *
 * @throws InputFault naming the option
 */
export function timeFrom(text: string | undefined, option: string): number | undefined {
  if (text === undefined) return undefined;
  const bare = /^[-+\d.eE]+$/.test(text.trim());
  try {
    return parseQuantity(bare ? `${text} ns` : text, "time").value;
  } catch (error) {
    if (!(error instanceof QuantityFault)) throw error;
    throw new InputFault(`${option} "${text}" ${error.message}; write a time such as ${option} "1 ns"`, {
      where: option,
      cause: error,
    });
  }
}

/** @throws InputFault when the text is no whole number from 0 */
export function seedFrom(text: string | undefined): number | undefined {
  if (text === undefined) return undefined;
  const seed = /^\d+$/.test(text.trim()) ? Number(text) : Number.NaN;
  if (Number.isSafeInteger(seed)) return seed;
  throw new InputFault(
    `--seed "${text}" is not a whole number from 0 to 2^53 − 1; write one such as --seed 1`,
    {
      where: "--seed",
    },
  );
}

/** @throws InputFault when the window is upside down */
export function windowFrom(from: string | undefined, to: string | undefined): { from?: number; to?: number } {
  const [first, last] = [timeFrom(from, "--from"), timeFrom(to, "--to")];
  if (first !== undefined && last !== undefined && first >= last)
    throw new InputFault(
      `--from ${first} ns is not before --to ${last} ns; give the earlier delay as --from`,
      {
        where: "--from",
      },
    );
  return { ...(first === undefined ? {} : { from: first }), ...(last === undefined ? {} : { to: last }) };
}
