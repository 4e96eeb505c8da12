import { readFileSync } from "node:fs";

/**
 * Readers for the Statistical Reference Datasets of the US National Institute of Standards and Technology
 * (test/data/nist-strd, public domain; layout in its README).
 */
function linesOf(path: string): string[] {
  return readFileSync(new URL(`../data/nist-strd/${path}`, import.meta.url), "latin1").split(/\r?\n/);
}

function rowsFrom(lines: string[], first: number): number[][] {
  return lines
    .slice(first)
    .filter((line) => line.trim() !== "")
    .map((line) => line.trim().split(/\s+/).map(Number));
}

export interface NonlinearSet {
  readonly y: number[];
  /** Predictors, one array each. */
  readonly x: number[][];
  /** Parameters of start 1 and start 2. */
  readonly starts: [number[], number[]];
  readonly certified: number[];
  readonly certifiedDeviations: number[];
  readonly residualSumOfSquares: number;
}

export function readNonlinear(name: string): NonlinearSet {
  const lines = linesOf(`nonlinear/${name}.dat`);
  const table = lines.flatMap((line) => {
    const match = /^\s*b\d+ =\s+(\S+)\s+(\S+)\s+(\S+)\s+(\S+)\s*$/.exec(line);
    return match ? [match.slice(1).map(Number)] : [];
  });
  const sum = lines.map((line) => /^Residual Sum of Squares:\s+(\S+)/.exec(line)).find((match) => match);
  const rows = rowsFrom(lines, 60);
  const column = (c: number) => table.map((row) => row[c]!);
  return {
    y: rows.map((row) => row[0]!),
    x: rows[0]!.slice(1).map((_, c) => rows.map((row) => row[c + 1]!)),
    starts: [column(0), column(1)],
    certified: column(2),
    certifiedDeviations: column(3),
    residualSumOfSquares: Number(sum![1]),
  };
}

/** The response and predictor of a one-predictor nonlinear set as the file prints them, for exact arithmetic. */
export function readDecimals(name: string): { y: string; x: string }[] {
  return linesOf(`nonlinear/${name}.dat`)
    .slice(60)
    .filter((line) => line.trim() !== "")
    .map((line) => {
      const [y, x] = line.trim().split(/\s+/);
      return { y: y!, x: x! };
    });
}

export interface LinearSet {
  readonly y: number[];
  readonly x: number[][];
  readonly certified: number[];
  readonly certifiedDeviations: number[];
  readonly residualDeviation: number;
}

export function readLinear(name: string): LinearSet {
  const lines = linesOf(`linear/${name}.dat`);
  const table = lines.slice(0, 60).flatMap((line) => {
    const match = /^\s*B\d+\s+(\S+)\s+(\S+)\s*$/.exec(line);
    return match ? [match.slice(1).map(Number)] : [];
  });
  const deviation = lines
    .map((line) => /^\s*Standard Deviation\s+(\S+)\s*$/.exec(line))
    .find((match) => match);
  const rows = rowsFrom(lines, 60);
  return {
    y: rows.map((row) => row[0]!),
    x: rows[0]!.slice(1).map((_, c) => rows.map((row) => row[c + 1]!)),
    certified: table.map((row) => row[0]!),
    certifiedDeviations: table.map((row) => row[1]!),
    residualDeviation: Number(deviation![1]),
  };
}

export function readUnivariate(name: string): { y: number[]; mean: number; standardDeviation: number } {
  const lines = linesOf(`univariate/${name}.dat`);
  const certified = (start: string) => {
    const line = lines.find((text) => text.startsWith(start) && /:\s+[-\d.]+/.test(text))!;
    return Number(/:\s+([-\d.]+)/.exec(line)![1]);
  };
  return {
    y: rowsFrom(lines, lines.findIndex((line) => /^-{5}/.test(line)) + 1).map((row) => row[0]!),
    mean: certified("Sample Mean"),
    standardDeviation: certified("Sample Standard Deviation"),
  };
}

/** Digits to which a value agrees with the certified one: −log₁₀ of the relative error, at most 11. */
export function digitsOf(value: number, certified: number): number {
  const error = Math.abs(value - certified) / Math.abs(certified);
  if (error === 0) return 11;
  return Math.max(0, Math.min(11, -Math.log10(error)));
}
