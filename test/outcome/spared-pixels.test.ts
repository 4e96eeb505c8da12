import { describe, expect, it } from "vitest";
import { CANDIDATES, namesOf } from "../../src/field/stack-fit/parameters.ts";
import { readRecording } from "../../src/outcome/read-recording.ts";
import { sparePixels } from "../../src/outcome/spared-pixels.ts";
import { stackDataOf } from "../../src/outcome/whole-stack.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";
import { draw, prepare } from "../field/stack-fit/field-stacks.ts";

const WIDTH = 40;
/** Off the spot by eleven pixels, in the third frame. */
const STRUCK = { frame: 2, index: 8 * WIDTH + 19 };

describe("sparePixels", () => {
  it("takes the top of a core on the glow of earlier pulses back into the fit, but not a struck pixel", () => {
    const prepared = prepare("earlier-pulses-dense");
    const whole = draw(prepared, 0);
    const frames = Array.from({ length: whole.frames }, (_, i) => {
      const counts = new Float64Array(WIDTH * WIDTH);
      whole.read(i, counts);
      if (i === STRUCK.frame) counts[STRUCK.index] = 400;
      return counts;
    });
    const { height, width, acquisition } = prepared;
    const reading = readRecording(memoryStack({ frames, height, width, acquisition }));
    const outOf = (data: ReturnType<typeof stackDataOf>) =>
      data.frames.flatMap(({ frame, patch }) =>
        patch.excluded.map((i) => {
          const { rectangle } = patch;
          const row = rectangle.y0 + Math.floor(i / rectangle.width);
          return { frame, index: row * WIDTH + rectangle.x0 + (i % rectangle.width) };
        }),
      );
    const data = stackDataOf(reading);
    expect(outOf(data).length).toBeGreaterThan(5);
    const names = namesOf("map", CANDIDATES[1]!, { start: "round", diffusion: "isotropic" });
    const parameters = Float64Array.from(names, (name) => prepared.truth[name]!);
    const spared = sparePixels(data, { names, parameters });
    expect(outOf(spared)).toEqual([STRUCK]);
    // what the widths were read from stays as it was
    expect(outOf(data).length).toBeGreaterThan(5);
    expect(sparePixels(spared, { names, parameters })).toBe(spared);
  });
});
