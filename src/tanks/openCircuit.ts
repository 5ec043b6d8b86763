// What        Rest voltage of one cell from both states of charge.
// Equation    E = E°′ + (RT/F) ln[S_n S_p/((1 − S_n)(1 − S_p))].
// Why so      Activities and the proton and membrane terms are inside E°′, which is fitted to a plant: only differences are predicted.
//             It sees the product of both sides, so it confirms states of charge and cannot see an imbalance.
// Valid for   rest, no current, both sides between 0 and 1.
// Units       V; RT/F 25.693 mV at 25 °C.
// Source      Nernst; constants CODATA 2018. Typical E°′ 1.35 to 1.40 V: common practice, no source.

const NERNST_25 = 0.025692579;
export const TYPICAL_FORMAL_POTENTIAL = { value: 1.375, uncertainty: 0.02 } as const;
/** V above which a voltage is not that of one cell. */
const ONE_CELL = 1.8;

export const predictedOpenCircuit = (formal: number, negative: number, positive: number): number =>
  formal + NERNST_25 * Math.log((negative * positive) / ((1 - negative) * (1 - positive)));

/** Voltage of one cell from what was read: a stack is recognised by its size. */
export function cellVoltage(read: number, cellsInSeries: number | null): { voltage: number; stack: boolean } {
  if (read <= ONE_CELL || cellsInSeries === null || cellsInSeries === 1) return { voltage: read, stack: false };
  return { voltage: read / cellsInSeries, stack: true };
}

/** Standard uncertainty of the prediction from those of both sides. */
export function openCircuitUncertainty(
  negative: { value: number; uncertainty: number },
  positive: { value: number; uncertainty: number },
): number {
  const slope = (s: number): number => NERNST_25 / (s * (1 - s));
  return Math.hypot(slope(negative.value) * negative.uncertainty, slope(positive.value) * positive.uncertainty);
}
