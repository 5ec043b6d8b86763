import type { VanadiumAmounts } from '../../src/electrolyte/mixStates.ts';
import { simulateTitration } from '../../src/bench/titration/simulateCurve.ts';
import type { Oxidant, Titrant } from '../../src/bench/titration/couples.ts';
import type { Random } from '../../src/numerics/random.ts';

/** A titration as a person at the bench would see it: true volumes and potentials with their errors. */
export interface SimulatedBench {
  readonly vanadium: Partial<VanadiumAmounts>;
  readonly titrant: Titrant;
  readonly iron?: number;
  readonly oxidant?: { readonly kind: Oxidant; readonly electrons: number };
  /** true strength, mol of electrons per litre */
  readonly normality?: number;
  readonly beakerVolume?: number;
  readonly acid?: number;
  readonly spacing?: number;
  readonly last?: number;
  /** mV of scatter, mV of drift over the run, mL of scatter, share the burette delivers too much */
  readonly noise?: number;
  readonly drift?: number;
  readonly reading?: number;
  readonly buretteError?: (volume: number) => number;
  /** mV of the reference electrode against the hydrogen electrode */
  readonly reference?: number;
  /** K */
  readonly temperature?: number;
}

export function simulatedReadings(bench: SimulatedBench, random: Random): { volume: number[]; potential: number[] } {
  const spacing = bench.spacing ?? 0.2;
  const last = bench.last ?? 30;
  const start = spacing * random.uniform();
  const volume = [
    0,
    ...Array.from({ length: Math.floor((last - start) / spacing) + 1 }, (_, i) => start + i * spacing),
  ].map((v) => Number(v.toFixed(3)));
  const delivered = volume.map((v, i) =>
    i === 0 ? 0 : Math.max(0, v + (bench.buretteError?.(v) ?? 0) + (bench.reading ?? 0) * random.normal()),
  );
  const potential = simulateTitration({
    vanadium: { V2: 0, V3: 0, V4: 0, V5: 0, ...bench.vanadium },
    iron: bench.iron ?? 0,
    oxidant: bench.oxidant ?? null,
    titrant: bench.titrant,
    normality: bench.normality ?? 0.1,
    beakerVolume: bench.beakerVolume ?? 100,
    acid: bench.acid ?? 1,
    temperature: bench.temperature ?? 298.15,
    volumes: delivered,
  }).map(
    (E, i) =>
      E - (bench.reference ?? 210) + (bench.noise ?? 0) * random.normal() + ((bench.drift ?? 0) * volume[i]!) / last,
  );
  return { volume, potential: potential.map((E) => Number(E.toFixed(2))) };
}

/** A curve file: the cells that describe the run stand on its first line. */
export function curveCsv(
  runs: readonly {
    cells: Readonly<Record<string, string | number>>;
    volume: readonly number[];
    potential: readonly number[];
  }[],
): string {
  const columns = [...new Set(runs.flatMap(({ cells }) => Object.keys(cells)))];
  return `${[
    ['volume_mL', 'potential_mV', ...columns].join(','),
    ...runs.flatMap(({ cells, volume, potential }) =>
      volume.map((v, i) =>
        [v, potential[i], ...columns.map((column) => (i === 0 ? (cells[column] ?? '') : ''))].join(','),
      ),
    ),
  ].join('\n')}\n`;
}
