import { z } from "zod";

/** The shape of result.json, version 1. The published JSON Schema is emitted from it (scripts/build.mjs). */
const number = z.number();
const interval = z.tuple([number, number]);

export const quantitySchema = z
  .strictObject({
    value: number.describe("best estimate; for an upper limit, the limit itself"),
    u: number.min(0).describe("combined standard uncertainty, k = 1"),
    u_statistical: number.min(0).describe("type A part: counting statistics through the fit"),
    u_systematic: number.min(0).describe("type B part: pixel size, time base, temperature"),
    interval95: interval.describe("95 % coverage interval"),
    unit: z.string(),
    from: z
      .enum(["line", "power_law", "arrest", "broken_line", "field", "decay", "outcome"])
      .describe("which fit the number comes from"),
    upper_limit: z
      .boolean()
      .optional()
      .describe("true where nothing moved: value is a one-sided 95 % upper limit"),
  })
  .describe("a quantity with its uncertainty");

const candidateName = z.enum([
  "diffusion",
  "annihilation",
  "capture",
  "annihilation_and_capture",
  "repulsion",
  "annihilation_and_repulsion",
]);

const withU = z.strictObject({ value: number, u: number.min(0) });
const fitted = z.strictObject({
  value: number,
  u: number.min(0).nullable().describe("null where the data do not determine the fit"),
});
const ranged = fitted.extend({
  interval95: z
    .tuple([number.nullable(), number.nullable()])
    .describe("null for an end that the data do not set: a rate that may be zero, a lifetime without limit"),
  interval_from: z
    .enum(["covariance", "profile"])
    .describe("profile: of the likelihood, where it is far from normal"),
});

const closureOf = z
  .strictObject({
    truth: number.describe("the fitted model's own value, in the quantity's unit"),
    bias: number.nullable().describe("mean of estimate − truth, in the quantity's unit"),
    mean_pull: number.nullable().describe("mean of (estimate − truth)/u"),
    u_mean_pull: number.min(0).nullable().describe("its counting error"),
    spread: number.min(0).nullable().describe("standard deviation of the pulls"),
    coverage: number.min(0).max(1).describe("share of the 95 % intervals that hold the truth"),
    u_coverage: number.min(0).describe("its counting error at 0.95"),
    given: number.int().describe("stacks that gave the quantity"),
    upper_limits: number.int().describe("stacks that gave an upper limit only; they have no pull"),
  })
  .nullable();

export const lawSchema = z.strictObject({
  formula: z.string(),
  parameters: z.record(z.string(), z.strictObject({ value: number, u: number.min(0), unit: z.string() })),
  chi2: number,
  degrees_of_freedom: z.number().int(),
  p_value: number.describe("probability of a χ² at least as large if the law is true"),
  aicc: number,
  weight: number.describe("corrected Akaike weight among the candidates"),
  converged: z.boolean(),
});

export const frameSchema = z.strictObject({
  index: z.number().int(),
  delay_ns: number,
  photons: number.nullable(),
  u_photons: number.nullable(),
  x_um: number.nullable(),
  y_um: number.nullable(),
  variance_um2: number.nullable().describe("width per axis: half the trace of Σ on a map, Σxx on a trace"),
  u_variance_um2: number.nullable(),
  variance_xx_um2: number.nullable(),
  variance_xy_um2: number.nullable(),
  variance_yy_um2: number.nullable(),
  msd_um2: number.nullable().describe("tr(Σ − Σ₀) relative to the fitted intercept"),
  u_msd_um2: number.nullable(),
  background: number.nullable().describe("photons per pixel"),
  reduced_chi2: number.nullable(),
  hot_pixels: z.number().int(),
  used: z.boolean().describe("in the fit of the law of spread"),
  used_in_decay: z.boolean(),
  flags: z.array(
    z.enum([
      "before-pulse",
      "too-dim",
      "saturated",
      "empty",
      "fit-failed",
      "outside-window",
      "trap-dominated",
    ]),
  ),
});

export const resultSchema = z.strictObject({
  schema: z.literal("gleamwalk.result/1"),
  input: z.strictObject({
    file: z.string(),
    sha256: z.string(),
    shape: z.array(z.number().int()),
    axes: z.string(),
  }),
  acquisition: z.record(z.string(), z.strictObject({ text: z.string(), from: z.string() })),
  verdict: z.strictObject({
    level: z.enum(["sound", "caution", "unsound"]),
    reasons: z.array(
      z.strictObject({
        code: z.string(),
        level: z.enum(["note", "caution", "unsound"]),
        text: z.string().describe("what was seen"),
        advice: z.string().describe("what to do about it"),
      }),
    ),
  }),
  quantities: z.strictObject({
    diffusion_coefficient: quantitySchema,
    lifetime: quantitySchema.nullable(),
    diffusion_length: quantitySchema.nullable(),
    mobility: quantitySchema.nullable(),
  }),
  lengths: z
    .array(z.strictObject({ formula: z.string(), value_um: number, u_um: number.min(0) }))
    .describe("L by its definition and by the formulas that papers quote: √(Dτ), √(2Dτ), √(4Dτ)"),
  tensor: z
    .strictObject({ xx: withU, xy: withU, yy: withU, major: withU, minor: withU, angle_deg: withU })
    .nullable()
    .describe("diffusion tensor, cm²/s, angle from the x axis; maps only"),
  transport: z.strictObject({
    preferred: z.enum(["line", "power_law", "arrest", "broken_line"]),
    window: z.strictObject({ from_ns: number, to_ns: number, frames: z.number().int() }),
    models: z.record(z.enum(["line", "power_law", "arrest", "broken_line"]), lawSchema.nullable()),
    exponent: withU.nullable().describe("α of Σ = Σ₀ + 2Γ t^α"),
    runs_p_value: number.nullable(),
    birge_factor: number.min(1),
  }),
  decay: z
    .strictObject({
      preferred: z.enum(["exponential", "two_exponentials", "stretched", "annihilation"]),
      models: z.record(
        z.enum(["exponential", "two_exponentials", "stretched", "annihilation"]),
        lawSchema.nullable(),
      ),
      amplitude_averaged_lifetime_ns: withU,
      intensity_averaged_lifetime_ns: withU,
      birge_factor: number.min(1),
    })
    .nullable(),
  density: z
    .strictObject({
      density_per_cm2: withU,
      from: z.enum(["stated", "blue shift"]),
      degeneracy_temperature_k: withU.nullable(),
      filling: number.nullable().describe("n/n_Q"),
      degenerate_mobility: withU.nullable(),
    })
    .nullable(),
  field: z
    .strictObject({
      preferred: candidateName,
      adopted: z.boolean().describe("true where the headline quantities come from this fit"),
      D: ranged.describe("cm²/s; of few excitons, where they repel each other"),
      tau: ranged.describe("ns; of free excitons"),
      diffusion_length: fitted.describe(
        "µm; where free excitons end or are caught; with repulsion at this density, and √(Dτ) at a low one",
      ),
      repulsion: ranged
        .nullable()
        .describe("β = u₀n₀/k_BT; D is 1 + β times as large at the centre right after the pulse"),
      u0_n0: fitted.nullable().describe("meV; the blue shift that β means, where a temperature is stated"),
      u0: fitted.nullable().describe("µeV µm²; where a density is stated too"),
      k_n0: ranged.nullable().describe("1/ns; annihilation at the centre right after the pulse"),
      k: fitted.nullable().describe("cm²/s; where a density is stated"),
      capture: ranged.nullable().describe("1/ns"),
      trap_lifetime: ranged.nullable().describe("ns"),
      chi2: number,
      degrees_of_freedom: z.number().int(),
      p_value: number,
      correlations: z
        .array(z.strictObject({ a: z.string(), b: z.string(), r: number }))
        .describe("pairs of parameters with |r| > 0.8"),
      candidates: z.array(
        z.strictObject({
          name: candidateName,
          parameters: z.record(
            z.string(),
            z.strictObject({ value: number, u: number.min(0).nullable(), unit: z.string() }),
          ),
          p_value: number,
          aicc: number,
          weight: number,
          converged: z.boolean(),
          reason: z.string(),
        }),
      ),
    })
    .nullable()
    .describe("the whole-stack fit of the reaction–diffusion model, when made"),
  closure: z
    .strictObject({
      stacks: number.int().describe("drawn and analysed"),
      asked: number.int(),
      failed: number.int().describe("of the stacks, those that could not be analysed"),
      seed: number.int(),
      quantities: z.strictObject({
        diffusion_coefficient: closureOf,
        lifetime: closureOf,
        diffusion_length: closureOf,
      }),
    })
    .nullable()
    .default(null)
    .describe("bias and coverage over stacks drawn from the fitted model, when asked for"),
  budget: z.array(
    z.strictObject({
      quantity: z.enum(["diffusion_coefficient", "diffusion_length", "mobility"]),
      input: z.string(),
      type: z.enum(["A", "B"]),
      u: number.min(0),
      unit: z.string(),
      sensitivity: number,
      contribution: number.min(0).describe("|sensitivity|·u in the quantity's unit"),
    }),
  ),
  frames: z.array(frameSchema),
  provenance: z.strictObject({
    version: z.string(),
    options: z.record(z.string(), z.union([z.string(), z.number(), z.boolean()])),
    started: z.string(),
    seconds: number,
  }),
});

export type Result = z.infer<typeof resultSchema>;
export type Quantity = z.infer<typeof quantitySchema>;
export type Law = z.infer<typeof lawSchema>;
export type FrameRow = z.infer<typeof frameSchema>;
export type TransportLaw = Result["transport"]["preferred"];
export type DecayLaw = NonNullable<Result["decay"]>["preferred"];
