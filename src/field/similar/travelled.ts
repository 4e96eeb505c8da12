import { nodesOver } from "../quadrature.ts";
import { memory } from "./earlier-pulses.ts";
import type { Flow } from "./flow.ts";
import { onFoot } from "./foot.ts";
import type { SimilarProblem } from "./problem.ts";
import { pairsOf } from "./pushed-flow.ts";
import { flowFor, resolutionOf, shares } from "./similar-light.ts";
import { dot } from "./weights.ts";
import { whitened } from "./whitened.ts";

/**
 * ½⟨x²⟩ of where a pulse's excitons end, or are caught, beyond ½⟨x²⟩ of where they started, per axis, µm²: D·∫N dt/N₀,
 * with repulsion D·∫∫(n + ½bn²) dA dt/N₀ (see `movingTime`), with earlier pulses where there is a period.
 *
 * With repulsion this is by how much a pulse's spot widens, at this density and from this start, and no property of the
 * sample alone; that is √(Dτ).
 */
export function travelled(problem: SimilarProblem): number {
  const [xx, , yy] = problem.diffusion;
  const d = problem.kind === "map" ? (xx + yy) / 2 : xx;
  return d * movingTimeOf(problem);
}

function movingTimeOf(problem: SimilarProblem): number {
  const removal = 1 / problem.lifetime + problem.capture;
  if (problem.annihilation === 0 && problem.repulsion === 0) return 1 / removal;
  // a timeline to the end of life, whatever the frames show
  const alone = { ...problem, delays: [memory(removal)], gate: 0 };
  const life = alone.foot === undefined ? alone : onFoot(alone, alone.foot);
  const flow = flowFor(life, whitened(life), resolutionOf(alone));
  const left = shares(flow);
  const pairs = pairShares(flow);
  const { timeline } = flow;
  let sum = 0;
  const weights = new Float64Array(timeline.size);
  for (let i = 0; i < timeline.size - 1; i++) {
    for (const { at, weight } of nodesOver(timeline.times[i]!, timeline.times[i + 1]!, removal)) {
      weights.fill(0);
      timeline.addFree(at, weight, weights);
      // pairs fall twice as fast
      const both = 0.5 * life.repulsion * Math.exp(-removal * at);
      sum += dot(weights, left) + both * dot(weights, pairs);
    }
  }
  return sum;
}

/** e^(2λt)·∫p(p + 2ℓ)dA at each time, for a pulse's density p over earlier ones' ℓ (see `steadyFlow`), like `shares`. */
function pairShares({ shape, timeline, coefficients, background }: Flow): Float64Array {
  const state = new Float64Array(shape.size);
  const pairs = new Float64Array(shape.size);
  return Float64Array.from(coefficients, (a, i) => {
    shape.toState(a, state);
    pairsOf(shape, state, timeline.scales(timeline.times[i]!), background?.[i] ?? null, state);
    shape.toCoefficients(state, pairs);
    return pairs[0]!;
  });
}
