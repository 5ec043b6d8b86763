import { scaleLinear } from 'd3-scale';
import type { SystemBalance } from '../../tanks/balance.ts';
import { AMPERE_HOURS_PER_MOLE } from '../../units.ts';
import { at, HorizontalAxis } from './axes.tsx';
import { Picture } from './picture.tsx';

const WIDTH = 760;
const LEFT = 190;
const RIGHT = 720;
const TOP = 54;
const ROW = 46;

const ampereHours = (electrons: number): string =>
  `${Math.round(electrons * AMPERE_HOURS_PER_MOLE).toLocaleString('en')} Ah`;

const REMEDY_NAME: Readonly<Record<string, string>> = {
  sequence: 'both steps',
  transfer: 'transfer only',
  mix: 'mix and split only',
  reduce: 'first dose only',
  electrolysis: 'electrolysis only',
};

/** Usable charge now and after each remedy, against what the vanadium could hold at best. */
export function RemediesPicture({ id, balance }: { id: string; balance: SystemBalance }) {
  const remedies = balance.remedies.filter((remedy) => Math.abs(remedy.gain) > 0.5);
  const full = balance.fullCharge.value;
  if (remedies.length === 0 || full === null) return null;
  const now = remedies[0]!.before.usableCharge;
  const lowest = Math.min(now, ...remedies.map((remedy) => remedy.after.usableCharge));
  const x = scaleLinear([Math.max(0, lowest - 0.35 * (full - lowest)), full], [LEFT, RIGHT]);
  const best = remedies.reduce((a, b) => (b.after.usableCharge > a.after.usableCharge ? b : a));
  const bottom = TOP + remedies.length * ROW + 8;
  return (
    <Picture
      id={id}
      question="What would each remedy give back?"
      answer={`Now ${ampereHours(now)} of ${ampereHours(full)} can be used; ${best.gain > 0 ? `${nameOf(best.kind)} would leave ${ampereHours(best.after.usableCharge)}` : 'none of these gives charge back by itself'} (calculated, before losses; the axis does not begin at zero).`}
      width={WIDTH}
      height={bottom + 44}
      numbers={{
        columns: [
          'remedy',
          'usable after, mol',
          'gain, Ah',
          'net oxidation after, mol',
          'shift after, mol',
          'warms, K',
        ],
        rows: remedies.map((remedy) => [
          nameOf(remedy.kind),
          remedy.after.usableCharge.toFixed(1),
          Math.round(remedy.gain).toLocaleString('en'),
          remedy.after.netOxidation.toFixed(1),
          remedy.after.vanadiumShift.toFixed(1),
          remedy.warming.toFixed(1),
        ]),
      }}
    >
      <path class="limit" d={`M${at(x(now))} ${TOP - 8}V${bottom}`} />
      <text class="soft middle halo" x={at(x(now))} y={TOP - 14}>
        now
      </text>
      <path class="axis" d={`M${RIGHT} ${TOP - 28}V${bottom}`} />
      <text class="soft end" x={RIGHT} y={TOP - 34}>
        the most this vanadium can hold
      </text>
      {remedies.map((remedy, i) => {
        const y = TOP + i * ROW + 18;
        const after = remedy.after.usableCharge;
        const left = Math.min(x(now), x(after));
        const right = Math.max(x(now), x(after));
        const forbidden = remedy.forbidden.length > 0;
        const besideRight = right < RIGHT - 130;
        return (
          <g key={remedy.kind}>
            <text class="end strong" x={LEFT - 14} y={y + 1}>
              {nameOf(remedy.kind)}
            </text>
            {forbidden && (
              <text class="end soft" x={LEFT - 14} y={y + 16}>
                not now, see below
              </text>
            )}
            <rect
              class={after >= now ? 'accent-fill' : 'grid-fill axis'}
              x={at(left)}
              y={y - 7}
              width={at(right - left)}
              height={12}
            />
            <circle class="ink-line raised-fill" stroke-width="1.5" cx={at(x(now))} cy={y - 1} r="4.5" />
            <circle class="ink-fill" cx={at(x(after))} cy={y - 1} r="5" />
            <text class={besideRight ? 'halo' : 'halo end'} x={at(besideRight ? right + 10 : left - 10)} y={y + 3}>
              {`${remedy.gain >= 0 ? '+' : '−'}${Math.abs(Math.round(remedy.gain)).toLocaleString('en')} Ah`}
            </text>
          </g>
        );
      })}
      <HorizontalAxis scale={x} y={bottom} label="usable charge, mol of electrons   ○ now  ● after" />
    </Picture>
  );
}

const nameOf = (kind: string): string => REMEDY_NAME[kind] ?? kind;
