/** Gauss–Legendre nodes and weights on [0, 1] (Abramowitz & Stegun 25.4.29, table 25.4, moved from [−1, 1]). */
const RULES: Readonly<Record<number, readonly (readonly [node: number, weight: number])[]>> = {
  1: [[0, 2]],
  2: [
    [-0.5773502691896257, 1],
    [0.5773502691896257, 1],
  ],
  3: [
    [-0.7745966692414834, 0.5555555555555556],
    [0, 0.8888888888888888],
    [0.7745966692414834, 0.5555555555555556],
  ],
  5: [
    [-0.906179845938664, 0.23692688505618908],
    [-0.5384693101056831, 0.47862867049936647],
    [0, 0.5688888888888889],
    [0.5384693101056831, 0.47862867049936647],
    [0.906179845938664, 0.23692688505618908],
  ],
};

export interface Node {
  readonly at: number;
  readonly weight: number;
}

/**
 * Nodes that integrate a function over [from, to]; the weights add up to the interval's length.
 *
 * @param rate the fastest relative change of the function, 1/unit: sets points and panels so that an exponential of
 *   that rate is integrated to about 1e-7
 */
export function nodesOver(from: number, to: number, rate: number): Node[] {
  const length = to - from;
  if (length <= 0) return [];
  const reach = rate * length;
  const [points, panels] =
    reach < 0.15 ? [2, 1] : reach < 0.6 ? [3, 1] : [5, Math.min(Math.max(1, Math.ceil(reach / 2)), 64)];
  const panel = length / panels;
  const nodes: Node[] = [];
  for (let p = 0; p < panels; p++) {
    for (const [x, w] of RULES[points]!) {
      nodes.push({ at: from + panel * (p + 0.5 * (1 + x)), weight: 0.5 * w * panel });
    }
  }
  return nodes;
}
