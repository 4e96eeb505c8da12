/** Γ(x) for x > 0: the recurrence up to x ≥ 12, then Stirling's series (Abramowitz and Stegun 6.1.40), about 1e-14. */
export function gammafn(x: number): number {
  let shift = 1;
  let z = x;
  while (z < 12) shift *= z++;
  const y = 1 / (z * z);
  const series = (1 / 12 - y * (1 / 360 - y * (1 / 1260 - y * (1 / 1680 - y / 1188)))) / z;
  return Math.exp((z - 0.5) * Math.log(z) - z + 0.5 * Math.log(2 * Math.PI) + series) / shift;
}
