import type { AssayResult } from '../assay/result.ts';
import { SPECIES, type Species } from '../electrolyte/species.ts';
import type { CompositeReading, PlantReading, TankReading } from './reading.ts';

/** What a sheet says of the tank a cuvette came from; null: nobody said. */
export interface TankDetails {
  readonly tank: string | null;
  /** L; null for a composite */
  readonly volume: number | null;
  readonly volumeUncertainty: number | null;
  readonly cellsInSeries: number | null;
  readonly targetOxidationState: number | null;
  /** V of the string */
  readonly openCircuit: number | null;
  readonly formalPotential: number | null;
  /** mol on this side when it was filled */
  readonly fillVanadium: number | null;
  /** volumes drawn from the two tanks for a composite, any one unit */
  readonly compositeShares: { readonly negative: number; readonly positive: number } | null;
  /** the plant's own limits of |ν − ν*| */
  readonly watchOxidation: number | null;
  readonly actOxidation: number | null;
  readonly takenAt: number | null;
}

/** One plant from its cuvettes. Tanks are told apart by name, replicates of one tank are averaged by the assay before. */
export function plantFromAssays(
  system: string,
  cuvettes: readonly { readonly assay: AssayResult; readonly details: TankDetails }[],
): PlantReading {
  const first = <T>(of: (details: TankDetails) => T | null): T | null =>
    cuvettes.map(({ details }) => of(details)).find((value) => value !== null) ?? null;
  const tanks = cuvettes.flatMap(({ assay, details }): TankReading[] =>
    assay.side === 'composite' || details.volume === null
      ? []
      : [
          {
            name: details.tank ?? assay.sample,
            side: assay.side,
            concentration: concentrationOf(assay),
            errorSources: assay.errorSources,
            volume: details.volume,
            volumeUncertainty: details.volumeUncertainty,
            assay,
          },
        ],
  );
  const composite = cuvettes.find(
    ({ assay }) => assay.side === 'composite' && assay.averageOxidationState.value !== null,
  );
  const fillOf = (side: 'negative' | 'positive'): number | null =>
    cuvettes.find(({ assay, details }) => assay.side === side && details.fillVanadium !== null)?.details.fillVanadium ??
    null;
  const fill = { negative: fillOf('negative'), positive: fillOf('positive') };
  const watch = first((details) => details.watchOxidation);
  const act = first((details) => details.actOxidation);
  return {
    system,
    tanks,
    composite: composite ? compositeOf(composite.assay, composite.details) : null,
    cellsInSeries: first((details) => details.cellsInSeries),
    openCircuit: first((details) => details.openCircuit),
    formalPotential: first((details) => details.formalPotential),
    fill:
      fill.negative !== null && fill.positive !== null ? { negative: fill.negative, positive: fill.positive } : null,
    targetOxidationState: first((details) => details.targetOxidationState),
    limits: { ...(watch === null ? {} : { watch }), ...(act === null ? {} : { act }) },
    takenAt: cuvettes.reduce<number | null>(
      (latest, { details }) => (details.takenAt === null ? latest : Math.max(latest ?? -Infinity, details.takenAt)),
      null,
    ),
    hoursApart: hoursApart(cuvettes),
  };
}

function concentrationOf(assay: AssayResult): TankReading['concentration'] {
  const entries = SPECIES.flatMap((species): [Species, number][] => {
    const value = assay.concentration[species]?.value;
    return value === null || value === undefined ? [] : [[species, value]];
  });
  return entries.length === 2 ? Object.fromEntries(entries) : null;
}

const compositeOf = (assay: AssayResult, details: TankDetails): CompositeReading => ({
  averageOxidationState: assay.averageOxidationState.value!,
  uncertainty: assay.averageOxidationState.uncertainty!,
  shares: details.compositeShares,
  assay,
});

function hoursApart(cuvettes: readonly { readonly details: TankDetails }[]): number | null {
  const times = cuvettes.map(({ details }) => details.takenAt).filter((time) => time !== null);
  return times.length < 2 ? null : (Math.max(...times) - Math.min(...times)) / 3_600_000;
}
