import { describe, expect, it } from "vitest";
import { excludeFrom, findOutliers, isOutlier, tolerance } from "../../src/frame/outliers.ts";
import { findStrikes, meanAt } from "../../src/frame/strikes.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { CAMERA, COUNTING, draw, meanOf, pictureOf, wholePatch } from "./pictures.ts";

const [W, H] = [40, 36];
const spot = Float64Array.of(8000, 19.3, 17.6, 9, 1, 7, 0.8);
const at = (x: number, y: number): number => y * W + x;

describe("hot, dead and struck pixels", () => {
  const noisy = draw(pictureOf(spot, W, H), COUNTING, createRandom(21));
  const find = (photons: ArrayLike<number>) =>
    findOutliers(photons, W, H, COUNTING, (i) => meanOf(spot, i % W, Math.floor(i / W)));

  it("are not seen in an undisturbed frame", () => {
    expect(find(noisy)).toEqual([]);
  });

  it("are found far from the spot and inside it, alone, in pairs and at the corner", () => {
    const struck = noisy.slice();
    const places = [at(3, 4), at(19, 17), at(30, 20), at(31, 20), 0];
    for (const place of places) struck[place]! += 200;
    expect(find(struck)).toEqual([...places].sort((a, b) => a - b));
  });

  it("are found where a pixel is dead in the bright core", () => {
    const dead = noisy.slice();
    dead[at(19, 17)] = 0;
    expect(find(dead)).toEqual([at(19, 17)]);
  });

  it("are not seen in a real spot that the model knows nothing of", () => {
    const wide = draw(
      pictureOf(Float64Array.of(8000, 19.3, 17.6, 16, 0, 16, 0.8), W, H),
      COUNTING,
      createRandom(22),
    );
    expect(findOutliers(wide, W, H, COUNTING, () => 0.8)).toEqual([]);
  });

  it("count once when taken out twice", () => {
    const patch = wholePatch(noisy, W, H);
    excludeFrom(patch, [9, 5]);
    excludeFrom(patch, [5, 7]);
    expect(patch.excluded).toEqual([5, 7, 9]);
  });
});

/** P(|k − λ| > limit) of the Poisson distribution, summed term by term. */
function poissonBeyond(mean: number, limit: number): number {
  let logP = -mean;
  let sum = 0;
  for (let k = 0; k < mean + limit + 400; k++) {
    if (k > 0) logP += Math.log(mean / k);
    if (Math.abs(k - mean) > limit) sum += Math.exp(logP);
  }
  return sum;
}

describe("the tolerance of a pixel", () => {
  it.each([0.001, 0.01, 0.1, 0.5, 1, 2, 5, 10, 30, 100, 600])(
    "is left by chance less than once in 10⁷ Poisson pixels of mean %f",
    (mean) => {
      expect(poissonBeyond(mean, tolerance(COUNTING, mean))).toBeLessThan(1e-7);
    },
  );

  it("raises no alarm in a million drawn pixels of a camera with excess and read noise", () => {
    const random = createRandom(23);
    const noise = CAMERA;
    let alarms = 0;
    for (const mean of [0.2, 2, 20]) {
      const picture = draw(new Float64Array(333_000).fill(mean), noise, random);
      for (let i = 0; i < picture.length; i++)
        if (
          Math.abs(picture[i]! - mean) > tolerance(noise, mean) &&
          isOutlier(picture, 1000, 333, i, noise, mean)
        )
          alarms++;
    }
    expect(alarms).toBeLessThanOrEqual(1);
  });
});

describe("strikes in a patch", () => {
  it("are all outliers of the patch, found the long way round", () => {
    const random = createRandom(24);
    for (let trial = 0; trial < 20; trial++) {
      const data = draw(pictureOf(spot, W, H), CAMERA, random);
      // most of them just beyond the tolerance, where a hasty search would pass over them
      for (let k = 0; k < 40; k++) {
        const index = Math.floor(random.uniform() * data.length);
        data[index]! += tolerance(CAMERA, data[index]!) * (0.9 + 0.5 * random.uniform());
      }
      const patch = wholePatch(data, W, H);
      const all = findOutliers(patch.data, W, H, CAMERA, (i) => meanAt("map", patch, spot, i));
      expect(findStrikes("map", patch, spot, CAMERA)).toEqual(all);
    }
  });

  it("are found on a trace", () => {
    const trace = Float64Array.of(900, 30.8, 20, 1.1);
    const data = draw(pictureOf(trace, 64), COUNTING, createRandom(25));
    data[5]! += 60;
    data[33] = 300;
    expect(findStrikes("trace", wholePatch(data, 64), trace, COUNTING)).toEqual([5, 33]);
  });

  it.each([
    ["map", spot],
    ["trace", Float64Array.of(900, 30.8, 20, 1.1)],
  ] as const)("are measured against the mean of the spot's model on a %s", (kind, p) => {
    const patch = { ...wholePatch(new Float64Array(12), 4, kind === "map" ? 3 : 1) };
    const moved = { ...patch, rectangle: { ...patch.rectangle, x0: 18, y0: kind === "map" ? 16 : 0 } };
    for (const index of [0, 3])
      expect(meanAt(kind, moved, p, index)).toBeCloseTo(meanOf(p, 18 + index, kind === "map" ? 16 : 0), 9);
  });
});
