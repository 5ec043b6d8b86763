// Makes the spectra, sheets and calibrations of the examples from the invented plants below. Seeded: the same script writes the same bytes.
// Run `npm run build` first, then `node examples/make.mjs`.
import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { execFileSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { parseCalibration, seededRandom, simulateSpectrum, spectraCsv } from '../dist/index.js';

const here = new URL('./', import.meta.url);
const reference = parseCalibration(readFileSync(new URL('../calibration/reference.json', here), 'utf8'));
const AXIS = Float64Array.from({ length: 521 }, (_, i) => 430 + i);

/** Invented plants; mol/L of the tank, L. */
const PLANTS = [
  {
    name: 'kestrel-lane',
    story: 'Blanket gas ran out over a winter; air reached the negative tank.',
    seed: 11,
    negative: { volume: 1500, path: 1, concentration: { V2: 0.56, V3: 1.04 } },
    positive: { volume: 1500, path: 0.2, concentration: { V4: 0.592, V5: 1.008 } },
    cells: 20,
    truth: { verdict: 'oxidised', netOxidation_mol: 672, vanadiumShift_mol: 0, stateOfCharge: [0.35, 0.63] },
  },
  {
    name: 'hidden',
    story: 'Two faults that cancel in the state of charge: the sides look alike and the plant loses 5 % of its charge.',
    seed: 12,
    negative: { volume: 485, path: 1, concentration: { V2: 0.825, V3: 0.742 } },
    positive: { volume: 515, path: 0.2, concentration: { V4: 0.839, V5: 0.792 } },
    cells: 20,
    truth: { verdict: 'hidden', netOxidation_mol: 47.7, vanadiumShift_mol: 40, stateOfCharge: [0.5265, 0.4856] },
    ownCalibration: true,
  },
];

const PATH_UNCERTAINTY = 0.004;

function writePlant(plant) {
  const folder = new URL(`${plant.name}/`, here);
  mkdirSync(folder, { recursive: true });
  const random = seededRandom(plant.seed);
  const rows = ['sample,system,side,file,column,path_mm,path_u_mm,dilution,volume_L,volume_u_L,cells_in_series'];
  for (const side of ['negative', 'positive']) {
    const { volume, path, concentration } = plant[side];
    const spectrum = simulateSpectrum(
      reference,
      {
        name: side,
        concentration,
        pathLength: path / 10,
        wavelength: AXIS,
        noise: { constant: 0.0005, filling: PATH_UNCERTAINTY },
      },
      random,
    );
    writeFileSync(new URL(`${side}.csv`, folder), spectraCsv([spectrum]));
    rows.push(
      `${plant.name} ${side},${plant.name},${side},${side}.csv,${side},${path},${path * PATH_UNCERTAINTY},1,${volume},${volume * 0.005},${plant.cells}`,
    );
  }
  writeFileSync(new URL('tanks.csv', folder), `${rows.join('\n')}\n`);
  const { negative, positive, truth, story } = plant;
  writeFileSync(
    new URL('truth.json', folder),
    `${JSON.stringify({ invented: true, story, negative, positive, truth }, null, 1)}\n`,
  );
  if (plant.ownCalibration) writeCalibration(folder, random);
}

/** Thirty-five standards a pair, 0.3 % in concentration and 0.4 % in path. */
function writeCalibration(folder, random) {
  const rows = [
    'standard,file,column,path_mm,path_u_mm,dilution,temperature_C,V2_mol_L,V3_mol_L,V4_mol_L,V5_mol_L,u_mol_L,preparation,role',
  ];
  for (const [lower, higher, path] of [
    ['V2', 'V3', 1],
    ['V3', 'V4', 0.5],
    ['V4', 'V5', 0.2],
  ]) {
    const file = `standards-${lower}-${higher}.csv`;
    const spectra = [];
    for (const total of [1.2, 1.4, 1.6, 1.8, 1.95])
      for (const share of [0.02, 0.18, 0.34, 0.5, 0.66, 0.82, 0.98]) {
        const label = { V2: 0, V3: 0, V4: 0, V5: 0, [lower]: total * (1 - share), [higher]: total * share };
        const name = `${higher} ${Math.round(100 * share)} % of ${total}`;
        spectra.push(
          simulateSpectrum(
            reference,
            {
              name,
              concentration: {
                [lower]: label[lower] * (1 + 0.003 * random.normal()),
                [higher]: label[higher] * (1 + 0.003 * random.normal()),
              },
              pair: `${lower}/${higher}`,
              pathLength: path / 10,
              wavelength: AXIS,
              noise: { constant: 0.0005, filling: PATH_UNCERTAINTY },
            },
            random,
          ),
        );
        const mol = ['V2', 'V3', 'V4', 'V5'].map((species) => label[species].toFixed(4)).join(',');
        rows.push(
          `${lower}-${name},${file},${name},${path},${path * PATH_UNCERTAINTY},1,25,${mol},${(0.002 * total).toFixed(4)},${lower}${higher} ${total},calibration`,
        );
      }
    writeFileSync(new URL(file, folder), spectraCsv(spectra));
  }
  writeFileSync(new URL('standards.csv', folder), `${rows.join('\n')}\n`);
  const command = fileURLToPath(new URL('../dist/cli/main.js', here));
  execFileSync(
    process.execPath,
    [
      command,
      'calibrate',
      'standards.csv',
      '--out',
      'calibration.json',
      '--name',
      'hidden-own',
      '--source',
      'invented standards, examples/make.mjs',
    ],
    { cwd: fileURLToPath(folder), stdio: ['ignore', 'ignore', 'ignore'] },
  );
}

for (const plant of PLANTS) writePlant(plant);
