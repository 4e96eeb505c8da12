import { annihilationLaw } from "./annihilation.ts";
import { type Choice, chooseLaw } from "./choose.ts";
import { exponentialLaw } from "./exponential.ts";
import { fitLaw } from "./fit-law.ts";
import type { Instrument } from "./instrument.ts";
import { instrument as makeInstrument } from "./instrument.ts";
import type { Law } from "./law.ts";
import type { DecayFit, DecayLaw, LightData } from "./light.ts";
import { richerLawCouldPay } from "./richer.ts";
import { bestStart, exponentialStarts, type LifetimeRange, lifetimeRange } from "./starts.ts";
import { stretchedLaw } from "./stretched.ts";
import { twoExponentialsLaw } from "./two-exponentials.ts";

export type { DecayFit, DecayLaw, DerivedTime, LightData } from "./light.ts";

/** The laws fitted and the one to believe. */
export interface Decays extends Choice {
  /** Null where a law was not worth fitting (richer.ts) or there are too few frames. */
  readonly fits: Record<DecayLaw, DecayFit | null>;
}

/**
 * Fits the four decay laws to the light of a spot over delay, each averaged over the gate, seen through the response
 * and summed over earlier pulses, and chooses one (the rule is in choose.ts).
 *
 * Amplitudes are photons in a frame: the light is averaged over the gate, not integrated.
 */
export function fitDecays(data: LightData): Decays {
  const frames = data.light.length;
  const instrument = makeInstrument(data);
  const make = (law: (i: Instrument, order: 1 | 2) => Law) => ({
    law: law(instrument, data.emissionOrder),
    lawAt: (delays: ArrayLike<number>) =>
      law(makeInstrument({ ...data, delays, transmission: null }), data.emissionOrder),
  });
  const range = lifetimeRange(data);
  const fits: Record<DecayLaw, DecayFit | null> = {
    exponential: null,
    two_exponentials: null,
    stretched: null,
    annihilation: null,
  };
  if (frames >= 3) {
    const starts = exponentialStarts(data, instrument, range);
    const plain = fitExponential(make(exponentialLaw), data, starts.one, range);
    const tau = plain.parameters[1]!;
    fits.exponential = plain;
    const richer = richerLawCouldPay(data, instrument, plain, range);
    // AICc needs at least two frames more than parameters.
    if (richer && frames >= 5) {
      fits.stretched = fitStretched(make(stretchedLaw), data, tau, range);
      fits.annihilation = fitAnnihilation(make(annihilationLaw), data, tau, range);
    }
    if (richer && frames >= 6)
      fits.two_exponentials = fitTwo(make(twoExponentialsLaw), data, starts.two, range);
  }
  return { fits, ...chooseLaw(fits) };
}

interface Made {
  readonly law: Law;
  readonly lawAt: (delays: ArrayLike<number>) => Law;
}

/** How many standard uncertainties from a simpler law a richer law's own parameter must lie to be told from it. */
const TELLING = 2;

const ANY = Number.POSITIVE_INFINITY;

function fitExponential(made: Made, data: LightData, start: number[], { shortest, longest }: LifetimeRange) {
  return fitLaw(
    { ...made, start, lower: [-ANY, shortest], upper: [ANY, longest], objection: () => null },
    data,
  );
}

function fitTwo(made: Made, data: LightData, start: number[], { shortest, longest }: LifetimeRange) {
  return fitLaw(
    {
      ...made,
      start,
      lower: [-ANY, 0, shortest, shortest],
      upper: [ANY, 1, longest, longest],
      arrange: (p) => {
        if (p[2]! <= p[3]!) return;
        [p[2], p[3]] = [p[3]!, p[2]!];
        p[1] = 1 - p[1]!;
      },
      objection: twoAreOne,
    },
    data,
  );
}

function twoAreOne(p: Float64Array, c: Float64Array): string | null {
  const u = Math.sqrt(c[5]!);
  if (Math.min(p[1]!, 1 - p[1]!) < TELLING * u) return "one of the two shares is not told from zero";
  const ratio = Math.log(p[3]! / p[2]!);
  const uRatio = Math.sqrt(
    Math.max(0, c[10]! / p[2]! ** 2 + c[15]! / p[3]! ** 2 - (2 * c[11]!) / (p[2]! * p[3]!)),
  );
  return ratio < TELLING * uRatio ? "the two lifetimes are not told apart" : null;
}

function fitStretched(made: Made, data: LightData, tau: number, { shortest, longest }: LifetimeRange) {
  const shapes = [
    [tau, 0.9],
    [0.8 * tau, 0.75],
    [0.4 * tau, 0.55],
    [0.1 * tau, 0.4],
  ];
  const least = shortest / 1000;
  return fitLaw(
    {
      ...made,
      start: bestStart(made.law, data, shapes),
      lower: [-ANY, least, 0.15],
      upper: [ANY, longest, 1],
      objection: (p, c) =>
        1 - p[2]! < TELLING * Math.sqrt(c[8]!) ? "beta is not told from 1, one exponential" : null,
    },
    data,
  );
}

function fitAnnihilation(made: Made, data: LightData, tau: number, { shortest, longest }: LifetimeRange) {
  const shapes = [1.1, 1.5, 2.5, 5].flatMap((longer) =>
    [0.3, 1, 3, 10, 30].map((strength) => [longer * tau, strength / (longer * tau)]),
  );
  return fitLaw(
    {
      ...made,
      start: bestStart(made.law, data, shapes),
      lower: [-ANY, shortest, 0],
      upper: [ANY, longest, ANY],
      objection: (p, c) => (p[2]! < TELLING * Math.sqrt(c[8]!) ? "k_n0 is not told from zero" : null),
    },
    data,
  );
}
