import type { Name } from "./parameters.ts";
import type { StackScore } from "./score-stack.ts";
import type { StackData } from "./stack-data.ts";

/** A recording that lasts a hundredth of a lifetime sees one per cent of it pass. */
const ENDLESS = 100;

/** The lifetime in traps from which on it is endless to a recording, ns; none where earlier pulses' traps still shine. */
export function endlessLifetime({ frames, gate, period }: StackData): number {
  if (period !== null) return Number.POSITIVE_INFINITY;
  const delays = frames.map(({ delay }) => delay);
  return ENDLESS * (Math.max(...delays) - Math.min(...delays) + gate);
}

/** Whether the lifetime in traps is at its end and the likelihood still rises beyond. */
export function isEndless(
  data: StackData,
  names: readonly Name[],
  p: Float64Array,
  { score }: StackScore,
): boolean {
  const i = names.indexOf("trap_lifetime");
  return i >= 0 && p[i]! >= (1 - 1e-9) * endlessLifetime(data) && score[i]! >= 0;
}

/** Score and information of a fit in which parameter i stays where it is. */
export function holding({ score, information }: StackScore, i: number): StackScore {
  const n = score.length;
  return {
    score: score.with(i, 0),
    information: information.map((value, k) => {
      const [row, column] = [Math.floor(k / n), k % n];
      if (row !== i && column !== i) return value;
      return row === column ? 1 : 0;
    }),
  };
}
