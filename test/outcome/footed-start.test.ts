import { describe, expect, it } from "vitest";
import { fitStack } from "../../src/field/stack-fit/fit-stack.ts";
import { CANDIDATES, namesOf, type Values } from "../../src/field/stack-fit/parameters.ts";
import { readRecording } from "../../src/outcome/read-recording.ts";
import { stackDataOf } from "../../src/outcome/whole-stack.ts";
import { analysed, pull, recorded } from "./recordings.ts";
import { twoGaussians } from "./two-gaussians.ts";

/** A tenth of the light in a foot three times as wide. */
const HALO = [
  [0.9, 0.08],
  [0.1, 0.72],
] as const;
/** 1.3 of a wide Gaussian less 0.3 of a narrow one. */
const FLAT = [
  [-0.3, 0.08],
  [1.3, 0.16],
] as const;

const hasFoot = (candidates: readonly { parameters: Record<string, unknown> }[] | undefined): boolean =>
  candidates?.some(({ parameters }) => "foot_share" in parameters) ?? false;

describe("a spot that is no Gaussian from the first frames on", () => {
  const stack = twoGaussians(HALO, 3e4, 1);

  it("misleads a fit from a Gaussian start, and not one from a core on a foot", () => {
    const data = stackDataOf(readRecording(stack, {}));
    const start: Values = {
      amplitude: 3e4,
      x: 3.17,
      y: 3.17,
      s: 0.14,
      D: 0.02,
      tau: 5,
      background: 0.3,
      foot_share: 0.3,
      foot_ratio: 2.5,
    };
    const pulled = (footed: boolean): Record<string, number> => {
      const names = namesOf("map", CANDIDATES[0]!, { start: "round", diffusion: "isotropic", footed });
      const { parameters, covariance, converged } = fitStack(data, names, start);
      expect(converged).toBe(true);
      const truth: Record<string, number> = { D: 0.02, tau: 5, s: 0.144, foot_share: 0.1, foot_ratio: 9 };
      return Object.fromEntries(
        names.flatMap((name, i) => {
          const u = Math.sqrt(covariance[i * names.length + i]!);
          return truth[name] === undefined ? [] : [[name, (parameters[i]! - truth[name]) / u]];
        }),
      );
    };
    expect(Math.abs(pulled(false).D!)).toBeGreaterThan(5);
    for (const one of Object.values(pulled(true))) expect(Math.abs(one)).toBeLessThan(3);
  });

  it("gives the headline from the fit that starts on a foot, and says why the widths mislead", () => {
    const { quantities, verdict, field } = analysed(stack).result;
    expect(quantities.diffusion_coefficient.from).toBe("field");
    expect(Math.abs(pull(quantities.diffusion_coefficient, 0.2))).toBeLessThan(3);
    expect(field?.preferred).toBe("diffusion");
    const reason = verdict.reasons.find(({ code }) => code === "widths-would-mislead");
    expect(reason?.text).toMatch(
      /no Gaussian from the first frames on but a core on a foot .* times as wide/,
    );
  });

  it("may have a flat top", () => {
    const { quantities, verdict } = analysed(twoGaussians(FLAT, 1e5, 2)).result;
    expect(Math.abs(pull(quantities.diffusion_coefficient, 0.2))).toBeLessThan(3);
    expect(verdict.reasons[0]?.text).toContain("its top is flat");
  });

  it("is not seen where traps make the foot and annihilation the flat top", () => {
    const lives = [
      { capture: "0.2 /ns", trap_light: 1, trap_lifetime: "20 ns" },
      { annihilation: "0.8 /ns" },
    ];
    const preferred = lives.map((life) => {
      const { field } = analysed(
        recorded({ recording: { frames: 16, photons: 1e5 }, time: { step: "0.6 ns" }, life }).stack,
      ).result;
      expect(hasFoot(field?.candidates)).toBe(false);
      return field?.preferred;
    });
    expect(preferred).toEqual(["capture", "annihilation"]);
  });
});
