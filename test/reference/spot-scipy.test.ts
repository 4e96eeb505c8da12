import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { fitPatch } from "../../src/frame/fit-spot.ts";
import { toParameters, toSpot } from "../../src/frame/pixel-spot.ts";
import { wholePatch } from "../frame/pictures.ts";

interface Frame {
  readonly counts: number[];
  readonly truth: number[];
  readonly parameters: number[];
  readonly u: number[];
}

/**
 * Poisson maximum-likelihood fits made with SciPy, which shares no code with this project
 * (scripts/make-reference-stacks.py): N, x, y, Σxx, Σxy, Σyy, B in µm and photons, u from the inverse Fisher matrix.
 */
const { cases } = JSON.parse(
  readFileSync(new URL("../data/scipy/spot-fits.json", import.meta.url), "utf8"),
) as {
  cases: {
    name: string;
    kind: "map" | "trace";
    height: number;
    width: number;
    pixel_um: number;
    frames: Frame[];
  }[];
};

const frames = cases.flatMap(({ frames, ...rest }) =>
  frames.map((frame, k) => ({ label: `${rest.name}, frame ${k + 1}`, ...rest, ...frame })),
);

describe("spots fitted by SciPy", () => {
  it.each(frames)("$label: the same parameters and uncertainties to 1e-4", (frame) => {
    const { kind, width, height, pixel_um: pixel, truth, parameters, u } = frame;
    const n = truth.length;
    const start = toParameters(
      kind,
      kind === "map"
        ? {
            photons: truth[0]! * 0.9,
            centre: [truth[1]! + 0.05, truth[2]! - 0.05],
            covariance: [truth[3]! * 1.2, 0, truth[5]! * 1.2],
            background: truth[6]! * 1.3,
          }
        : {
            photons: truth[0]! * 0.9,
            centre: [truth[1]! + 0.05, 0],
            covariance: [truth[2]! * 1.2, 0, 0],
            background: truth[3]! * 1.3,
          },
      pixel,
    );
    const patch = wholePatch(frame.counts, width, height);
    const fit = fitPatch(kind, patch, start, { excess: 1, floor: 0 });
    expect(fit.converged).toBe(true);
    const spot = toSpot(kind, fit.parameters, fit.covariance, pixel, { reducedChi2: 1, outliers: 0 });
    const { photons, centre, covariance, background, uncertainty } = spot;
    const found =
      kind === "map"
        ? [photons, ...centre, ...covariance, background]
        : [photons, centre[0], covariance[0], background];
    for (let j = 0; j < n; j++) {
      // a parameter near 0 has no relative error: it is held to its uncertainty
      const size = Math.max(Math.abs(parameters[j]!), u[j]!);
      expect(Math.abs(found[j]! - parameters[j]!) / size).toBeLessThan(1e-4);
      expect(Math.abs(Math.sqrt(uncertainty[j * (n + 1)]!) / u[j]! - 1)).toBeLessThan(1e-4);
    }
  });
});
