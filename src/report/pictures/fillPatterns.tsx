/** How each absorber is drawn: a colour and, for print without colour and for eyes that see colours alike, a pattern and a dash of its own. */
export interface Drawn {
  readonly colour: 'V2' | 'V3' | 'V4' | 'V5' | 'bound' | 'bound-other';
  readonly dash: string | undefined;
  /** strokes inside an 8 × 8 tile */
  readonly tile: string;
}

const SPECIES_DRAWN: Readonly<Record<string, Drawn>> = {
  V2: { colour: 'V2', dash: undefined, tile: 'M0 8L8 0' },
  V3: { colour: 'V3', dash: '7 3', tile: 'M4 0V8' },
  V4: { colour: 'V4', dash: '2 3', tile: 'M0 0L8 8' },
  V5: { colour: 'V5', dash: '9 3 2 3', tile: 'M0 4H8' },
};
const COMPLEX_DRAWN: readonly Drawn[] = [
  { colour: 'bound', dash: '1 2', tile: 'M0 0L8 8M0 8L8 0' },
  { colour: 'bound-other', dash: '12 4', tile: 'M4 0V8M0 4H8' },
];

/** @param index among the complexes, from 0 */
export const drawnAs = (name: string, index: number): Drawn =>
  SPECIES_DRAWN[name] ?? COMPLEX_DRAWN[Math.max(0, index) % COMPLEX_DRAWN.length]!;

/** The patterns of one drawing; ids start with the drawing's own. */
export function FillPatterns({ id, drawn }: { id: string; drawn: readonly Drawn[] }) {
  return (
    <defs>
      {drawn.map(({ colour, tile }) => (
        <pattern id={`${id}-${colour}`} key={colour} width="8" height="8" patternUnits="userSpaceOnUse">
          <rect class={`tint-${colour}`} width="8" height="8" />
          <path class={`line-${colour}`} d={tile} stroke-width="1" />
        </pattern>
      ))}
      <pattern id={`${id}-unused`} width="6" height="6" patternUnits="userSpaceOnUse">
        <path class="rule" d="M0 6L6 0" />
      </pattern>
    </defs>
  );
}
