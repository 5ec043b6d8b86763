// What        Run rules of a Shewhart chart: patterns that are unlikely while nothing has changed.
// Equation    every rule here is "`needed` of the last `window` points more than `beyond` standard deviations off, on one side".
// Why so      one form serves judging, counting and the average run length, so what is stated is what is done.
// Valid for   independent points about a known centre; correlated points signal more often than stated.
// Units       deviations in standard deviations of the baseline; NaN is a missing point and is passed over, not bridged.
// Source      NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2 (the four zone rules); ISO 7870-2. Words ours.

export interface RunRule {
  readonly code: string;
  /** what was seen, for a sentence */
  readonly text: string;
  readonly needed: number;
  readonly window: number;
  /** standard deviations */
  readonly beyond: number;
}

export const ACTION_RULE: RunRule = {
  code: 'past-action',
  text: 'a point more than 3 standard deviations off',
  needed: 1,
  window: 1,
  beyond: 3,
};

/** The action limit and three patterns inside it. More rules find small shifts sooner and cry wolf more often: see `runLengthOfRunRules`. */
export const RUN_RULES: readonly RunRule[] = [
  ACTION_RULE,
  {
    code: 'two-of-three',
    text: 'two of three points more than 2 standard deviations off, same side',
    needed: 2,
    window: 3,
    beyond: 2,
  },
  {
    code: 'four-of-five',
    text: 'four of five points more than 1 standard deviation off, same side',
    needed: 4,
    window: 5,
    beyond: 1,
  },
  {
    code: 'eight-one-side',
    text: 'eight points in a row on the same side of the centre',
    needed: 8,
    window: 8,
    beyond: 0,
  },
];

/**
 * @param deviations in standard deviations, in time order; NaN = missing
 * @returns for each point the codes of the rules it completes (a point that is not itself beyond completes none)
 */
export function runRuleSignals(deviations: Float64Array, rules: readonly RunRule[] = RUN_RULES): string[][] {
  const signals: string[][] = Array.from(deviations, () => []);
  const measured = [...deviations.keys()].filter((i) => !Number.isNaN(deviations[i]));
  for (const rule of rules)
    for (const side of [1, -1]) {
      const beyond = measured.map((i) => side * deviations[i]! > rule.beyond);
      let inWindow = 0;
      for (let j = 0; j < measured.length; j++) {
        if (beyond[j]) inWindow += 1;
        if (j >= rule.window && beyond[j - rule.window]) inWindow -= 1;
        if (beyond[j] && inWindow >= rule.needed) signals[measured[j]!]!.push(rule.code);
      }
    }
  return signals;
}
