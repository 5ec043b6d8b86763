import {
  seededRandom,
  simulateSpectrum,
  spectraCsv,
  TankhueError,
  type Calibration,
  type SimulationRequest,
} from '../index.ts';

// Invented plants to learn on: composition, volumes and faults are made up, the spectra are computed with the shipped calibration.

interface DemoPlant {
  readonly name: string;
  readonly title: string;
  /** what a person should see happen */
  readonly expect: string;
  readonly negative: SimulationRequest['concentration'];
  readonly positive: SimulationRequest['concentration'];
  readonly volumes: readonly [negative: number, positive: number];
  readonly negativeFaults?: SimulationRequest['faults'];
}

export const DEMO_PLANTS: readonly DemoPlant[] = [
  {
    name: 'kestrel-lane',
    title: 'Air got in over a winter',
    expect:
      'Expect the positive side far ahead, the verdict “oxidised”, and a dose of reductant as first remedy. Change a volume and watch the dose follow.',
    negative: { V2: 0.56, V3: 1.04 },
    positive: { V4: 0.592, V5: 1.008 },
    volumes: [1500, 1500],
  },
  {
    name: 'tarn-head',
    title: 'Vanadium crept through the membrane',
    expect:
      'Expect different levels, the verdict “shifted”, and litres to pump back. A reductant would not help here: see how little it gives.',
    negative: { V2: 0.96, V3: 0.64 },
    positive: { V4: 1.01714, V5: 0.58286 },
    volumes: [880, 1120],
  },
  {
    name: 'millbrook',
    title: 'A bubble in the cuvette',
    expect:
      'Expect the negative sample withheld with the reason beside it, and no balance at all: a wrong number would be worse than none.',
    negative: { V2: 0.8, V3: 0.8 },
    positive: { V4: 0.8, V5: 0.8 },
    volumes: [1000, 1000],
    negativeFaults: { bubble: 0.08, offset: 0.03 },
  },
];

const PATHS = { negative: 0.1, positive: 0.02 } as const;
const NOISE = { constant: 0.0005, shot: 0.0002 } as const;

/** Files and sheet of an invented plant, as a person would drop them. */
export function demoPlant(
  name: string,
  calibration: Calibration,
): { files: { name: string; text: string }[]; sheet: string } {
  const plant = DEMO_PLANTS.find((candidate) => candidate.name === name);
  if (!plant)
    throw new TankhueError('unknown-plant', `expected an invented plant; received "${name}"`, 'demo', 'choose one');
  const random = seededRandom(7);
  const fileOf = (side: 'negative' | 'positive') => {
    const spectrum = simulateSpectrum(
      calibration,
      {
        name: `${name} ${side}`,
        concentration: plant[side],
        pathLength: PATHS[side],
        wavelength: Float64Array.from({ length: 521 }, (_, i) => 430 + i),
        faults: side === 'negative' ? (plant.negativeFaults ?? {}) : {},
        noise: NOISE,
      },
      random,
    );
    return { name: `${name}-${side}.csv`, text: spectraCsv([spectrum]) };
  };
  const files = [fileOf('negative'), fileOf('positive')];
  const row = (side: 'negative' | 'positive', i: number): string =>
    [`${name} ${side}`, name, side, files[i]!.name, '', 10 * PATHS[side], 1, plant.volumes[i], 25].join(',');
  return {
    files,
    sheet: [
      'sample,system,side,file,column,path_mm,dilution,volume_L,temperature_C',
      row('negative', 0),
      row('positive', 1),
      '',
    ].join('\n'),
  };
}
