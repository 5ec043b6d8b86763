import { scaleLinear } from 'd3-scale';
import type { AssayResult } from '../../assay/result.ts';
import { at } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const ROW = 24;
const TOP = 34;
const NAME_END = 250;
const GAP_BEFORE_SECOND = 510;
const BAR = 180;
const MOST_ROWS = 9;

interface BudgetRow {
  readonly source: string;
  /** points of state of charge (100 × change of the mean oxidation state) */
  readonly charge: number;
  /** per cent of the total */
  readonly total: number;
}

/** One standard deviation of each cause of error, in the charge and in the total, with their sums. */
export function BudgetPicture({ id, assay }: { id: string; assay: AssayResult }) {
  const rows = budgetRows(assay);
  if (rows.length === 0) return null;
  const together = quadrature(rows, 'together');
  const charge = scaleLinear([0, together.charge || 1], [0, BAR]);
  const total = scaleLinear([0, together.total || 1], [0, BAR]);
  const all = [...rows, together];
  const [largest] = rows;
  const isComposite = assay.side === 'composite';
  return (
    <Picture
      id={id}
      question="What makes this result uncertain?"
      answer={`Mostly ${largest!.source}: ${largest!.charge.toFixed(2)} of ${together.charge.toFixed(2)} ${isComposite ? 'hundredths of an oxidation state' : 'points of charge'} (standard uncertainties; squares add).`}
      width={WIDTH}
      height={TOP + all.length * ROW + 14}
      numbers={{
        columns: ['cause', isComposite ? 'oxidation state, hundredths' : 'charge, points', 'total vanadium, %'],
        rows: all.map((row) => [row.source, row.charge.toFixed(3), row.total.toFixed(3)]),
      }}
    >
      <text class="soft" x={NAME_END + 10} y={16}>
        {isComposite ? 'mean oxidation state, hundredths' : 'state of charge, points'}
      </text>
      <text class="soft" x={GAP_BEFORE_SECOND} y={16}>
        total vanadium, %
      </text>
      {all.map((row, i) => {
        const top = TOP + i * ROW + (row === together ? 6 : 0);
        const strong = row === together ? ' strong' : '';
        return (
          <g key={row.source}>
            {row === together && <path class="axis" d={`M10 ${top - 3}H${WIDTH - 20}`} />}
            <text class={`end${strong}`} x={NAME_END} y={top + 14}>
              {row.source}
            </text>
            <rect
              class={row === together ? 'ink-fill' : 'accent-fill'}
              x={NAME_END + 10}
              y={top + 3}
              width={at(charge(row.charge))}
              height={14}
            />
            <text class={strong} x={at(NAME_END + 16 + charge(row.charge))} y={top + 14}>
              {row.charge.toFixed(2)}
            </text>
            <rect
              class={row === together ? 'ink-fill' : 'accent-fill'}
              x={GAP_BEFORE_SECOND}
              y={top + 3}
              width={at(total(row.total))}
              height={14}
            />
            <text class={strong} x={at(GAP_BEFORE_SECOND + 6 + total(row.total))} y={top + 14}>
              {row.total.toFixed(2)}
            </text>
          </g>
        );
      })}
    </Picture>
  );
}

/** Largest first; what would not fit is one row. */
function budgetRows(assay: AssayResult): BudgetRow[] {
  const amount = assay.totalVanadium.value ?? assay.unreported?.totalVanadium.value ?? NaN;
  const rows = assay.budget
    .map((line): BudgetRow => ({
      source: line.source,
      charge: 100 * line.averageOxidationState,
      total: Math.abs((100 * line.totalVanadium) / amount),
    }))
    .sort((a, b) => b.charge - a.charge || b.total - a.total);
  if (rows.length <= MOST_ROWS) return rows;
  const shown = [...rows].sort((a, b) => weight(b, rows) - weight(a, rows)).slice(0, MOST_ROWS - 1);
  return [
    ...rows.filter((row) => shown.includes(row)),
    quadrature(
      rows.filter((row) => !shown.includes(row)),
      'the rest',
    ),
  ];
}

const weight = (row: BudgetRow, rows: readonly BudgetRow[]): number => {
  const sum = quadrature(rows, '');
  return Math.max(row.charge / (sum.charge || 1), row.total / (sum.total || 1));
};

const quadrature = (rows: readonly BudgetRow[], source: string): BudgetRow => ({
  source,
  charge: Math.hypot(...rows.map((row) => row.charge)),
  total: Math.hypot(...rows.map((row) => row.total)),
});
