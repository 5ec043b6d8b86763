import type * as v from 'valibot';
import { speciesOfPair, SPECIES, type Pair, type Species } from '../electrolyte/species.ts';

// What single fields of a calibration file cannot say: lengths that belong together, axes that rise, names that must be the same.

/** Adds a problem, at a path of keys below the checked value, unless it holds. */
export type Expect = (
  holds: boolean,
  expected: string,
  received: unknown,
  ...path: readonly (string | number)[]
) => void;

/** Runs a check on a value whose fields are right, and hands its problems to the schema. */
export function agree<T>({ dataset, addIssue }: v.RawCheckContext<T>, check: (value: T, expect: Expect) => void): void {
  if (!dataset.typed) return;
  check(dataset.value, (holds, expected, received, ...keys) => {
    if (holds) return;
    const path = keys.map((key): v.IssuePathItem => ({
      type: 'unknown',
      origin: 'value',
      input: null,
      key,
      value: null,
    }));
    addIssue({
      message: `expected ${expected}`,
      received: String(received),
      ...(path.length > 0 ? { path: path as [v.IssuePathItem, ...v.IssuePathItem[]] } : {}),
    });
  });
}

type Numbers = readonly number[];

interface ModelFields {
  readonly pair: Pair;
  readonly wavelength: Numbers;
  readonly associations: readonly {
    readonly name: string;
    readonly reactants: { readonly [S in Species]?: number | undefined };
  }[];
  readonly spectra: readonly Numbers[];
  readonly modes: readonly Numbers[];
  readonly designInverse: Numbers;
}

export function modelAgrees(model: ModelFields, expect: Expect): void {
  const count = 2 + model.associations.length;
  const points = model.wavelength.length;
  const least = 2 * count + 2;
  expect(points >= least, `at least ${least} wavelengths`, points, 'wavelength');
  const turn = model.wavelength.findIndex((nm, i) => i > 0 && !(nm > model.wavelength[i - 1]!));
  expect(
    turn < 0,
    `wavelengths in nm that only rise`,
    `${model.wavelength[turn - 1]}, ${model.wavelength[turn]}`,
    'wavelength',
    turn,
  );
  expect(
    model.spectra.length === count,
    `${count} spectra, one for each absorbing amount`,
    model.spectra.length,
    'spectra',
  );
  for (const key of ['spectra', 'modes'] as const)
    model[key].forEach((row, k) =>
      expect(row.length === points, `${points} values, one for each wavelength`, row.length, key, k),
    );
  const { designInverse } = model;
  expect(designInverse.length === count * count, `${count * count} values`, designInverse.length, 'designInverse');
  const diagonal = designInverse.filter((_, i) => i % (count + 1) === 0);
  expect(
    diagonal.every((variance) => variance > 0),
    'variances above 0 on the diagonal',
    Math.min(...diagonal),
    'designInverse',
  );
  const [lower, higher] = speciesOfPair(model.pair);
  model.associations.forEach(({ reactants }, j) => {
    const named = SPECIES.filter((species) => reactants[species] !== undefined);
    const total = named.reduce((sum, species) => sum + reactants[species]!, 0);
    expect(
      total >= 2 && named.every((species) => species === lower || species === higher),
      `two reactants or more, among ${lower} and ${higher}`,
      named.map((species) => `${reactants[species]} ${species}`).join(' and ') || 'none',
      'associations',
      j,
      'reactants',
    );
  });
}

interface PairFields {
  readonly pair: Pair;
  readonly model: ModelFields;
  readonly constants: readonly { readonly association: string }[];
  readonly domain: { readonly [K in 'share' | 'total' | 'path']: readonly [number, number] };
  readonly limits: readonly { readonly species: Species }[];
}

export function pairAgrees(pair: PairFields, expect: Expect): void {
  const { model, constants, domain } = pair;
  expect(model.pair === pair.pair, `the pair ${pair.pair}`, model.pair, 'model', 'pair');
  const names = model.associations.map(({ name }) => name).join(', ');
  const own = constants.map(({ association }) => association).join(', ');
  expect(own === names, `a constant for each association (${names || 'none'})`, own || 'none', 'constants');
  for (const key of ['share', 'total', 'path'] as const)
    expect(domain[key][0] <= domain[key][1], 'the smaller value first', domain[key].join(', '), 'domain', key);
  pair.limits.forEach(({ species }, i) =>
    expect(speciesOfPair(pair.pair).includes(species), `a species of ${pair.pair}`, species, 'limits', i, 'species'),
  );
}

interface WholeFields {
  readonly grid: { readonly from: number; readonly to: number };
  readonly pairs: readonly { readonly pair: Pair; readonly model: { readonly wavelength: Numbers } }[];
  readonly standards: readonly { readonly name: string; readonly pair: Pair }[];
}

export function wholeAgrees({ grid, pairs, standards }: WholeFields, expect: Expect): void {
  expect(grid.from < grid.to, 'a grid that rises', `${grid.from} to ${grid.to} nm`, 'grid');
  const held = pairs.map(({ pair }) => pair);
  pairs.forEach(({ pair, model }, i) => {
    expect(held.indexOf(pair) === i, 'each pair once', pair, 'pairs', i, 'pair');
    const [first, last] = [model.wavelength[0], model.wavelength.at(-1)];
    expect(
      first !== undefined && first >= grid.from && last! <= grid.to,
      `wavelengths on the grid, ${grid.from} to ${grid.to} nm`,
      `${first} to ${last} nm`,
      'pairs',
      i,
      'model',
      'wavelength',
    );
  });
  const keys = standards.map(({ name, pair }) => `${pair} ${name}`);
  standards.forEach(({ name, pair }, i) => {
    expect(held.includes(pair), `one of ${held.join(', ')}`, pair, 'standards', i, 'pair');
    expect(keys.indexOf(keys[i]!) === i, 'each standard of a pair once', name, 'standards', i, 'name');
  });
}
