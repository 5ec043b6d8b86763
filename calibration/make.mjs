// Makes reference.json from the published spectra that lie beside the project, and the table in README.md from reference.json.
// Run `npm run build` first, then `node calibration/make.mjs [FOLDER]`; the folder holds standards.csv (default ../../shared/spectra).
import { execFileSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const here = new URL('./', import.meta.url);
const path = (name) => fileURLToPath(new URL(name, here));
const folder = process.argv[2] ?? path('../../shared/spectra');
const SOURCE =
  'A. A. Maurice, A. E. Quintero, M. Vera, Electrochimica Acta 2024, 144003, doi 10.1016/j.electacta.2024.144003, open data, MIT licence';

if (existsSync(`${folder}/standards.csv`))
  execFileSync(
    process.execPath,
    [
      path('../dist/cli/main.js'),
      'calibrate',
      `${folder}/standards.csv`,
      '--out',
      path('reference.json'),
      '--name',
      'reference',
      '--source',
      SOURCE,
    ],
    { stdio: ['ignore', 'ignore', 'inherit'] },
  );

const text = readFileSync(path('reference.json'), 'utf8');
const reference = JSON.parse(text);
const points = (value) => (100 * value).toFixed(2);
const HEADER = ['pair', 'left out', 'n', 'bias', 'rmse', 'largest', 'inside', 'half width', 'total vanadium rmse'];
const rows = reference.pairs.flatMap((pair) => {
  const half = pair.leftOut
    .map((x) => 1.96 * Math.hypot(x.shareUncertainty, pair.betweenGroup.share))
    .sort((a, b) => a - b);
  return pair.validation.map(({ group, count, share, total }) => [
    pair.pair,
    group,
    String(count),
    points(share.bias),
    points(share.rmse),
    points(share.largest),
    `${(100 * share.coverage).toFixed(0)} %`,
    group === 'all' ? points(half[Math.floor(half.length / 2)]) : '',
    `${points(total.rmse)} %`,
  ]);
});

/** A table as the project's formatter lays it out, so that this script alone makes the page. */
function table(header, body) {
  const widths = header.map((caption, i) => Math.max(3, caption.length, ...body.map((row) => row[i].length)));
  const line = (row) => `| ${row.map((cell, i) => cell.padEnd(widths[i])).join(' | ')} |`;
  return [line(header), line(widths.map((width) => '-'.repeat(width))), ...body.map(line)].join('\n');
}

const constants = reference.pairs.flatMap((pair) =>
  pair.constants.map(
    ({ association, value, interval }) =>
      `- ${association}: ${value > 0 ? `K = ${value.toPrecision(3)} L/mol, 95 % ${interval.map((end) => end?.toPrecision(3) ?? 'open').join(' to ')}` : 'second-order law (weak limit)'}`,
  ),
);
const doubts = reference.standards
  .filter((standard) => standard.doubt)
  .map((standard) => `- ${standard.name}: ${standard.doubt}`);

writeFileSync(
  path('README.md'),
  `# Calibrations that ship

\`reference.json\` is made by \`node calibration/make.mjs\` from published spectra of ${reference.standards.length} standards.
Source: ${reference.source}. Acid and temperature are not stated with the data, so a result with this calibration is never better than
\`caution\`: good for learning and for a first look. sha256 ${createHash('sha256').update(text).digest('hex').slice(0, 16)}…, ${Math.round(text.length / 1024)} kB.

## How well it predicts what it has not seen

Each total concentration left out, everything refitted on the rest (association constants, paths, modes, noise), the left-out spectra
assayed as samples. Errors of the share of the higher species (= state of charge) in points of per cent against the labels, which are
themselves good to one or two points. The outer concentrations are extrapolated. "Inside" counts labels within the 95 % interval;
"half width" is the median 95 % half width. This page is written by the script above.

${table(HEADER, rows)}

Association constants, profile over all standards:

${constants.join('\n') || '- none'}

Standards in doubt:

${doubts.join('\n') || '- none'}
`,
);
