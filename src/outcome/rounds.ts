import type { Decays } from "../decay/fit.ts";
import { fitDecays } from "../decay/fit.ts";
import { NEAR } from "../frame/first-look.ts";
import type { PatchFit } from "../frame/fit-spot.ts";
import { fitPatch } from "../frame/fit-spot.ts";
import type { Evaluation } from "../frame/kernel.ts";
import { createEvaluation } from "../frame/kernel.ts";
import { excludeFrom } from "../frame/outliers.ts";
import { LAYOUT } from "../frame/pixel-spot.ts";
import type { FrameSet } from "../frame/prepare.ts";
import type { SmoothModels } from "../frame/references.ts";
import { referenceAt } from "../frame/references.ts";
import type { ScoredSpot } from "../frame/score-spot.ts";
import { scoreSpot } from "../frame/score-spot.ts";
import type { FrameFlag } from "../frame/spot.ts";
import { steadyCourse } from "../frame/steady.ts";
import { findStrikes } from "../frame/strikes.ts";
import { chiSquareUpperTail } from "../numerics/distributions.ts";
import { InputFault } from "../stack/fault.ts";
import type { Stack } from "../stack/stack.ts";
import type { LawFit } from "../transport/laws.ts";
import { fitLaws, preferLaw } from "../transport/laws.ts";
import type { LineFit } from "../transport/line.ts";
import { fitLine, meanDiffusion } from "../transport/line.ts";
import type { Width } from "../transport/width.ts";
import type { AnalysisOptions } from "./analysis.ts";
import { firstFlags } from "./first-flags.ts";
import type { Drift, LightSeries, Reading } from "./reading.ts";
import { runningMean } from "./running-mean.ts";
import { transmission } from "./transmission.ts";

/** Expected light over its standard deviation from which a frame takes part in the law of spread. */
const FAINTEST = 2;
/** From here on a frame is bright enough for a fit of its own, and a fit that fails says something about the frame. */
const BRIGHT = 8;
/** A model is acceptable as a smooth reference where chance gives a worse χ² this often. */
const ACCEPTABLE = 0.01;
const MOST_ROUNDS = 10;
const NO_LAWS: Reading["laws"] = { line: null, power_law: null, arrest: null, broken_line: null };
/**
 * Rounds end when D moves by less than this share of its uncertainty: where the models hold, each round moves it by some
 * fiftieth of the round before, so what is left is far below a hundredth.
 */
const STANDSTILL = 0.1;

/**
 * Round by round every frame is read against smooth models (law of spread, decay, steady centre and background), the
 * laws are fitted to what was read, and become the next round's models, until the diffusion coefficient stands still.
 */
export class Rounds {
  private readonly stack: Stack;
  private readonly frames: FrameSet;
  private readonly options: AnalysisOptions;
  private readonly times: Float64Array;
  private readonly flags: FrameFlag[][];
  private readonly evaluation: Evaluation;
  private readonly area: number;

  private own: (PatchFit | null)[];
  private scored: (ScoredSpot | null)[];
  private light: LightSeries;
  private expectedLight: Float64Array;
  private models: SmoothModels;
  private drift: Drift = { kind: "constant", speed: [0, 0], u: [0, 0] };

  constructor(stack: Stack, frames: FrameSet, options: AnalysisOptions) {
    this.stack = stack;
    this.frames = frames;
    this.options = options;
    const { delays, gate } = stack.acquisition.time;
    this.times = Float64Array.from(delays, (delay) => delay + gate / 2);
    this.area = frames.pixel ** 2;
    this.evaluation = createEvaluation(LAYOUT[frames.kind].count);
    this.flags = delays.map((delay, i) => firstFlags(delay, i, stack, frames, options));
    this.own = delays.map(() => null);
    this.scored = delays.map(() => null);
    this.expectedLight = new Float64Array(delays.length).fill(frames.typical[0]!);
    this.models = this.typicalModels();
    this.light = { frames: [], value: new Float64Array(0), sigma: new Float64Array(0), perVariance: [] };
  }

  read(): Reading {
    this.scoreAll();
    // weights are those of one light for all frames still: no χ² can be judged by them
    this.smoothLight(this.fitLight(), 0);
    this.fitOwnSpots();
    let line = this.startLine();
    let law: LawFit | null = null;
    let laws: Reading["laws"] = NO_LAWS;
    let decays: Decays | null = null;
    let widths: Width[] = [];
    let before = meanDiffusion(line).value;
    let rounds = 0;
    for (; rounds < MOST_ROUNDS; ) {
      rounds++;
      this.models = this.nextModels(line, law);
      this.scoreAll();
      this.flagDim();
      widths = this.readWidths();
      line = this.fitWidths(widths);
      this.steadyModels();
      const { value, variance } = meanDiffusion(line);
      const still = Math.abs(value - before) < STANDSTILL * Math.sqrt(variance);
      before = value;
      // the light moves little once the widths stand: its decay is fitted after the first round and at the end
      if (rounds > 1 && !still) continue;
      decays = this.fitLight();
      this.smoothLight(decays);
      if (!still) continue;
      // another law than the line, where one is preferred, takes over as the model and asks for rounds of its own
      laws = fitLaws(widths);
      const preferred = preferLaw(laws);
      const settled = law === null ? preferred === "line" : law.law === preferred;
      law = preferred === "line" ? null : laws[preferred];
      if (settled) break;
    }
    // rounds that never came to rest left laws and decay behind the widths
    if (rounds === MOST_ROUNDS) {
      laws = fitLaws(widths);
      decays = this.fitLight();
    }
    const preferredLaw = preferLaw(laws);
    const { stack, frames, own, scored, models, flags, times, light, drift } = this;
    return {
      stack,
      frames,
      own,
      scored,
      models,
      flags,
      times,
      widths,
      line,
      laws,
      preferredLaw,
      light,
      decays,
      drift,
      rounds,
    };
  }

  /** The sum of all frames is every frame's first model. */
  private typicalModels(): SmoothModels {
    const { typical, kind, pixel } = this.frames;
    const layout = LAYOUT[kind];
    const variance = layout.variance.map((at) => typical[at]! * this.area);
    const centre: [number, number] = [typical[1]! * pixel, kind === "map" ? typical[2]! * pixel : 0];
    return {
      light: (i) => this.expectedLight[i]!,
      variance: () => variance,
      centre: () => centre,
      background: () => typical[layout.background]!,
    };
  }

  private scoreAll(): void {
    const { frames, evaluation } = this;
    for (let i = 0; i < frames.patches.length; i++) {
      const usable = !frames.empty[i] && !this.flags[i]!.includes("saturated");
      const reference = referenceAt(frames, this.models, i);
      this.scored[i] = usable
        ? scoreSpot(frames.kind, frames.patches[i]!, reference, frames.noise, evaluation)
        : null;
    }
  }

  /** Fits the decay to the light of the frames that may carry it. */
  private fitLight(): Decays | null {
    const { acquisition } = this.stack;
    const count = this.scored.length;
    const value = new Float64Array(count).fill(Number.NaN);
    const sigma = new Float64Array(count).fill(Number.NaN);
    const perVariance: number[][] = [];
    const used: number[] = [];
    for (const [i, scored] of this.scored.entries()) {
      perVariance.push(scored === null ? [] : scored.light.perVariance.map((slope) => slope / this.area));
      if (scored === null) continue;
      value[i] = scored.light.value;
      sigma[i] = Math.sqrt(scored.light.variance);
      const beforePulse = this.flags[i]!.includes("before-pulse");
      if ((!beforePulse || acquisition.response !== null) && !this.flags[i]!.includes("fit-failed"))
        used.push(i);
    }
    this.light = { frames: used, value, sigma, perVariance };
    if (used.length < 3) return null;
    const pick = (from: ArrayLike<number>): Float64Array => Float64Array.from(used, (i) => from[i]!);
    const passed = transmission(acquisition, this.frames.kind, this.models, used);
    return fitDecays({
      delays: pick(acquisition.time.delays),
      gate: acquisition.time.gate,
      response: acquisition.response,
      period: acquisition.period,
      light: pick(value),
      sigma: pick(sigma),
      transmission: passed,
      emissionOrder: acquisition.sample.emissionOrder,
    });
  }

  /** Next round's expected light: the decay where it describes the light, else a running mean. */
  private smoothLight(decays: Decays | null, leastP = 1e-3): void {
    const { frames: used, value } = this.light;
    const fit = decays?.fits[decays.preferred] ?? null;
    const expected = runningMean(value, this.light.sigma);
    if (fit?.converged && fit.pValue >= leastP) {
      for (const [k, i] of used.entries()) expected[i] = fit.prediction[k]!;
    }
    const least = 1e-3 * Math.max(...expected.filter(Number.isFinite), 1e-3);
    this.expectedLight = expected.map((light) => Math.max(light, least));
  }

  /** Maximum likelihood of each bright frame by itself, hot and struck pixels set aside. */
  private fitOwnSpots(): void {
    const { kind, patches, noise } = this.frames;
    for (const [i, patch] of patches.entries()) {
      const scored = this.scored[i] ?? null;
      const reference = referenceAt(this.frames, this.models, i);
      const bright = scored !== null && this.expectedLight[i]! > BRIGHT * Math.sqrt(scored.light.variance);
      const start = scored !== null && isSpot(kind, scored.estimate, reference) ? scored.estimate : reference;
      let fit = bright ? fitPatch(kind, patch, start, noise, NEAR) : null;
      for (let attempt = 0; attempt < 2; attempt++) {
        const strikes = findStrikes(kind, patch, fit?.converged ? fit.parameters : reference, noise);
        const before = patch.excluded.length;
        excludeFrom(patch, strikes);
        if (patch.excluded.length === before) break;
        if (bright) fit = fitPatch(kind, patch, reference, noise, NEAR);
      }
      this.own[i] = fit?.converged ? fit : null;
      if (bright && !fit?.converged && this.flags[i]!.length === 0) this.flags[i]!.push("fit-failed");
      this.options.onProgress?.(i + 1, patches.length);
    }
  }

  /** A first line from the bright frames' own widths, weighted by their expected light. */
  private startLine(): LineFit {
    const { typical, kind } = this.frames;
    const layout = LAYOUT[kind];
    const widths: Width[] = [];
    for (const [i, fit] of this.own.entries()) {
      if (fit === null || this.flags[i]!.length > 0) continue;
      const variance = layout.variance.map((at) => fit.parameters[at]! * this.area);
      const scale = (typical[layout.variance[0]]! * this.area) ** 2 / this.expectedLight[i]!;
      const covariance = kind === "map" ? Float64Array.of(2, 0, 0, 0, 1, 0, 0, 0, 2) : Float64Array.of(2);
      widths.push({ frame: i, time: this.times[i]!, variance, covariance: covariance.map((c) => c * scale) });
    }
    const line = widths.length >= 4 ? fitLine(widths) : null;
    if (line !== null) return line;
    const intercept = layout.variance.map((at) => typical[at]! * this.area);
    return {
      intercept,
      diffusion: intercept.map(() => 0),
      covariance: new Float64Array(4 * intercept.length ** 2),
      chi2: 0,
      degreesOfFreedom: 0,
    };
  }

  private nextModels(line: LineFit, law: LawFit | null): SmoothModels {
    const { models, times } = this;
    return {
      ...models,
      light: (i) => this.expectedLight[i]!,
      variance: (i) => {
        const t = Math.max(times[i]!, 0);
        const straight = line.intercept.map((value, a) => value + 2 * line.diffusion[a]! * t);
        if (law === null || law.law === "line") return straight;
        const shift =
          law.value(t) - (straight.length === 3 ? (straight[0]! + straight[2]!) / 2 : straight[0]!);
        return straight.length === 3
          ? [straight[0]! + shift, straight[1]!, straight[2]! + shift]
          : [straight[0]! + shift];
      },
    };
  }

  /** Frames whose expected light drowns in its own noise take no part in the law of spread. */
  private flagDim(): void {
    for (const [i, scored] of this.scored.entries()) {
      const flags: FrameFlag[] = this.flags[i]!.filter((flag) => flag !== "too-dim");
      if (scored !== null && this.expectedLight[i]! < FAINTEST * Math.sqrt(scored.light.variance))
        flags.push("too-dim");
      this.flags[i] = flags;
    }
  }

  private readWidths(): Width[] {
    const layout = LAYOUT[this.frames.kind];
    const { count } = layout;
    const widths: Width[] = [];
    for (const [i, scored] of this.scored.entries()) {
      if (scored === null || this.flags[i]!.length > 0) continue;
      const variance = layout.variance.map((at) => scored.estimate[at]! * this.area);
      const m = variance.length;
      const covariance = new Float64Array(m * m);
      for (const [a, p] of layout.variance.entries()) {
        for (const [b, q] of layout.variance.entries()) {
          covariance[a * m + b] = scored.covariance[p * count + q]! * this.area ** 2;
        }
      }
      widths.push({ frame: i, time: this.times[i]!, variance, covariance });
    }
    return widths;
  }

  private fitWidths(widths: readonly Width[]): LineFit {
    const line = widths.length >= 3 ? fitLine(widths) : null;
    if (line !== null) return line;
    const { file } = this.stack.source;
    const counts = this.flags.filter((flags) => flags.includes("too-dim")).length;
    throw new InputFault(
      `${file}: ${widths.length} of ${this.stack.frames} frames are left for the law of spread (${counts} are too dim) and at least 3 are needed; collect more light, widen --from and --to, or check time.first and time.step.`,
      { file },
    );
  }

  /** Centre and background as the frames show them, on the simplest course that fits. */
  private steadyModels(): void {
    const { kind, pixel } = this.frames;
    const layout = LAYOUT[kind];
    const course = (at: number) => {
      const values = this.scored.map((s, i) =>
        s === null || this.flags[i]!.length > 0 ? Number.NaN : s.estimate[at]!,
      );
      const variances = this.scored.map((s) => (s === null ? 1 : s.covariance[at * layout.count + at]!));
      return steadyCourse(
        this.times,
        values,
        variances,
        (chi2, dof) => chiSquareUpperTail(chi2, dof) > ACCEPTABLE,
      );
    };
    const centre = layout.position.map((at) => course(at));
    const background = course(layout.background);
    const kinds = centre.map((c) => c.kind);
    this.drift = {
      kind: kinds.includes("own") ? "own" : kinds.includes("line") ? "line" : "constant",
      speed: centre.map((c) => c.slope * pixel),
      u: centre.map((c) => c.slopeU * pixel),
    };
    this.models = {
      ...this.models,
      centre: (i) => [centre[0]!.at(i) * pixel, (centre[1]?.at(i) ?? 0) * pixel],
      background: (i) => background.at(i),
    };
  }
}

/** Whether one step from the reference has come to a spot worth starting from: bright, and of a width like its own. */
function isSpot(kind: "map" | "trace", p: Float64Array, reference: Float64Array): boolean {
  const { photons, variance } = LAYOUT[kind];
  const alike = (at: number): boolean => p[at]! > 0.4 * reference[at]! && p[at]! < 2.5 * reference[at]!;
  if (!alike(photons) || !alike(variance[0])) return false;
  return kind === "trace" || (alike(5) && p[4]! ** 2 < 0.5 * p[3]! * p[5]!);
}
