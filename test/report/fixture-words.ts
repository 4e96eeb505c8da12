import type { Quantity, Result } from "../../src/outcome/result.ts";

export function quantity(
  value: number,
  a: number,
  b: number,
  unit: string,
  from: Quantity["from"],
): Quantity {
  const u = Math.hypot(a, b);
  return {
    value,
    u,
    u_statistical: a,
    u_systematic: b,
    interval95: [value - 1.96 * u, value + 1.96 * u],
    unit,
    from,
  };
}

export const VERDICTS: Readonly<Record<"good" | "trapped" | "still", Result["verdict"]>> = {
  good: {
    level: "sound",
    reasons: [
      {
        code: "spot-cut-off",
        level: "note",
        text: "In the last 4 frames used, 2 % of the spot lies outside the picture.",
        advice: "Nothing to do: the fit accounts for it.",
      },
    ],
  },
  trapped: {
    level: "unsound",
    reasons: [
      {
        code: "trap-limited",
        level: "unsound",
        text: "The spot stops growing after about 4 ns while the decay slows from 4 ns to 25 ns: most of the late light comes from excitons that no longer move.",
        advice:
          "Quote D of the early window (0 to 7 ns) together with the arrest time, and measure at another temperature: traps freeze in when cold.",
      },
      {
        code: "line-does-not-fit",
        level: "caution",
        text: "A straight line leaves χ²/dof = 2.60 (p < 0.001).",
        advice: "Use the arrest law's initial slope, as printed here.",
      },
    ],
  },
  still: {
    level: "caution",
    reasons: [
      {
        code: "no-motion-detected",
        level: "caution",
        text: "D is 0.004(11) cm²/s, consistent with zero.",
        advice:
          "Quote the upper limits. To see more, use a smaller spot or collect more light at late delays.",
      },
    ],
  },
};

export function budget(): Result["budget"] {
  return [
    {
      quantity: "diffusion_coefficient",
      input: "counting statistics",
      type: "A",
      u: 0.0326,
      unit: "cm^2/s",
      sensitivity: 1,
      contribution: 0.0326,
    },
    {
      quantity: "diffusion_coefficient",
      input: "pixel size",
      type: "B",
      u: 0.001,
      unit: "um",
      sensitivity: 10.24,
      contribution: 0.01024,
    },
    {
      quantity: "diffusion_coefficient",
      input: "time base",
      type: "B",
      u: 0.005,
      unit: "1",
      sensitivity: -0.512,
      contribution: 0.00256,
    },
    {
      quantity: "diffusion_length",
      input: "counting statistics",
      type: "A",
      u: 0.021,
      unit: "um",
      sensitivity: 1,
      contribution: 0.021,
    },
    {
      quantity: "diffusion_length",
      input: "pixel size",
      type: "B",
      u: 0.001,
      unit: "um",
      sensitivity: 6.48,
      contribution: 0.00648,
    },
    {
      quantity: "mobility",
      input: "counting statistics",
      type: "A",
      u: 1.28,
      unit: "cm^2/(V s)",
      sensitivity: 1,
      contribution: 1.28,
    },
    {
      quantity: "mobility",
      input: "temperature",
      type: "B",
      u: 2,
      unit: "K",
      sensitivity: -0.0683,
      contribution: 0.1366,
    },
  ];
}
