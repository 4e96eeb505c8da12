type Model = (b: Float64Array, x: readonly number[]) => number;

const { exp, log, cos, sin, atan, PI } = Math;
const gauss = (x: number, centre: number, width: number) => exp(-(((x - centre) / width) ** 2));

const twoPeaks: Model = (b, [x]) =>
  b[0]! * exp(-b[1]! * x!) + b[2]! * gauss(x!, b[3]!, b[4]!) + b[5]! * gauss(x!, b[6]!, b[7]!);
const threeExponentials: Model = (b, [x]) =>
  b[0]! * exp(-b[1]! * x!) + b[2]! * exp(-b[3]! * x!) + b[4]! * exp(-b[5]! * x!);
const saturating: Model = (b, [x]) => b[0]! * (1 - exp(-b[1]! * x!));
const chwirut: Model = (b, [x]) => exp(-b[0]! * x!) / (b[1]! + b[2]! * x!);
const cubicOverCubic: Model = (b, [x]) =>
  (b[0]! + x! * (b[1]! + x! * (b[2]! + x! * b[3]!))) / (1 + x! * (b[4]! + x! * (b[5]! + x! * b[6]!)));

/** The certified model of each nonlinear set, as its file states it; b[0] is NIST's b1. */
export const nistModels: Record<string, Model> = {
  Misra1a: saturating,
  Chwirut2: chwirut,
  Chwirut1: chwirut,
  Lanczos3: threeExponentials,
  Gauss1: twoPeaks,
  Gauss2: twoPeaks,
  DanWood: (b, [x]) => b[0]! * x! ** b[1]!,
  Misra1b: (b, [x]) => b[0]! * (1 - (1 + (b[1]! * x!) / 2) ** -2),
  Kirby2: (b, [x]) => (b[0]! + x! * (b[1]! + x! * b[2]!)) / (1 + x! * (b[3]! + x! * b[4]!)),
  Hahn1: cubicOverCubic,
  // The set's response is log(y).
  Nelson: (b, [x1, x2]) => b[0]! - b[1]! * x1! * exp(-b[2]! * x2!),
  MGH17: (b, [x]) => b[0]! + b[1]! * exp(-x! * b[3]!) + b[2]! * exp(-x! * b[4]!),
  Lanczos1: threeExponentials,
  Lanczos2: threeExponentials,
  Gauss3: twoPeaks,
  Misra1c: (b, [x]) => b[0]! * (1 - (1 + 2 * b[1]! * x!) ** -0.5),
  Misra1d: (b, [x]) => (b[0]! * b[1]! * x!) / (1 + b[1]! * x!),
  Roszman1: (b, [x]) => b[0]! - b[1]! * x! - atan(b[2]! / (x! - b[3]!)) / PI,
  ENSO: (b, [x]) =>
    b[0]! +
    b[1]! * cos((2 * PI * x!) / 12) +
    b[2]! * sin((2 * PI * x!) / 12) +
    b[4]! * cos((2 * PI * x!) / b[3]!) +
    b[5]! * sin((2 * PI * x!) / b[3]!) +
    b[7]! * cos((2 * PI * x!) / b[6]!) +
    b[8]! * sin((2 * PI * x!) / b[6]!),
  MGH09: (b, [x]) => (b[0]! * (x! * x! + x! * b[1]!)) / (x! * x! + x! * b[2]! + b[3]!),
  Thurber: cubicOverCubic,
  BoxBOD: saturating,
  Rat42: (b, [x]) => b[0]! / (1 + exp(b[1]! - b[2]! * x!)),
  MGH10: (b, [x]) => b[0]! * exp(b[1]! / (x! + b[2]!)),
  Eckerle4: (b, [x]) => (b[0]! / b[1]!) * exp(-0.5 * ((x! - b[2]!) / b[1]!) ** 2),
  Rat43: (b, [x]) => b[0]! / (1 + exp(b[1]! - b[2]! * x!)) ** (1 / b[3]!),
  Bennett5: (b, [x]) => b[0]! * (b[1]! + x!) ** (-1 / b[2]!),
};

export { log as logResponse };
