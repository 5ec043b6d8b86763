// Colours of vanadium in sulfuric acid, in a vial of some centimetres: common knowledge of the trade, no source.

/** Nearness, in mean oxidation state, within which a solution looks like the pure state. */
const PURE = 0.03;

const STAGES: readonly (readonly [number, string])[] = [
  [2, 'violet'],
  [2.5, 'grey-green to grey-violet'],
  [3, 'green'],
  [3.5, 'dark blue-green'],
  [4, 'bright blue'],
  [4.5, 'very dark green, nearly black'],
  [5, 'yellow'],
];

/** What to expect to see at a mean oxidation state. */
export function expectedColour(averageOxidationState: number): string {
  const pure = STAGES.find(([state]) => Number.isInteger(state) && Math.abs(averageOxidationState - state) <= PURE);
  if (pure) return pure[1];
  const between = Math.min(4.5, Math.max(2.5, Math.floor(averageOxidationState) + 0.5));
  return STAGES.find(([state]) => state === between)![1];
}
