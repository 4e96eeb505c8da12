/** Σx/n, corrected once by the mean of what is left: no digit is lost to a large common part. */
export function mean(values: ArrayLike<number>): number {
  const rough = sumOf(values, (x) => x) / values.length;
  return rough + sumOf(values, (x) => x - rough) / values.length;
}

/**
 * √(Σ(x − x̄)²/(n − 1)) by the corrected two-pass algorithm (Chan, Golub and LeVeque, Am. Stat. 37 (1983) 242).
 * 0 for a single value.
 */
export function standardDeviation(values: ArrayLike<number>): number {
  const n = values.length;
  if (n < 2) return 0;
  const centre = mean(values);
  const squares = sumOf(values, (x) => (x - centre) ** 2);
  const drift = sumOf(values, (x) => x - centre);
  return Math.sqrt(Math.max(squares - (drift * drift) / n, 0) / (n - 1));
}

/**
 * The mean weighted by 1/u², its standard uncertainty (Σ1/u²)^(−1/2), and the χ² of the values about it on n − 1
 * degrees of freedom (Bevington and Robinson, Data Reduction and Error Analysis, 3rd ed. (2003), section 4.1).
 */
export function weightedMean(
  values: ArrayLike<number>,
  u: ArrayLike<number>,
): { mean: number; u: number; chi2: number } {
  const weight = (i: number) => 1 / (u[i]! * u[i]!);
  const total = sumOf(values, (_, i) => weight(i));
  const rough = sumOf(values, (x, i) => x * weight(i)) / total;
  const centre = rough + sumOf(values, (x, i) => (x - rough) * weight(i)) / total;
  const chi2 = sumOf(values, (x, i) => (x - centre) ** 2 * weight(i));
  return { mean: centre, u: 1 / Math.sqrt(total), chi2 };
}

function sumOf(values: ArrayLike<number>, term: (x: number, i: number) => number): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += term(values[i]!, i);
  return sum;
}
