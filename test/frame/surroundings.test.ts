import { describe, expect, it } from "vitest";
import { surveyBackground } from "../../src/frame/surroundings.ts";
import { createRandom } from "../../src/numerics/random.ts";
import { COUNTING, draw, pictureOf } from "./pictures.ts";

const [W, H] = [64, 60];
const spot = Float64Array.of(2e5, 31, 29, 9, 0, 9, 20);
const survey = (picture: Float64Array) => surveyBackground(picture, W, H, [31, 29], [15, 15], COUNTING);

describe("the background around the spot", () => {
  it("is even where it is even: p is uniform over recordings", () => {
    const random = createRandom(61);
    const ps = Array.from({ length: 200 }, () => survey(draw(pictureOf(spot, W, H), COUNTING, random)).p);
    for (const level of [0.1, 0.5, 0.9]) {
      const below = ps.filter((p) => p < level).length / 200;
      expect(Math.abs(below - level)).toBeLessThan(4 * Math.sqrt((level * (1 - level)) / 200));
    }
  });

  it("is told uneven where it rises by a third from side to side, and by how much", () => {
    const tilted = pictureOf(spot, W, H).map((v, i) => v + 20 * ((i % W) / W - 0.5) * 0.33);
    const { p, swing } = survey(draw(tilted, COUNTING, createRandom(62)));
    expect(p).toBeLessThan(1e-9);
    expect(swing).toBeGreaterThan(0.08);
    expect(swing).toBeLessThan(0.17);
  });

  it("is not made uneven by struck pixels", () => {
    const picture = draw(pictureOf(spot, W, H), COUNTING, createRandom(63));
    for (const at of [70, 75, 3700]) picture[at]! += 1e4;
    expect(survey(picture).p).toBeGreaterThan(0.001);
  });

  it("says nothing where too few pixels are left", () => {
    const picture = draw(pictureOf(spot, W, H), COUNTING, createRandom(64));
    expect(surveyBackground(picture, W, H, [31, 29], [60, 60], COUNTING)).toEqual({ p: 1, swing: 0 });
  });

  it("compares the two sides of a trace", () => {
    const flat = draw(pictureOf(Float64Array.of(5e4, 70, 40, 300), 160), COUNTING, createRandom(65));
    const at = (picture: Float64Array) => surveyBackground(picture, 160, 1, [70, 0], [32, 0], COUNTING).p;
    expect(at(flat)).toBeGreaterThan(0.001);
    expect(at(flat.map((v, x) => v + (x < 70 ? 60 : 0)))).toBeLessThan(1e-9);
  });
});
