import type { VNode } from 'preact';
import { renderToString } from 'preact-render-to-string';
import { expect, test } from 'vitest';
import { BudgetPicture } from '../../src/report/pictures/budgetPicture.tsx';
import { DepthPicture } from '../../src/report/pictures/depthPicture.tsx';
import { LimitsPicture } from '../../src/report/pictures/limitsPicture.tsx';
import { OxidationLadder } from '../../src/report/pictures/oxidationLadder.tsx';
import { PureSpectraPicture } from '../../src/report/pictures/pureSpectraPicture.tsx';
import { RemediesPicture } from '../../src/report/pictures/remediesPicture.tsx';
import { SamplesPicture } from '../../src/report/pictures/samplesPicture.tsx';
import { SpectrumPicture } from '../../src/report/pictures/spectrumPicture.tsx';
import { StandardsPicture } from '../../src/report/pictures/standardsPicture.tsx';
import { ErrorPicture, PredictedPicture } from '../../src/report/pictures/validationPictures.tsx';
import { STYLE_SHEET } from '../../src/report/styleSheet.ts';
import type { SystemBalance } from '../../src/tanks/balance.ts';
import { inventedCalibration } from '../report/inventedCalibration.ts';
import { inventedAssay, withheldAssay } from '../report/inventedResults.ts';

// Every picture of a report, drawn from invented results and kept as a page that can be opened. `npm run gallery` renews them all:
// look at each that changes before it is kept.

const negative = inventedAssay();
const positive = inventedAssay({ sample: 'P-1', side: 'positive', share: 0.55 });

const step = (kind: string, usable: number, forbidden: string[] = []) => ({
  kind,
  before: { usableCharge: 700 },
  after: { usableCharge: usable, netOxidation: 40, vanadiumShift: 12 },
  gain: (usable - 700) * 26.8,
  warming: 1.2,
  forbidden,
});
const balance = {
  fullCharge: { value: 800, uncertainty: 4, unit: 'mol' },
  remedies: [
    step('sequence', 790),
    step('transfer', 740),
    step('reduce', 680),
    step('electrolysis', 720, ['not without a rebalancing cell']),
  ],
} as unknown as SystemBalance;

const [pair] = inventedCalibration.pairs;
const many = Array.from({ length: 24 }, (_, i) => {
  const sample = { sample: `S-${i}`, side: i % 2 === 0 ? 'negative' : 'positive', share: 0.1 + 0.03 * i } as const;
  return i % 9 === 4 ? withheldAssay(sample) : inventedAssay({ ...sample, change: { state: i % 3 === 0 ? 'caution' : 'sound' } });
});

const PICTURES: Readonly<Record<string, VNode>> = {
  'oxidation-ladder': (
    <OxidationLadder
      id="picture"
      ladder={{
        negative: negative.averageOxidationState,
        positive: positive.averageOxidationState,
        both: { value: 3.53, uncertainty: 0.012 },
      }}
    />
  ),
  depth: <DepthPicture id="picture" assays={[negative, positive]} />,
  'spectrum-negative': <SpectrumPicture id="picture" assay={negative} />,
  'spectrum-positive': <SpectrumPicture id="picture" assay={positive} />,
  budget: <BudgetPicture id="picture" assay={negative} />,
  remedies: <RemediesPicture id="picture" balance={balance} />,
  samples: <SamplesPicture id="picture" assays={many} />,
  'pure-spectra': <PureSpectraPicture id="picture" pair={pair!} />,
  predicted: <PredictedPicture id="picture" pair={pair!} />,
  error: <ErrorPicture id="picture" pair={pair!} />,
  standards: <StandardsPicture id="picture" calibration={inventedCalibration} />,
  limits: <LimitsPicture id="picture" calibration={inventedCalibration} />,
};

const standing = (content: string): string =>
  `<!doctype html>\n<html lang="en"><head><meta charset="utf-8"><title>gallery</title><style>${STYLE_SHEET}</style></head><body><main class="sheet">\n${content}\n</main></body></html>\n`;

/** A line an element, so that a change is seen where it is. */
const inLines = (html: string): string => html.replaceAll('><', '>\n<');

test.each(Object.keys(PICTURES))('the picture %s is as it was last looked at', async (name) => {
  await expect(standing(inLines(renderToString(PICTURES[name]!)))).toMatchFileSnapshot(`pictures/${name}.html`);
});

test.each(Object.keys(PICTURES))('%s: a question, an answer in words, named coordinates that are finite', (name) => {
  const html = renderToString(PICTURES[name]!);
  expect(/<h3[^>]*>([^<]*)</.exec(html)![1]).toMatch(/^[A-Z].*\?$/);
  expect(/<p id="picture-answer">([^<]*)</.exec(html)![1]!.length).toBeGreaterThan(20);
  expect(html).toMatch(/role="img"/);
  expect(html).toMatch(/<table/);
  expect(html).not.toMatch(/NaN|Infinity|undefined|null/);
});
