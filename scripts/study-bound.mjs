// The Cramér–Rao bound of D, τ and L of a plain scenario (round spot, one exponential): light, centre and background
// free in each frame, one line for the widths, one exponential through the light. Fisher information at the truth.
import { createEvaluation, evaluateMap } from "../dist/frame/kernel.js";
import { invertSymmetric } from "../dist/numerics/linear-algebra.js";
import { fitLine, meanDiffusion } from "../dist/transport/line.js";

/** @returns variances of D (cm²/s)², τ ns², L µm² */
export function boundsAtTruth(scenario, mean) {
  const { rows: height, columns: width, pixelX: pixel, delays } = scenario.recording;
  const truth = mean.truth;
  const used = delays.flatMap((delay, i) => (delay >= 0 ? [i] : []));
  const frames = used.map((i) => frameInformation(scenario, mean, i, width, height, pixel));
  const line = fitLine(
    frames.map((f, k) => ({
      frame: used[k],
      time: delays[used[k]],
      variance: f.variance,
      covariance: f.widthCovariance,
    })),
  );
  const n = frames.length;

  // light: independent part and what it shares through the line
  const covariance = new Float64Array(n * n);
  const shift = frames.map((f, k) => [
    ...f.perVariance,
    ...f.perVariance.map((s) => 2 * delays[used[k]] * s),
  ]);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) covariance[i * n + j] = bilinear(shift[i], shift[j], line.covariance);
    covariance[i * n + i] += frames[i].lightVariance;
  }
  if (!invertSymmetric(covariance, n)) throw new Error("no bound: the light's covariance is singular");
  const tau = truth.lifetime_ns;
  const slopes = used.map((i) => {
    const t = delays[i];
    const light = truth.frames[i].photons;
    return [light / truth.frames[used[0]].photons, (light * t) / tau ** 2];
  });
  const information = new Float64Array(4);
  const weighted = slopes.map(() => [0, 0]);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++)
      for (let a = 0; a < 2; a++) weighted[i][a] += covariance[i * n + j] * slopes[j][a];
  }
  for (let i = 0; i < n; i++)
    for (let a = 0; a < 2; a++)
      for (let b = 0; b < 2; b++) information[a * 2 + b] += slopes[i][a] * weighted[i][b];
  invertSymmetric(information, 2);
  const tauVariance = information[3];

  const dGradient = [0, 0, 0, 0.5, 0, 0.5];
  const d = meanDiffusion(line);
  let cross = 0;
  for (let i = 0; i < n; i++) {
    const byLight = information[2] * weighted[i][0] + information[3] * weighted[i][1];
    cross += byLight * bilinear(shift[i], dGradient, line.covariance);
  }
  const length2 = d.value * tau;
  const length2Variance = tau ** 2 * d.variance + d.value ** 2 * tauVariance + 2 * tau * d.value * cross;
  return { d: 100 * d.variance, tau: tauVariance, length: length2Variance / (4 * length2) };
}

function frameInformation(scenario, mean, i, width, height, pixel) {
  const truth = mean.truth.frames[i];
  const area = pixel ** 2;
  const evaluation = createEvaluation(7);
  const { centre } = scenario.recording;
  // pixels average over their area, which adds a twelfth of a pixel to the variance
  const p = Float64Array.of(
    truth.photons,
    centre[0] / pixel,
    centre[1] / pixel,
    truth.covariance_um2[0] / area + 1 / 12,
    truth.covariance_um2[1] / area,
    truth.covariance_um2[2] / area + 1 / 12,
    scenario.background,
  );
  const patch = {
    rectangle: { x0: 0, y0: 0, width, height },
    data: Float32Array.from(mean.frames[i]),
    outerCount: 0,
    outerSum: 0,
    excluded: [],
  };
  const { detector } = scenario.acquisition;
  const noise = { excess: detector.excessNoise, floor: (detector.readNoise / detector.gain) ** 2 };
  evaluateMap(patch, p, noise, evaluation);
  const full = evaluation.information.slice();
  invertSymmetric(full, 7);
  const widthCovariance = new Float64Array(9);
  for (let a = 0; a < 3; a++)
    for (let b = 0; b < 3; b++) widthCovariance[a * 3 + b] = full[(3 + a) * 7 + 3 + b] * area ** 2;
  // light with the width held
  const free = [0, 1, 2, 6];
  const inner = new Float64Array(16);
  for (let a = 0; a < 4; a++)
    for (let b = 0; b < 4; b++) inner[a * 4 + b] = evaluation.information[free[a] * 7 + free[b]];
  invertSymmetric(inner, 4);
  const perVariance = [3, 4, 5].map((w) => {
    let sum = 0;
    for (let b = 0; b < 4; b++) sum -= inner[b] * evaluation.information[free[b] * 7 + w];
    return sum / area;
  });
  return {
    variance: [p[3] * area, p[4] * area, p[5] * area],
    widthCovariance,
    lightVariance: inner[0],
    perVariance,
  };
}

function bilinear(a, b, c) {
  const n = a.length;
  let sum = 0;
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) sum += a[i] * c[i * n + j] * b[j];
  return sum;
}
