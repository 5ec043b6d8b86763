/**
 * Every colour of pictures, reports and the page, once for light and once for dark surroundings. A person restyles by setting the CSS
 * variables `--ink`, `--paper`, … on the document or on one figure.
 */
export type ColourName = keyof typeof LIGHT;

export const LIGHT = {
  paper: '#fbfaf6',
  raised: '#ffffff',
  ink: '#1b2330',
  soft: '#4a5564',
  line: '#8a8779',
  grid: '#e2ded2',
  accent: '#0a5a63',
  'accent-ink': '#ffffff',
  'sound-paper': '#dff0e3',
  'sound-ink': '#124a28',
  'caution-paper': '#fbebc8',
  'caution-ink': '#5f3800',
  'withheld-paper': '#f9dcda',
  'withheld-ink': '#74121e',
  V2: '#7a52c7',
  V3: '#1d8657',
  V4: '#1c6ccc',
  V5: '#c99700',
  bound: '#7d5a43',
  'bound-other': '#a14f86',
} as const;

export const DARK: Readonly<Record<ColourName, string>> = {
  paper: '#12161c',
  raised: '#1a212a',
  ink: '#e9ecf1',
  soft: '#b0bac8',
  line: '#7c8796',
  grid: '#2b343f',
  accent: '#7ad6de',
  'accent-ink': '#0b2226',
  'sound-paper': '#16331f',
  'sound-ink': '#b0e8c0',
  'caution-paper': '#3b2b09',
  'caution-ink': '#ffdc9a',
  'withheld-paper': '#451519',
  'withheld-ink': '#ffc0bf',
  V2: '#b596f2',
  V3: '#57c794',
  V4: '#6fb0fb',
  V5: '#f0c445',
  bound: '#c9a287',
  'bound-other': '#dd96c6',
};

/** Which colour text has on which ground; no other combination is used. */
export const TEXT_ON_GROUND: ReadonlyArray<readonly [text: ColourName, ground: ColourName]> = [
  ['ink', 'paper'],
  ['ink', 'raised'],
  ['soft', 'paper'],
  ['soft', 'raised'],
  ['accent', 'paper'],
  ['accent', 'raised'],
  ['accent-ink', 'accent'],
  ['sound-ink', 'sound-paper'],
  ['caution-ink', 'caution-paper'],
  ['withheld-ink', 'withheld-paper'],
  ['ink', 'sound-paper'],
  ['ink', 'caution-paper'],
  ['ink', 'withheld-paper'],
];

/** Lines and areas that carry meaning, against the ground they stand on. */
export const DRAWN_ON_GROUND: ReadonlyArray<readonly [drawn: ColourName, ground: ColourName]> = (
  ['V2', 'V3', 'V4', 'bound', 'bound-other', 'accent', 'line'] as const
).map((drawn) => [drawn, 'raised'] as const);

export const cssVariables = (colours: Readonly<Record<ColourName, string>>): string =>
  Object.entries(colours)
    .map(([name, value]) => `--${name}:${value}`)
    .join(';');
