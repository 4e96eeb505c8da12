import { lnGamma } from "./distributions.ts";

/**
 * The Wald–Wolfowitz runs test for residuals in order of delay: the probability of as few runs of one sign, or fewer,
 * were the signs in random order (Wald and Wolfowitz, Ann. Math. Stat. 11 (1940) 147). A law that does not follow the
 * data leaves long runs; many short ones tell against no law, so the test is one-sided.
 *
 * Exact at every length, given the numbers n₁, n₂ of each sign. Residuals of exactly 0 are left out. 1 where all have
 * one sign: nothing can be said.
 */
export function runsTest(residuals: ArrayLike<number>): number {
  const signs = Array.from(residuals, Math.sign).filter((sign) => sign !== 0);
  const n1 = signs.filter((sign) => sign > 0).length;
  const n2 = signs.length - n1;
  if (n1 === 0 || n2 === 0) return 1;
  const runs = 1 + signs.filter((sign, i) => i > 0 && sign !== signs[i - 1]).length;
  const lnAll = lnChoose(n1 + n2, n1);
  let p = 0;
  for (let r = 2; r <= runs; r++) p += arrangements(r, n1, n2, lnAll);
  return Math.min(1, p);
}

/** The fraction of all arrangements of n₁ and n₂ signs that have exactly r runs. */
function arrangements(r: number, n1: number, n2: number, lnAll: number): number {
  const half = Math.floor(r / 2);
  // r runs of two signs in turn: r/2 of each, or one more of either; k runs of n signs can be cut in C(n−1, k−1) ways.
  const cut = (k1: number, k2: number) =>
    Math.exp(lnChoose(n1 - 1, k1 - 1) + lnChoose(n2 - 1, k2 - 1) - lnAll);
  return r % 2 === 0 ? 2 * cut(half, half) : cut(half + 1, half) + cut(half, half + 1);
}

function lnChoose(n: number, k: number): number {
  if (k < 0 || k > n) return Number.NEGATIVE_INFINITY;
  return lnGamma(n + 1) - lnGamma(k + 1) - lnGamma(n - k + 1);
}
