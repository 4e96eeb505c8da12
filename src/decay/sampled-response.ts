import type { Response } from "../stack/acquisition.ts";
import type { ResponseShape } from "./response-shape.ts";

type Sampled = Extract<Response, { kind: "sampled" }>;

/** A measured response, straight between its samples and 0 outside, scaled to unit area. */
export function sampledShape({ delays, counts }: Sampled): ResponseShape {
  const integral = [0];
  for (let k = 1; k < delays.length; k++) {
    const area = ((counts[k]! + counts[k - 1]!) / 2) * (delays[k]! - delays[k - 1]!);
    integral.push(integral[k - 1]! + area);
  }
  const area = integral.at(-1)!;
  const from = delays[0]!;
  const to = delays.at(-1)!;

  /** The sample at or before t, for t inside. */
  const before = (t: number): number => {
    let low = 0;
    let high = delays.length - 1;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (delays[middle]! <= t) low = middle;
      else high = middle;
    }
    return low;
  };
  const height = (t: number, k: number) => {
    const x = (t - delays[k]!) / (delays[k + 1]! - delays[k]!);
    return counts[k]! + x * (counts[k + 1]! - counts[k]!);
  };
  const cumulative = (t: number): number => {
    if (t <= from) return 0;
    if (t >= to) return area;
    const k = before(t);
    return integral[k]! + ((counts[k]! + height(t, k)) / 2) * (t - delays[k]!);
  };
  return {
    from,
    to,
    breaks: breaksFor(delays),
    density: (t) => (t < from || t > to ? 0 : height(t, before(t)) / area),
    share: (a, b) => (cumulative(b) - cumulative(a)) / area,
  };
}

const MOST_BREAKS = 60;

/** Every sample, or evenly chosen ones where there are many: between them the noise of the samples averages out. */
function breaksFor(delays: readonly number[]): number[] {
  const every = Math.max(1, Math.ceil((delays.length - 1) / MOST_BREAKS));
  return delays.filter((_, k) => k % every === 0 || k === delays.length - 1);
}
