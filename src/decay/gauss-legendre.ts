/** Points and weights of the n-point Gauss–Legendre rule on [0, 1]. */
export interface Rule {
  readonly points: readonly number[];
  readonly weights: readonly number[];
}

const made = new Map<number, Rule>();

/**
 * The n-point Gauss–Legendre rule on [0, 1]: Newton's method on the Legendre polynomial from the asymptotic roots,
 * weights 2/((1 − x²)·P'_n(x)²) (Abramowitz and Stegun 25.4.29), mapped from [−1, 1].
 */
export function gaussLegendre(n: number): Rule {
  const known = made.get(n);
  if (known) return known;
  const points: number[] = [];
  const weights: number[] = [];
  for (let i = n; i >= 1; i--) {
    let x = Math.cos((Math.PI * (i - 0.25)) / (n + 0.5));
    let slope = 1;
    for (let step = 0; step < 20; step++) {
      const [p, dp] = legendre(n, x);
      slope = dp;
      const change = p / dp;
      x -= change;
      if (Math.abs(change) < 1e-15) break;
    }
    points.push((1 + x) / 2);
    weights.push(1 / ((1 - x * x) * slope * slope));
  }
  const rule = { points, weights };
  made.set(n, rule);
  return rule;
}

/** P_n(x) and P'_n(x) by the three-term recurrence. */
function legendre(n: number, x: number): [number, number] {
  let before = 1;
  let p = x;
  for (let k = 2; k <= n; k++) [before, p] = [p, ((2 * k - 1) * x * p - (k - 1) * before) / k];
  return [p, (n * (x * p - before)) / (x * x - 1)];
}
