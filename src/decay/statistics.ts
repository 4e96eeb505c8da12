/** temporary */
export function chiSquareTail(x: number, dof: number): number {
  if (dof <= 0) return 1;
  const a = dof / 2;
  const y = x / 2;
  if (y <= 0) return 1;
  const lg = lnGamma(a);
  if (y < a + 1) {
    let term = 1 / a;
    let sum = term;
    for (let n = 1; n < 1000 && term > sum * 1e-16; n++) sum += term *= y / (a + n);
    return 1 - sum * Math.exp(-y + a * Math.log(y) - lg);
  }
  let b = y + 1 - a;
  let c = 1e300;
  let d = 1 / b;
  let h = d;
  for (let i = 1; i < 1000; i++) {
    const an = -i * (i - a);
    b += 2;
    d = 1 / (an * d + b);
    c = b + an / c;
    const del = d * c;
    h *= del;
    if (Math.abs(del - 1) < 1e-15) break;
  }
  return Math.exp(-y + a * Math.log(y) - lg) * h;
}
function lnGamma(x: number): number {
  let s = 0;
  let z = x;
  while (z < 12) s -= Math.log(z++);
  const q = 1 / (z * z);
  return (
    s + (z - 0.5) * Math.log(z) - z + 0.5 * Math.log(2 * Math.PI) + (1 / 12 - q * (1 / 360 - q / 1260)) / z
  );
}
export function aicc(chi2: number, k: number, n: number): number {
  return chi2 + 2 * k + (n > k + 1 ? (2 * k * (k + 1)) / (n - k - 1) : 0);
}
