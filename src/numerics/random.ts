import { randomGamma, randomNormal, randomPoisson } from "d3-random";
import { xoroshiro128plusFromState } from "pure-rand/generator/xoroshiro128plus";

/**
 * Seeded random draws.
 *
 * The stream behind is xoroshiro128+ (Blackman and Vigna, ACM Trans. Math. Softw. 47 (2021) 36) from pure-rand,
 * seeded through SplitMix64 as its authors advise; the distributions are d3-random's. The bits are the same on every
 * platform. normal(), poisson() and gamma() also use Math.log and its like, whose last digit an engine may choose:
 * with the same engine (V8 in Node and Chromium) they repeat exactly everywhere.
 */
export interface Random {
  /** Uniform on [0, 1), 53 bits. */
  uniform(): number;
  /** Standard normal. */
  normal(): number;
  /**
   * Poisson with the given mean, any size; 0 for a mean of 0.
   * @throws RangeError where the mean is negative or not finite
   */
  poisson(mean: number): number;
  /** Gamma with mean shape·scale and variance shape·scale². */
  gamma(shape: number, scale: number): number;
  /**
   * An independent substream. It depends on the seed and on `stream` alone, not on what was drawn before, so the
   * draws of frame 7 are the same whatever is drawn in frame 6.
   * @param stream a whole number from 0
   */
  spawn(stream: number): Random;
}

/** @param seed a whole number within ±2^53 */
export function createRandom(seed: number): Random {
  if (!Number.isSafeInteger(seed)) throw new RangeError(`The seed must be a whole number, not ${seed}.`);
  return fromKey(splitMix64(BigInt.asUintN(64, BigInt(seed))));
}

function fromKey(key: bigint): Random {
  const generator = xoroshiro128plusFromState(stateFrom(key));
  // The lowest bits of xoroshiro128+ are its weakest: drop them from both halves.
  const uniform = () => ((generator.next() >>> 5) * 0x4000000 + (generator.next() >>> 6)) / 0x20000000000000;
  const normal = randomNormal.source(uniform)();
  const poisson = randomPoisson.source(uniform);
  const gamma = randomGamma.source(uniform);
  return {
    uniform,
    normal,
    poisson(mean) {
      if (!(mean >= 0 && mean < Number.POSITIVE_INFINITY)) {
        throw new RangeError(`A Poisson mean must be finite and not negative; it was ${mean}.`);
      }
      return mean === 0 ? 0 : poisson(mean)();
    },
    gamma: (shape, scale) => gamma(shape, scale)(),
    spawn(stream) {
      if (!Number.isSafeInteger(stream) || stream < 0) {
        throw new RangeError(`A stream must be a whole number from 0, not ${stream}.`);
      }
      return fromKey(splitMix64(key ^ splitMix64(BigInt(stream))));
    },
  };
}

const GOLDEN = 0x9e3779b97f4a7c15n;

/** One output of SplitMix64 for the state `x`: Steele, Lea and Flood, OOPSLA (2014), p. 453. */
function splitMix64(x: bigint): bigint {
  let z = BigInt.asUintN(64, x + GOLDEN);
  z = BigInt.asUintN(64, (z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n);
  z = BigInt.asUintN(64, (z ^ (z >> 27n)) * 0x94d049bb133111ebn);
  return z ^ (z >> 31n);
}

/** The 128 bits of state as four 32-bit words: two successive outputs of SplitMix64 seeded with the key. */
function stateFrom(key: bigint): number[] {
  return [key, BigInt.asUintN(64, key + GOLDEN)].flatMap((x) => {
    const word = splitMix64(x);
    return [Number(BigInt.asIntN(32, word >> 32n)), Number(BigInt.asIntN(32, word))];
  });
}
