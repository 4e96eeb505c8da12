import { describe, expect, it } from "vitest";
import { acquisitionDefaults } from "../../src/stack/defaults.ts";
import { InputFault } from "../../src/stack/fault.ts";
import { memoryStack } from "../../src/stack/memory-stack.ts";

const acquisition = acquisitionDefaults(0.1, [0, 1, 2]);

describe("a stack in memory", () => {
  it("gives its frames, as a map or, one pixel high, as a trace", () => {
    const frames = [0, 1, 2].map((k) => Float64Array.of(k, k + 1, k + 2, k + 3));
    const map = memoryStack({ frames, height: 2, width: 2, acquisition });
    const trace = memoryStack({ frames, height: 1, width: 4, acquisition });
    const into = new Float64Array(4);
    map.read(2, into);
    expect([...into]).toEqual([2, 3, 4, 5]);
    expect([map.kind, map.source.shape, trace.kind, trace.source.shape]).toEqual([
      "map",
      [3, 2, 2],
      "trace",
      [3, 4],
    ]);
    expect(() => map.read(3, into)).toThrow(RangeError);
  });

  it("refuses frames, delays and a dark frame that do not fit", () => {
    const frames = [0, 1, 2].map(() => new Float64Array(4));
    const stack = (change: object) => () =>
      memoryStack({ frames, height: 2, width: 2, acquisition, ...change });
    expect(stack({ frames: [...frames.slice(1), new Float64Array(3)] })).toThrow(/frame 3 holds 3 values/);
    expect(stack({ frames: frames.slice(1) })).toThrow(/3 delays are given for 2 frames/);
    expect(stack({ dark: new Float64Array(3) })).toThrow(InputFault);
  });

  it("takes a detector that says nothing as photon counting", () => {
    expect(acquisition.detector).toEqual({
      offset: 0,
      gain: 1,
      readNoise: 0,
      excessNoise: 1,
      saturation: null,
    });
    const partly = acquisitionDefaults(0.1, [0], { detector: { gain: 8 }, sample: { emissionOrder: 2 } });
    expect(partly.detector).toMatchObject({ gain: 8, offset: 0 });
    expect(partly.sample).toMatchObject({ emissionOrder: 2, temperature: null });
  });
});
