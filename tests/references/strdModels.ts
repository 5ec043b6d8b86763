/** Models of the nonlinear sets of NIST StRD, each as its own file states it; `x` is a row of predictors, `b` the parameters from b1 on. */
type Model = (x: readonly number[], b: readonly number[]) => number;

const { exp, cos, sin, atan, PI } = Math;

/** Σ amplitude·exp(−rate·x) over three pairs. */
const lanczos: Model = ([x], b) => b[0]! * exp(-b[1]! * x!) + b[2]! * exp(-b[3]! * x!) + b[4]! * exp(-b[5]! * x!);

const gauss: Model = ([x], b) =>
  b[0]! * exp(-b[1]! * x!) +
  b[2]! * exp(-((x! - b[3]!) ** 2) / b[4]! ** 2) +
  b[5]! * exp(-((x! - b[6]!) ** 2) / b[7]! ** 2);

const chwirut: Model = ([x], b) => exp(-b[0]! * x!) / (b[1]! + b[2]! * x!);

const cubicRational: Model = ([x], b) =>
  (b[0]! + b[1]! * x! + b[2]! * x! ** 2 + b[3]! * x! ** 3) / (1 + b[4]! * x! + b[5]! * x! ** 2 + b[6]! * x! ** 3);

export const STRD_MODELS: Readonly<Record<string, Model>> = {
  Bennett5: ([x], b) => b[0]! * (b[1]! + x!) ** (-1 / b[2]!),
  BoxBOD: ([x], b) => b[0]! * (1 - exp(-b[1]! * x!)),
  Chwirut1: chwirut,
  Chwirut2: chwirut,
  DanWood: ([x], b) => b[0]! * x! ** b[1]!,
  ENSO: ([x], b) =>
    b[0]! +
    b[1]! * cos((2 * PI * x!) / 12) +
    b[2]! * sin((2 * PI * x!) / 12) +
    b[4]! * cos((2 * PI * x!) / b[3]!) +
    b[5]! * sin((2 * PI * x!) / b[3]!) +
    b[7]! * cos((2 * PI * x!) / b[6]!) +
    b[8]! * sin((2 * PI * x!) / b[6]!),
  Eckerle4: ([x], b) => (b[0]! / b[1]!) * exp(-(((x! - b[2]!) / b[1]!) ** 2) / 2),
  Gauss1: gauss,
  Gauss2: gauss,
  Gauss3: gauss,
  Hahn1: cubicRational,
  Kirby2: ([x], b) => (b[0]! + b[1]! * x! + b[2]! * x! ** 2) / (1 + b[3]! * x! + b[4]! * x! ** 2),
  Lanczos1: lanczos,
  Lanczos2: lanczos,
  Lanczos3: lanczos,
  MGH09: ([x], b) => (b[0]! * (x! ** 2 + x! * b[1]!)) / (x! ** 2 + x! * b[2]! + b[3]!),
  MGH10: ([x], b) => b[0]! * exp(b[1]! / (x! + b[2]!)),
  MGH17: ([x], b) => b[0]! + b[1]! * exp(-x! * b[3]!) + b[2]! * exp(-x! * b[4]!),
  Misra1a: ([x], b) => b[0]! * (1 - exp(-b[1]! * x!)),
  Misra1b: ([x], b) => b[0]! * (1 - (1 + (b[1]! * x!) / 2) ** -2),
  Misra1c: ([x], b) => b[0]! * (1 - (1 + 2 * b[1]! * x!) ** -0.5),
  Misra1d: ([x], b) => (b[0]! * b[1]! * x!) / (1 + b[1]! * x!),
  // The left side is ln y.
  Nelson: ([x1, x2], b) => b[0]! - b[1]! * x1! * exp(-b[2]! * x2!),
  Rat42: ([x], b) => b[0]! / (1 + exp(b[1]! - b[2]! * x!)),
  Rat43: ([x], b) => b[0]! / (1 + exp(b[1]! - b[2]! * x!)) ** (1 / b[3]!),
  Roszman1: ([x], b) => b[0]! - b[1]! * x! - atan(b[2]! / (x! - b[3]!)) / PI,
  Thurber: cubicRational,
};
