import type { NoiseLaw, Patch } from "./patch.ts";
import { pixelVariance } from "./patch.ts";

/**
 * The hot loop: score and Fisher information of one spot in one frame.
 *
 * Model, in pixels and photons: m(r) = N/(2π√|Σ|)·exp(−½ (r−c)ᵀΣ⁻¹(r−c)) + B on a map; on a trace one axis and
 * N/√(2πΣxx). With the detector's variance v = F·m + r² the quasi-score is Σ (d − m)/v · ∂m/∂p and the Fisher
 * information Σ ∂m/∂p·∂m/∂q / v (McCullagh and Nelder, Generalized Linear Models, 2nd ed., 1989, sections 2.5 and
 * 9.2); for F = 1, r = 0 they are those of the Poisson likelihood.
 *
 * Every derivative of m is a polynomial of degree ≤ 2 in (dx, dy) times the Gaussian g, or 1. So one pass collects
 * the sums of ρ·g·dxᵃdyᵇ (a+b ≤ 2), w·g·dxᵃdyᵇ (a+b ≤ 2) and w·g²·dxᵃdyᵇ (a+b ≤ 4), with w = 1/v and
 * ρ = (d − m)/v, and a small linear map turns them into score and information. Along a row the exponent is quadratic
 * in x, so g follows from its neighbour by two multiplications, started at the row's peak, where it cannot underflow.
 */

/** Parameters in the order N, x, y, Σxx, Σxy, Σyy, B (map) or N, x, Σxx, B (trace); pixels and photons. */
export type Parameters = Float64Array;

export const MAP_PARAMETERS = 7;
export const TRACE_PARAMETERS = 4;

export interface Evaluation {
  /** Quasi-score, one entry a parameter. */
  readonly score: Float64Array;
  /** Fisher information, row-major. */
  readonly information: Float64Array;
  /** Pearson's χ², Σ (d − m)²/v over the patch. */
  pearson: number;
  /** Pixels that count in `pearson`. */
  pixels: number;
}

export function createEvaluation(parameters: number): Evaluation {
  return {
    score: new Float64Array(parameters),
    information: new Float64Array(parameters * parameters),
    pearson: 0,
    pixels: 0,
  };
}

// Moments of the current pass; one thread, one pass at a time, no allocation in the loop.
/** Σ ρ·g·dxᵃdyᵇ for (a,b) = 00 10 01 20 11 02, then Σ ρ. */
const residualMoments = new Float64Array(7);
/** Σ w·g·dxᵃdyᵇ for (a,b) = 00 10 01 20 11 02, then Σ w. */
const linearMoments = new Float64Array(7);
/** Σ w·g²·dxᵃdyᵇ at index 5a + b, a + b ≤ 4. */
const squareMoments = new Float64Array(25);
let pearson = 0;

/** Powers of (dx, dy) of the six Gaussian basis functions, in the order used throughout. */
const POWER_X = [0, 1, 0, 2, 1, 0] as const;
const POWER_Y = [0, 0, 1, 0, 1, 2] as const;

const basis = new Float64Array(49);
const transform = new Float64Array(49);
const half = new Float64Array(49);

/**
 * Evaluates score and information of a map's seven parameters.
 *
 * @param p N, x, y, Σxx, Σxy, Σyy, B; Σ positive definite
 */
export function evaluateMap(patch: Patch, p: Parameters, noise: NoiseLaw, out: Evaluation): void {
  const xx = p[3]!;
  const xy = p[4]!;
  const yy = p[5]!;
  const determinant = xx * yy - xy * xy;
  const pxx = yy / determinant;
  const pxy = -xy / determinant;
  const pyy = xx / determinant;
  const unit = 1 / (2 * Math.PI * Math.sqrt(determinant));
  const peak = p[0]! * unit;
  accumulate(patch, peak, p[1]!, p[2]!, pxx, pxy, pyy, p[6]!, noise);

  // ∂m/∂p as combinations of the basis g·{1, dx, dy, dx², dxdy, dy²} and 1
  transform.fill(0);
  transform[0] = unit;
  row(1, 0, peak * pxx, peak * pxy, 0, 0, 0);
  row(2, 0, peak * pxy, peak * pyy, 0, 0, 0);
  row(3, -0.5 * peak * pxx, 0, 0, 0.5 * peak * pxx * pxx, peak * pxx * pxy, 0.5 * peak * pxy * pxy);
  row(4, -peak * pxy, 0, 0, peak * pxx * pxy, peak * (pxx * pyy + pxy * pxy), peak * pxy * pyy);
  row(5, -0.5 * peak * pyy, 0, 0, 0.5 * peak * pxy * pxy, peak * pxy * pyy, 0.5 * peak * pyy * pyy);
  transform[48] = 1;
  assemble(7, patch, p[6]!, noise, out);
}

/**
 * Evaluates score and information of a trace's four parameters; the patch is one pixel high.
 *
 * @param p N, x, Σxx, B; Σxx > 0
 */
export function evaluateTrace(patch: Patch, p: Parameters, noise: NoiseLaw, out: Evaluation): void {
  const precision = 1 / p[2]!;
  const unit = Math.sqrt(precision / (2 * Math.PI));
  const peak = p[0]! * unit;
  accumulate(patch, peak, p[1]!, patch.rectangle.y0, precision, 0, 0, p[3]!, noise);

  transform.fill(0);
  transform[0] = unit;
  transform[7 + 1] = peak * precision;
  transform[14 + 0] = -0.5 * peak * precision;
  transform[14 + 3] = 0.5 * peak * precision * precision;
  transform[21 + 6] = 1;
  assemble(4, patch, p[3]!, noise, out);
}

function row(
  index: number,
  one: number,
  dx: number,
  dy: number,
  dxx: number,
  dxy: number,
  dyy: number,
): void {
  const at = index * 7;
  transform[at] = one;
  transform[at + 1] = dx;
  transform[at + 2] = dy;
  transform[at + 3] = dxx;
  transform[at + 4] = dxy;
  transform[at + 5] = dyy;
}

function accumulate(
  patch: Patch,
  peak: number,
  cx: number,
  cy: number,
  pxx: number,
  pxy: number,
  pyy: number,
  background: number,
  noise: NoiseLaw,
): void {
  const { data } = patch;
  const { x0, y0, width, height } = patch.rectangle;
  const { excess, floor } = noise;
  const smallest = pixelVariance(noise, 0);
  residualMoments.fill(0);
  linearMoments.fill(0);
  squareMoments.fill(0);
  let squares = 0;
  const stride = Math.exp(-pxx);

  for (let j = 0; j < height; j++) {
    const dy = y0 + j - cy;
    const rowPeak = Math.round(cx - (pxy / pxx) * dy) - x0;
    const start = rowPeak < 0 ? 0 : rowPeak >= width ? width - 1 : rowPeak;
    const offset = j * width;
    const dxStart = x0 + start - cx;
    const gStart = Math.exp(-0.5 * (pxx * dxStart * dxStart + 2 * pxy * dxStart * dy + pyy * dy * dy));
    let r0 = 0;
    let r1 = 0;
    let r2 = 0;
    let rAll = 0;
    let l0 = 0;
    let l1 = 0;
    let l2 = 0;
    let lAll = 0;
    let q0 = 0;
    let q1 = 0;
    let q2 = 0;
    let q3 = 0;
    let q4 = 0;
    for (let direction = 1; direction >= -1; direction -= 2) {
      let i = start;
      let dx = dxStart;
      let g = gStart;
      let ratio = Math.exp(-0.5 * pxx - direction * (pxx * dx + pxy * dy));
      if (direction < 0) {
        i--;
        dx--;
        g *= ratio;
        ratio *= stride;
      }
      for (; i >= 0 && i < width; i += direction) {
        const mean = peak * g + background;
        let variance = excess * mean + floor;
        if (!(variance > smallest)) variance = smallest;
        const w = 1 / variance;
        const residual = data[offset + i]! - mean;
        const rho = residual * w;
        squares += residual * rho;
        const rg = rho * g;
        const rgx = rg * dx;
        rAll += rho;
        r0 += rg;
        r1 += rgx;
        r2 += rgx * dx;
        const wg = w * g;
        const wgx = wg * dx;
        lAll += w;
        l0 += wg;
        l1 += wgx;
        l2 += wgx * dx;
        const wgg = wg * g;
        const x1 = wgg * dx;
        const x2 = x1 * dx;
        const x3 = x2 * dx;
        q0 += wgg;
        q1 += x1;
        q2 += x2;
        q3 += x3;
        q4 += x3 * dx;
        g *= ratio;
        ratio *= stride;
        dx += direction;
      }
    }
    const dy2 = dy * dy;
    residualMoments[0]! += r0;
    residualMoments[1]! += r1;
    residualMoments[2]! += r0 * dy;
    residualMoments[3]! += r2;
    residualMoments[4]! += r1 * dy;
    residualMoments[5]! += r0 * dy2;
    residualMoments[6]! += rAll;
    linearMoments[0]! += l0;
    linearMoments[1]! += l1;
    linearMoments[2]! += l0 * dy;
    linearMoments[3]! += l2;
    linearMoments[4]! += l1 * dy;
    linearMoments[5]! += l0 * dy2;
    linearMoments[6]! += lAll;
    addSquares(q0, q1, q2, q3, q4, dy, dy2);
  }
  // one write to the module's variable: a number written there pixel by pixel is a new object every time
  pearson = squares;
  for (const index of patch.excluded)
    subtractPixel(patch, index, peak, cx, cy, pxx, pxy, pyy, background, noise);
}

/** Adds one row's Σ w·g²·dxᵃ, a = 0…4, times dyᵇ, a + b ≤ 4. */
function addSquares(
  q0: number,
  q1: number,
  q2: number,
  q3: number,
  q4: number,
  dy: number,
  dy2: number,
): void {
  const dy3 = dy2 * dy;
  squareMoments[0]! += q0;
  squareMoments[1]! += q0 * dy;
  squareMoments[2]! += q0 * dy2;
  squareMoments[3]! += q0 * dy3;
  squareMoments[4]! += q0 * dy3 * dy;
  squareMoments[5]! += q1;
  squareMoments[6]! += q1 * dy;
  squareMoments[7]! += q1 * dy2;
  squareMoments[8]! += q1 * dy3;
  squareMoments[10]! += q2;
  squareMoments[11]! += q2 * dy;
  squareMoments[12]! += q2 * dy2;
  squareMoments[15]! += q3;
  squareMoments[16]! += q3 * dy;
  squareMoments[20]! += q4;
}

/** Takes one pixel out of the sums again. */
function subtractPixel(
  patch: Patch,
  index: number,
  peak: number,
  cx: number,
  cy: number,
  pxx: number,
  pxy: number,
  pyy: number,
  background: number,
  noise: NoiseLaw,
): void {
  const { x0, y0, width } = patch.rectangle;
  const dx = x0 + (index % width) - cx;
  const dy = y0 + Math.floor(index / width) - cy;
  const g = Math.exp(-0.5 * (pxx * dx * dx + 2 * pxy * dx * dy + pyy * dy * dy));
  const mean = peak * g + background;
  const w = 1 / pixelVariance(noise, mean);
  const residual = patch.data[index]! - mean;
  pearson -= residual * residual * w;
  for (let k = 0; k < 6; k++) {
    const power = g * dx ** POWER_X[k]! * dy ** POWER_Y[k]!;
    residualMoments[k]! -= residual * w * power;
    linearMoments[k]! -= w * power;
  }
  residualMoments[6]! -= residual * w;
  linearMoments[6]! -= w;
  for (let a = 0; a <= 4; a++) {
    for (let b = 0; a + b <= 4; b++) squareMoments[5 * a + b]! -= w * g * g * dx ** a * dy ** b;
  }
}

/** Score = T·s and information = T·M·Tᵀ, with the pooled pixels' share of the background added. */
function assemble(n: number, patch: Patch, background: number, noise: NoiseLaw, out: Evaluation): void {
  for (let j = 0; j < 6; j++) {
    for (let k = 0; k < 6; k++) {
      basis[j * 7 + k] = squareMoments[5 * (POWER_X[j]! + POWER_X[k]!) + POWER_Y[j]! + POWER_Y[k]!]!;
    }
    basis[j * 7 + 6] = linearMoments[j]!;
    basis[42 + j] = linearMoments[j]!;
  }
  const w = 1 / pixelVariance(noise, background);
  basis[48] = linearMoments[6]! + patch.outerCount * w;
  const pooled = (patch.outerSum - patch.outerCount * background) * w;

  for (let a = 0; a < n; a++) {
    let score = transform[a * 7 + 6]! * pooled;
    for (let j = 0; j < 7; j++) {
      score += transform[a * 7 + j]! * residualMoments[j]!;
      let sum = 0;
      for (let k = 0; k < 7; k++) sum += transform[a * 7 + k]! * basis[k * 7 + j]!;
      half[a * 7 + j] = sum;
    }
    out.score[a] = score;
    for (let b = 0; b <= a; b++) {
      let sum = 0;
      for (let j = 0; j < 7; j++) sum += half[a * 7 + j]! * transform[b * 7 + j]!;
      out.information[a * n + b] = sum;
      out.information[b * n + a] = sum;
    }
  }
  out.pearson = pearson;
  out.pixels = patch.data.length - patch.excluded.length;
}
