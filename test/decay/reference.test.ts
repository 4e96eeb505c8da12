import { describe, expect, it } from "vitest";
import { annihilationLaw } from "../../src/decay/annihilation.ts";
import { exponentialLaw } from "../../src/decay/exponential.ts";
import { fitDecays } from "../../src/decay/fit.ts";
import { instrument } from "../../src/decay/instrument.ts";
import type { Law } from "../../src/decay/law.ts";
import { stretchedLaw } from "../../src/decay/stretched.ts";
import type { Timing } from "../../src/decay/timing.ts";
import { twoExponentialsLaw } from "../../src/decay/two-exponentials.ts";
import reference from "./reference.json" with { type: "json" };

// Numbers from scripts/make-decay-reference.py: NumPy 1.24.2, SciPy 1.10.1, each law by its definition.

const LAWS = {
  exponential: exponentialLaw,
  two_exponentials: twoExponentialsLaw,
  stretched: stretchedLaw,
  annihilation: annihilationLaw,
};
type Name = keyof typeof LAWS;

const responses = (fwhm: number | null): [string, Timing["response"]][] =>
  fwhm === null
    ? [["none", null]]
    : [
        ["gaussian", { kind: "gaussian", fwhm }],
        ["sampled", sampledGaussian(fwhm)],
      ];

/** The same Gaussian as a table of 161 samples: straight lines between them are wrong by about 1e-3 of its height. */
function sampledGaussian(fwhm: number): Timing["response"] {
  const s = fwhm / (2 * Math.sqrt(2 * Math.LN2));
  const delays = Array.from({ length: 161 }, (_, k) => (k - 80) * 0.06 * s);
  return { kind: "sampled", delays, counts: delays.map((t) => 1e4 * Math.exp(-(t * t) / (2 * s * s))) };
}

function evaluate(law: Law, parameters: readonly number[], frames: number) {
  const value = new Float64Array(frames);
  const jacobian = law.names.map(() => new Float64Array(frames));
  law.evaluate(parameters, value, jacobian);
  return { value, jacobian };
}

describe("the light of each law through gate, response and earlier pulses", () => {
  for (const { law, order, parameters, delays, gate, fwhm, period, light } of reference.observations) {
    for (const [kind, response] of responses(fwhm)) {
      const title = `${law}, density to the power ${order}, gate ${gate} ns, response ${kind}, period ${period ?? "none"}`;
      const timing = { delays, gate, response, period, transmission: null };
      const made = LAWS[law as Name](instrument(timing), order as 1 | 2);

      it(`${title}: as by numerical integration in NumPy`, () => {
        const { value } = evaluate(made, parameters, delays.length);
        const brightest = Math.max(...light);
        const tolerance = kind === "sampled" ? 6e-4 : law === "exponential" ? 1e-9 : 3e-6;
        value.forEach((x, i) => {
          expect(Math.abs(x - light[i]!) / brightest).toBeLessThan(tolerance);
        });
      });

      it(`${title}: derivatives as by differences`, () => {
        const { jacobian } = evaluate(made, parameters, delays.length);
        parameters.forEach((p, j) => {
          const h = 1e-5 * p;
          const at = (x: number) => evaluate(made, parameters.with(j, x), delays.length).value;
          const above = at(p + h);
          const below = at(p - h);
          const size = Math.max(...jacobian[j]!.map(Math.abs));
          jacobian[j]!.forEach((slope, i) => {
            expect(Math.abs((above[i]! - below[i]!) / (2 * h) - slope) / size).toBeLessThan(1e-6);
          });
        });
      });
    }
  }
});

describe("fits against scipy.optimize.curve_fit (SciPy 1.10.1) on the same data", () => {
  for (const made of reference.fits) {
    it(`${made.law}: parameters, standard uncertainties and χ² to 1e-4`, () => {
      const { fits } = fitDecays({
        ...made,
        response: null,
        period: null,
        transmission: null,
        emissionOrder: 1,
      });
      const fit = fits[made.law as Name]!;
      expect(fit.converged).toBe(true);
      made.parameters.forEach((p, j) => {
        expect(fit.parameters[j]! / p).toBeCloseTo(1, 4);
        const n = made.parameters.length;
        expect(Math.sqrt(fit.covariance[j * n + j]!) / made.u[j]!).toBeCloseTo(1, 3);
      });
      expect(fit.chi2).toBeCloseTo(made.chi2, 6);
    });
  }
});
