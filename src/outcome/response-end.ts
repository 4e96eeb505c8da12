import type { Response } from "../stack/acquisition.ts";

/** Share of the response that may still be to come when the law of spread begins. */
const LEFT = 1e-3;

/**
 * Delay after which the instrument's response has passed (99.9 % of it), ns: from there on it shifts the widths' line
 * by a constant and leaves its slope alone, for one exponential exactly.
 */
export function responseEnd(response: Response | null): number {
  if (response === null) return 0;
  // 99.9 % of a Gaussian lies below 3.09 standard deviations
  if (response.kind === "gaussian") return (3.0902 * response.fwhm) / 2.354820045;
  const total = response.counts.reduce((sum, value) => sum + value, 0);
  let sum = 0;
  for (const [i, delay] of response.delays.entries()) {
    sum += response.counts[i]!;
    if (sum >= (1 - LEFT) * total) return Math.max(delay, 0);
  }
  return Math.max(response.delays.at(-1) ?? 0, 0);
}
