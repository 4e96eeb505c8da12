/** Anything that gives frames of stored counts. */
export interface FrameSource {
  readonly frames: number;
  readonly height: number;
  readonly width: number;
  read(index: number, into: Float64Array): void;
}

/** How the variance of a pixel follows its counts: variance = slope·(counts − zero), zero variance at `zero`. */
export interface NoiseLaw {
  /** Counts of variance per count of light: gain × excess noise. */
  readonly slope: number;
  /** Standard deviation at the darkest level found, counts. */
  readonly darkSpread: number;
  /** That level, counts. */
  readonly darkLevel: number;
}

/** Frames looked at for the noise: enough for a first look, few enough to stay quick. */
const NOISE_FRAMES = 24;

/**
 * How noise follows brightness, from the pictures alone; null where they give none: too small, or all pixels alike.
 *
 * The noise of a pixel is what a second difference in both directions leaves of the picture (J. Immerkær, Comput.
 * Vis. Image Underst. 64 (1996) 300): the mask 1 −2 1 / −2 4 −2 / 1 −2 1 has the squared norm 36 and cancels
 * everything smooth up to third order. A trace has one direction only: the fourth difference 1 −4 6 −4 1, norm 70.
 * Binned by local brightness, the mean square over the norm is the variance at that brightness; the slope of the line
 * through the bins is the photon-transfer gain (common practice, no source).
 */
export function noiseOf(source: FrameSource): NoiseLaw | null {
  const frame = new Float64Array(source.height * source.width);
  const levels: number[] = [];
  const variances: number[] = [];
  for (let index = 0; index < source.frames; index += Math.max(1, Math.ceil(source.frames / NOISE_FRAMES))) {
    source.read(index, frame);
    if (source.height === 1) addRow(frame, source.width, levels, variances);
    else addMap(frame, source.height, source.width, levels, variances);
  }
  return noiseLaw(levels, variances);
}

function addRow(f: Float64Array, width: number, levels: number[], variances: number[]): void {
  for (let x = 2; x < width - 2; x++) {
    const [a, b, c, d, e] = [f[x - 2]!, f[x - 1]!, f[x]!, f[x + 1]!, f[x + 2]!];
    levels.push((a + b + c + d + e) / 5);
    variances.push((a - 4 * b + 6 * c - 4 * d + e) ** 2 / 70);
  }
}

function addMap(f: Float64Array, height: number, width: number, levels: number[], variances: number[]): void {
  for (let y = 1; y < height - 1; y++)
    for (let i = y * width + 1; i < (y + 1) * width - 1; i++) {
      const corners = f[i - width - 1]! + f[i - width + 1]! + f[i + width - 1]! + f[i + width + 1]!;
      const sides = f[i - width]! + f[i + width]! + f[i - 1]! + f[i + 1]!;
      levels.push((corners + sides + f[i]!) / 9);
      variances.push((corners - 2 * sides + 4 * f[i]!) ** 2 / 36);
    }
}

const BINS = 24;

function noiseLaw(levels: readonly number[], variances: readonly number[]): NoiseLaw | null {
  const [low, high] = [
    levels.reduce((a, b) => Math.min(a, b), Infinity),
    levels.reduce((a, b) => Math.max(a, b), -Infinity),
  ];
  if (levels.length < 100 || !(high > low) || !Number.isFinite(high - low)) return null;
  const bins = Array.from({ length: BINS }, () => ({ n: 0, level: 0, variance: 0 }));
  for (const [i, level] of levels.entries()) {
    // by square root: a spot has many dim pixels and few bright ones
    const bin = bins[Math.min(BINS - 1, Math.floor(BINS * Math.sqrt((level - low) / (high - low))))]!;
    bin.n++;
    bin.level += level;
    bin.variance += variances[i]!;
  }
  const points = bins
    .filter((bin) => bin.n >= 8)
    .map((bin) => ({ n: bin.n, level: bin.level / bin.n, variance: bin.variance / bin.n }));
  const [darkest] = points;
  if (darkest === undefined || !points.some((point) => point.variance > 0)) return null;
  return { slope: slopeOf(points), darkLevel: darkest.level, darkSpread: Math.sqrt(darkest.variance) };
}

interface NoisePoint {
  readonly n: number;
  readonly level: number;
  readonly variance: number;
}

/**
 * Slope of variance over level. The relative error of a bin's variance is about √(2/n), so its weight is n over its
 * variance squared; that variance is taken from the line of the round before, never from the bin itself.
 */
function slopeOf(points: readonly NoisePoint[]): number {
  const largest = points.reduce((max, point) => Math.max(max, point.variance), 0);
  let line = { slope: 0, at: (_: number) => largest };
  for (let round = 0; round < 4; round++) {
    const { at } = line;
    line = weightedLine(points, (point) => point.n / Math.max(at(point.level), 1e-3 * largest) ** 2);
  }
  return line.slope;
}

function weightedLine(points: readonly NoisePoint[], weight: (point: NoisePoint) => number) {
  const mean = (of: (point: NoisePoint) => number): number =>
    points.reduce((sum, point) => sum + weight(point) * of(point), 0) /
    points.reduce((sum, point) => sum + weight(point), 0);
  const [level, variance] = [mean((p) => p.level), mean((p) => p.variance)];
  const below = mean((p) => (p.level - level) ** 2);
  const slope = below > 0 ? mean((p) => (p.level - level) * (p.variance - variance)) / below : 0;
  return { slope, at: (x: number) => variance + slope * (x - level) };
}
