import { nodesOver } from "../quadrature.ts";
import { memory } from "./earlier-pulses.ts";
import type { SimilarProblem } from "./problem.ts";
import { flowFor, resolutionOf, shares } from "./similar-light.ts";
import { dot } from "./weights.ts";
import { whitened } from "./whitened.ts";

/**
 * ½⟨x²⟩ of where a pulse's excitons end, or are caught, per axis, µm²: D·∫N dt/N₀ (see `movingTime`), with earlier
 * pulses where there is a period.
 */
export function travelled(problem: SimilarProblem): number {
  const [xx, , yy] = problem.diffusion;
  const d = problem.kind === "map" ? (xx + yy) / 2 : xx;
  return d * movingTimeOf(problem);
}

function movingTimeOf(problem: SimilarProblem): number {
  const removal = 1 / problem.lifetime + problem.capture;
  if (problem.annihilation === 0) return 1 / removal;
  // a timeline to the end of life, whatever the frames show
  const life = { ...problem, delays: [memory(removal)], gate: 0 };
  const flow = flowFor(life, whitened(life), resolutionOf(life));
  const left = shares(flow);
  const { timeline } = flow;
  let sum = 0;
  const weights = new Float64Array(timeline.size);
  for (let i = 0; i < timeline.size - 1; i++) {
    for (const { at, weight } of nodesOver(timeline.times[i]!, timeline.times[i + 1]!, removal)) {
      weights.fill(0);
      timeline.addFree(at, weight, weights);
      sum += dot(weights, left);
    }
  }
  return sum;
}
