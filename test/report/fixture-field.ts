import type { Analysis } from "../../src/outcome/analysis.ts";
import type { Result } from "../../src/outcome/result.ts";
import { makeAnalysis } from "./fixture.ts";

type Field = NonNullable<Result["field"]>;
type Candidate = Field["candidates"][number];

const normal = (value: number, u: number): Field["D"] => ({
  value,
  u,
  interval95: [value - 1.96 * u, value + 1.96 * u],
  interval_from: "covariance",
});

const none = { converged: false, weight: 0, reason: "the data do not determine every parameter" };
const done = { converged: true, reason: "a maximum was reached" };
const inNs = (value: number, u: number | null) => ({ value, u, unit: "ns" });
const inRate = (value: number, u: number | null) => ({ value, u, unit: "1/ns" });
const inPlane = (value: number, u: number | null) => ({ value, u, unit: "µm²/ns" });

const CANDIDATES: Candidate[] = [
  {
    name: "diffusion",
    parameters: { D: inPlane(0.056, 0.001), tau: inNs(4.74, 0.08) },
    p_value: 1e-9,
    aicc: 1_027_500.4,
    weight: 0,
    ...done,
  },
  {
    name: "annihilation",
    parameters: { D: inPlane(0.05, 0.0003), tau: inNs(6.03, 0.011), k_n0: inRate(0.807, 0.006) },
    p_value: 0.13,
    aicc: 1_000_000,
    weight: 0.9,
    ...done,
  },
  {
    name: "capture",
    parameters: { D: inPlane(0.0561, null), tau: inNs(3.38, null), capture: inRate(-0.0851, null) },
    p_value: 1e-9,
    aicc: 1_020_000,
    ...none,
  },
  {
    name: "annihilation_and_capture",
    parameters: {
      D_xx: inPlane(0.0512, 0.0004),
      D_xy: inPlane(-0.0021, 0.0002),
      D_yy: inPlane(0.0488, 0.0004),
      tau: inNs(6.1, 0.1),
      k_n0: inRate(0.8, 0.02),
      capture: inRate(0.004, 0.003),
      trap_lifetime: inNs(8.4, 2.1),
    },
    p_value: 0.12,
    aicc: 1_000_004.4,
    weight: 0.1,
    ...done,
  },
];

/** A whole-stack fit as the analysis hands it over: annihilation preferred. */
export function makeField(change: Partial<Field> = {}): Field {
  return {
    preferred: "annihilation",
    adopted: true,
    D: normal(0.5, 0.003),
    tau: normal(6.03, 0.011),
    diffusion_length: { value: 0.4562, u: 0.0005 },
    repulsion: null,
    u0_n0: null,
    u0: null,
    k_n0: normal(0.807, 0.006),
    k: null,
    capture: null,
    trap_lifetime: null,
    chi2: 60,
    degrees_of_freedom: 48,
    p_value: 0.13,
    correlations: [
      { a: "amplitude", b: "k_n0", r: 0.87 },
      { a: "tau", b: "k_n0", r: -0.81 },
    ],
    candidates: CANDIDATES,
    ...change,
  };
}

/** Half-width at half height of the whole-stack light below, µm. */
const HALF = 0.6;

/** A light that is no Gaussian, so that it cannot be mistaken for a frame's spot: B + P/(1 + r²/h²)². */
export function roundLight(x: number, y: number, frame: number): number {
  return 0.2 + (200 * Math.exp(-0.05 * frame)) / (1 + (x * x + y * y) / HALF ** 2) ** 2;
}

/** The invented recording with a whole-stack fit that leaves out the two frames before the pulse. */
export function withField(name: Parameters<typeof makeAnalysis>[0], change: Partial<Field> = {}): Analysis {
  const analysis = makeAnalysis(name);
  analysis.result.field = makeField(change);
  const { width, height, acquisition } = analysis.stack;
  const pixel = acquisition.space.pixel.value;
  const wholeLight = (frame: number, into: Float64Array): boolean => {
    if (frame < 2) return false;
    for (let k = 0; k < width * height; k++) {
      const [x, y] = [(k % width) - width / 2, Math.floor(k / width) - height / 2];
      into[k] = roundLight(x * pixel, y * pixel, frame);
    }
    return true;
  };
  return { ...analysis, wholeLight };
}

/** What closure over 98 of 100 stacks found. */
export function makeClosure(): NonNullable<Result["closure"]> {
  const found = { u_coverage: 0.022, given: 98, upper_limits: 0 };
  return {
    stacks: 98,
    asked: 100,
    failed: 1,
    seed: 1,
    quantities: {
      diffusion_coefficient: {
        truth: 0.5,
        bias: -0.0011,
        mean_pull: -0.11,
        u_mean_pull: 0.1,
        spread: 1.02,
        coverage: 0.94,
        ...found,
      },
      lifetime: null,
      diffusion_length: {
        truth: 0.456,
        bias: null,
        mean_pull: null,
        u_mean_pull: null,
        spread: null,
        coverage: 0.96,
        ...found,
        upper_limits: 98,
      },
    },
  };
}
