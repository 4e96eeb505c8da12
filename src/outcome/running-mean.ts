/** Light over its standard deviation that a mean over frames must reach before it may stand for one of them. */
const TELLING = 10;

/**
 * Mean over each frame and its neighbours, the frame itself counted twice; over so many neighbours that the frame's own
 * fluctuation is small in it, since the weights of what is read next come from it.
 */
export function runningMean(values: Float64Array, sigma: Float64Array): Float64Array {
  return values.map((value, i) => {
    const own = Number.isFinite(value) ? 2 : 0;
    let sum = own > 0 ? own * value : 0;
    let weights = own;
    let variance = own > 0 ? (own * sigma[i]!) ** 2 : 0;
    for (let reach = 1; reach < values.length; reach++) {
      for (const j of [i - reach, i + reach]) {
        const neighbour = values[j];
        if (neighbour === undefined || !Number.isFinite(neighbour)) continue;
        sum += neighbour;
        weights++;
        variance += sigma[j]! ** 2;
      }
      if (weights > 0 && sum > TELLING * Math.sqrt(variance)) break;
    }
    return weights > 0 ? sum / weights : value;
  });
}
