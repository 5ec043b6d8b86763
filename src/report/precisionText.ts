import type {
  PrecisionFigure,
  PrecisionOfQuantity,
  PrecisionQuantity,
  PrecisionRecord,
} from '../assay/precisionRecord.ts';
import { QUANTITY_IN_WORDS } from '../bench/precision/precisionStudy.ts';
import { findingText } from './assayText.ts';
import { wrapped } from './quantityText.ts';

const WIDTH = 80;

/** Repeatability and reproducibility for a terminal. */
export function precisionText(record: PrecisionRecord): string {
  const quantities = Object.entries(record.quantities) as [PrecisionQuantity, PrecisionOfQuantity][];
  return [
    ...record.findings.filter(({ severity }) => severity !== 'note').map(findingText),
    ...quantities.flatMap(([quantity, precision]) => quantityLines(quantity, precision)),
    ...record.findings.filter(({ severity }) => severity === 'note').map(findingText),
    `assumed: ${wrapped(record.assumed.join('; '), WIDTH - 9, '  ')}`,
    '',
  ].join('\n');
}

/** State of charge in points, total vanadium in per cent of itself, the oxidation state as it is. */
const SHOWN: Readonly<Record<PrecisionQuantity, readonly [number, string]>> = {
  stateOfCharge: [100, ' points'],
  averageOxidationState: [1, ''],
  totalVanadium: [100, ' %'],
};

function quantityLines(quantity: PrecisionQuantity, precision: PrecisionOfQuantity): string[] {
  const [scale, unit] = SHOWN[quantity];
  const show = (value: number) => (scale * value).toPrecision(2);
  const figure = (label: string, { standardDeviation, interval, degreesOfFreedom }: PrecisionFigure) =>
    `  ${label.padEnd(24)}${show(standardDeviation)}${unit}   95 %: ${interval.map(show).join(' to ')}   ${degreesOfFreedom.toFixed(0)} degrees of freedom`;
  return [
    `${QUANTITY_IN_WORDS[quantity]}, ${precision.lines} assays of ${precision.samples} ${precision.samples === 1 ? 'sample' : 'samples'} (standard deviations)`,
    figure('repeatability', precision.repeatability),
    figure('reproducibility', precision.reproducibility),
    ...precision.components.map(({ source, standardDeviation, variance, degreesOfFreedom }) => {
      const label = source === 'repeat' ? 'within one group' : `from ${source} to ${source}`;
      const size = variance < 0 ? 'less than chance' : `${show(standardDeviation)}${unit}`;
      return `    ${label.padEnd(32)}${size}   ${degreesOfFreedom} degrees of freedom`;
    }),
    '',
  ];
}
