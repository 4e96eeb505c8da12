import { randomNormal, randomPoisson } from "d3-random";
import { uniformFloat64 } from "pure-rand/distribution/uniformFloat64";
import { xoroshiro128plus } from "pure-rand/generator/xoroshiro128plus";
import type { FrameFlag, Spot } from "../../src/frame/spot.ts";
import type { Analysis, CurvePoint } from "../../src/outcome/analysis.ts";
import type { FrameRow, Law, Quantity, Result } from "../../src/outcome/result.ts";
import type { Stack } from "../../src/stack/stack.ts";
import { budget, quantity, VERDICTS } from "./fixture-words.ts";

export type Case = "good" | "trapped" | "still";

export interface FixtureOptions {
  readonly frames?: number;
  /** Pixels along a side (map) or along the line (trace). */
  readonly side?: number;
  readonly kind?: "map" | "trace";
  readonly file?: string;
}

/** What is true in each case: µm, ns, photons. */
interface Truth {
  readonly variance: (delay: number) => number;
  readonly light: (delay: number) => number;
  readonly flags: (delay: number) => FrameFlag[];
  readonly detector: Stack["acquisition"]["detector"];
  readonly background: number;
}

const COUNTING = { offset: 0, gain: 1, readNoise: 0, excessNoise: 1, saturation: null };
const CAMERA = { offset: 100, gain: 8, readNoise: 6, excessNoise: 2, saturation: 65535 };
const lateOrEarly = (delay: number, last: number): FrameFlag[] => {
  if (delay < 0) return ["before-pulse"];
  return delay > last ? ["too-dim"] : [];
};

const TRUTH: Readonly<Record<Case, Truth>> = {
  good: {
    variance: (t) => 0.12 + 2 * 0.05 * t,
    light: (t) => 60_000 * Math.exp(-t / 8),
    flags: (t) => lateOrEarly(t, 20),
    detector: CAMERA,
    background: 0.4,
  },
  trapped: {
    variance: (t) => 0.12 + 2 * 0.06 * 4 * (1 - Math.exp(-t / 4)),
    light: (t) => 25_000 * (0.8 * Math.exp(-t / 4) + 0.2 * Math.exp(-t / 25)),
    flags: (t) => (t > 7 ? ["trap-dominated"] : lateOrEarly(t, 99)),
    detector: COUNTING,
    background: 0.15,
  },
  still: {
    variance: () => 0.16,
    light: (t) => 9_000 * Math.exp(-t / 6),
    flags: (t) => lateOrEarly(t, 14),
    detector: COUNTING,
    background: 0.1,
  },
};

const PIXEL = 0.1;

/**
 * An invented analysis with the stack it would have come from: seeded draws around a known truth, with errors of the
 * size that counting statistics give (2σ⁴/N per axis, N). It stands for what the analysis hands to the report.
 */
export function makeAnalysis(name: Case, options: FixtureOptions = {}): Analysis {
  const { frames = 50, side = 72, kind = "map" } = options;
  const truth = TRUTH[name];
  const generator = xoroshiro128plus(20_261_201);
  const source = () => uniformFloat64(generator);
  const draw = { poisson: randomPoisson.source(source), normal: randomNormal.source(source) };
  const delays = Array.from({ length: frames }, (_, i) => Number((-1 + (i * 25) / frames).toFixed(4)));
  const centre: readonly [number, number] =
    kind === "map" ? [(side / 2 - 3) * PIXEL, (side / 2 + 2) * PIXEL] : [(side / 2) * PIXEL, 0];
  const spots = delays.map((t) => (t < 0 ? null : makeSpot(truth, t, centre, kind, draw)));
  const rows = delays.map((t, index) => makeRow(index, t, spots[index] ?? null, truth, kind));
  const file = options.file ?? { good: "alder.tif", trapped: "birch.tif", still: "still.tif" }[name];
  const stack = makeStack(truth, delays, { side, kind, centre, file }, draw);
  return {
    result: makeResult(name, stack, rows),
    stack,
    spots,
    spreadCurve: curve(
      rows,
      (t) => truth.variance(t),
      (t, v) => Math.hypot(0.0015, 0.0006 * t) * (v > 1 ? 1.4 : 1),
    ),
    lightCurve: curve(rows, truth.light, (_, v) => 0.004 * v + 2),
    lightResiduals: rows.map((row) => (row.used_in_decay ? draw.normal(0, 1)() : null)),
    wholeLight: null,
  };
}

type Draw = { poisson: (mean: number) => () => number; normal: (mu: number, s: number) => () => number };

function makeSpot(
  truth: Truth,
  t: number,
  centre: readonly [number, number],
  kind: Stack["kind"],
  draw: Draw,
): Spot {
  const n = truth.light(t);
  const v = truth.variance(t);
  const faint = 1 + 6000 / n;
  const sd = v * Math.sqrt(2 / n) * faint;
  const width = () => Math.max(0.01, draw.normal(v, sd)());
  const variances =
    kind === "map" ? [n, v / n, v / n, sd * sd, (sd * sd) / 2, sd * sd, 1e-4] : [n, v / n, sd * sd, 1e-4];
  const size = variances.length;
  const uncertainty = new Float64Array(size * size);
  variances.forEach((value, i) => {
    uncertainty[i * size + i] = value;
  });
  return {
    photons: draw.normal(n, Math.sqrt(n) * faint)(),
    centre,
    covariance: kind === "map" ? [width(), draw.normal(0, sd / 2)(), width()] : [width(), 0, 0],
    background: truth.background,
    uncertainty,
    reducedChi2: draw.normal(1, 0.02)(),
    outliers: 0,
  };
}

function makeRow(
  index: number,
  delay: number,
  spot: Spot | null,
  truth: Truth,
  kind: Stack["kind"],
): FrameRow {
  const flags = truth.flags(delay);
  const used = flags.length === 0;
  const axes = kind === "map" ? 2 : 1;
  const v = spot === null ? null : (spot.covariance[0] + (kind === "map" ? spot.covariance[2] : 0)) / axes;
  const n = truth.light(delay);
  const uv = (truth.variance(delay) * Math.sqrt(2 / n) * (1 + 6000 / n)) / Math.sqrt(axes);
  return {
    index,
    delay_ns: delay,
    photons: spot?.photons ?? null,
    u_photons: spot === null ? null : Math.sqrt(n) * (1 + 6000 / n),
    x_um: spot?.centre[0] ?? null,
    y_um: spot === null || kind === "trace" ? null : spot.centre[1],
    variance_um2: v,
    u_variance_um2: spot === null ? null : uv,
    variance_xx_um2: spot?.covariance[0] ?? null,
    variance_xy_um2: spot === null || kind === "trace" ? null : spot.covariance[1],
    variance_yy_um2: spot === null || kind === "trace" ? null : spot.covariance[2],
    msd_um2: v === null ? null : axes * (v - truth.variance(0)),
    u_msd_um2: spot === null ? null : axes * uv,
    background: spot?.background ?? null,
    reduced_chi2: spot?.reducedChi2 ?? null,
    hot_pixels: spot?.outliers ?? 0,
    used,
    used_in_decay: used || flags.includes("trap-dominated"),
    flags: spot === null ? [...flags, "fit-failed"] : flags,
  };
}

function curve(
  rows: readonly FrameRow[],
  value: (t: number) => number,
  u: (t: number, v: number) => number,
): CurvePoint[] {
  const used = rows.filter((row) => row.used_in_decay).map((row) => row.delay_ns);
  const [from, to] = [Math.min(...used), Math.max(...used)];
  return Array.from({ length: 60 }, (_, i) => {
    const delay = from + ((to - from) * i) / 59;
    return { delay, value: value(delay), u: u(delay, value(delay)) };
  });
}

function makeStack(
  truth: Truth,
  delays: readonly number[],
  shape: { side: number; kind: Stack["kind"]; centre: readonly [number, number]; file: string },
  draw: Draw,
): Stack {
  const { side, kind, centre } = shape;
  const height = kind === "map" ? side : 1;
  const { offset, gain, readNoise, excessNoise } = truth.detector;
  const images = delays.map((t) => {
    const n = t < 0 ? 0 : truth.light(t);
    const v = truth.variance(t);
    return Float64Array.from({ length: side * height }, (_, k) => {
      const x = (k % side) * PIXEL - centre[0];
      const y = kind === "map" ? Math.floor(k / side) * PIXEL - centre[1] : 0;
      const peak = kind === "map" ? PIXEL ** 2 / (2 * Math.PI * v) : PIXEL / Math.sqrt(2 * Math.PI * v);
      const mean = n * peak * Math.exp(-(x * x + y * y) / (2 * v)) + truth.background;
      if (readNoise === 0) return offset + gain * draw.poisson(mean)();
      const photons = Math.max(0, draw.normal(mean, Math.sqrt(excessNoise * mean))());
      return Math.round(offset + gain * photons + draw.normal(0, readNoise)());
    });
  });
  return {
    kind,
    frames: delays.length,
    height,
    width: side,
    read: (index, into) => into.set(images[index] ?? []),
    dark: null,
    acquisition: {
      space: { pixel: { value: PIXEL, u: 0.001 }, calibration: "objective-50x", psfFwhm: null },
      time: { delays, gate: 0.25, relativeU: 0.005 },
      detector: truth.detector,
      slit: null,
      period: null,
      response: null,
      sample: {
        name: "Alder",
        spot: "3",
        temperature: { value: 295, u: 2 },
        emissionOrder: 1,
        density: null,
        blueShift: null,
        layerDistance: null,
        permittivity: null,
        mass: null,
      },
      conditions: {},
      settings: {
        "space.pixel": { text: "0.100 um ± 1 %", from: "acquisition file" },
        "time.first": { text: "-1 ns", from: "acquisition file" },
        "time.step": { text: "0.5 ns", from: "command line" },
        "time.gate": { text: "0.25 ns", from: "image metadata" },
        "detector.gain": { text: "8.0", from: "acquisition file" },
        "sample.name": { text: "Alder <bath 2>", from: "acquisition file" },
        "sample.temperature": { text: "295 K ± 2 K", from: "acquisition file" },
        "sample.emission_order": { text: "1", from: "default" },
      },
    },
    source: {
      file: shape.file,
      sha256: "3f1c".repeat(16),
      shape: kind === "map" ? [delays.length, side, side] : [delays.length, side],
      axes: kind === "map" ? "TYX" : "TX",
    },
  };
}

function law(formula: string, parameters: Law["parameters"], chi2: number, dof: number, weight: number): Law {
  const p = chi2 / dof > 2 ? 3e-5 : 0.41;
  return {
    formula,
    parameters,
    chi2,
    degrees_of_freedom: dof,
    p_value: p,
    aicc: chi2 + 4,
    weight,
    converged: true,
  };
}

function makeResult(name: Case, stack: Stack, rows: FrameRow[]): Result {
  const used = rows.filter((row) => row.used);
  const dof = used.length - 2;
  const trapped = name === "trapped";
  const d = {
    value: { good: 0.512, trapped: 0.61, still: 0.004 }[name],
    u: { good: 0.0343, trapped: 0.052, still: 0.011 }[name],
  };
  const D = { value: d.value, u: d.u, unit: "cm^2/s" };
  const sigma = { value: 0.1213, u: 0.0021, unit: "um^2" };
  const from = trapped ? "arrest" : "line";
  const lifetime: Quantity = quantity(8.21, 0.12, 0.04, "ns", "decay");
  return {
    schema: "gleamwalk.result/1",
    input: { ...stack.source, shape: [...stack.source.shape] },
    acquisition: { ...stack.acquisition.settings },
    verdict: VERDICTS[name],
    quantities: {
      diffusion_coefficient: quantity(d.value, d.u * 0.95, d.u * 0.3, "cm^2/s", from),
      lifetime,
      diffusion_length:
        name === "still"
          ? { ...quantity(0.2081, 0.05, 0.01, "um", "outcome"), upper_limit: true }
          : quantity(0.648, 0.021, 0.0065, "um", "outcome"),
      mobility: name === "still" ? null : quantity(d.value / 0.02542, 1.28, 0.42, "cm^2/(V s)", "outcome"),
    },
    lengths: [
      { formula: "L² = ∫ ½·MSD₁(t)·(−dN/dt) dt / N₀", value_um: 0.648, u_um: 0.022 },
      { formula: "√(Dτ)", value_um: 0.6483, u_um: 0.022 },
      { formula: "√(2Dτ)", value_um: 0.9169, u_um: 0.031 },
      { formula: "√(4Dτ)", value_um: 1.2967, u_um: 0.044 },
    ],
    tensor:
      stack.kind === "trace"
        ? null
        : {
            xx: { value: 0.53, u: 0.045 },
            xy: { value: -0.012, u: 0.03 },
            yy: { value: 0.49, u: 0.044 },
            major: { value: 0.534, u: 0.046 },
            minor: { value: 0.487, u: 0.044 },
            angle_deg: { value: -15, u: 35 },
          },
    transport: {
      preferred: from,
      window: { from_ns: used[0]?.delay_ns ?? 0, to_ns: used.at(-1)?.delay_ns ?? 0, frames: used.length },
      models: {
        line: law(
          "Σ = Σ₀ + 2Dt",
          { D, "Σ₀": sigma },
          trapped ? dof * 2.6 : dof * 1.04,
          dof,
          trapped ? 0.01 : 0.72,
        ),
        power_law: law(
          "Σ = Σ₀ + 2Γt^α",
          {
            Γ: { value: 0.05, u: 0.004, unit: "um^2/ns^α" },
            α: { value: trapped ? 0.62 : 1.02, u: 0.06, unit: "1" },
          },
          dof * 1.05,
          dof - 1,
          trapped ? 0.13 : 0.22,
        ),
        arrest: law(
          "Σ = Σ₀ + 2D·t_a·(1 − exp(−t/t_a))",
          { D, t_a: { value: 4.1, u: 0.6, unit: "ns" } },
          dof * 1.03,
          dof - 1,
          trapped ? 0.86 : 0.06,
        ),
        broken_line: null,
      },
      exponent: { value: trapped ? 0.62 : 1.02, u: 0.06 },
      runs_p_value: 0.37,
      birge_factor: trapped ? 1.23 : 1,
    },
    decay: {
      preferred: trapped ? "two_exponentials" : "exponential",
      models: {
        exponential: law(
          "N = N₀ exp(−t/τ)",
          { τ: { value: 8.21, u: 0.12, unit: "ns" } },
          trapped ? 310 : 41,
          40,
          trapped ? 0 : 0.7,
        ),
        two_exponentials: law(
          "N = N₁ exp(−t/τ₁) + N₂ exp(−t/τ₂)",
          { τ1: { value: 4.1, u: 0.1, unit: "ns" }, τ2: { value: 25, u: 2.1, unit: "ns" } },
          39,
          38,
          trapped ? 0.97 : 0.2,
        ),
        stretched: null,
        annihilation: null,
      },
      amplitude_averaged_lifetime_ns: { value: 8.21, u: 0.12 },
      intensity_averaged_lifetime_ns: { value: trapped ? 16.4 : 8.21, u: 0.3 },
      birge_factor: 1,
    },
    density: null,
    field: null,
    closure: null,
    budget: budget(),
    frames: rows,
    provenance: {
      version: "0.1.0",
      options: { seed: 1 },
      started: "2026-12-01T09:30:00.000Z",
      seconds: 0.84,
    },
  };
}
