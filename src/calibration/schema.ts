import * as v from 'valibot';
import { PAIRS, SPECIES } from '../electrolyte/species.ts';
import { agree, modelAgrees, pairAgrees, wholeAgrees } from './agreement.ts';

// The file `tankhue/calibration/1`, strictly. calibration/calibration.schema.json is this schema for other programs: after a change run
// `npm run build && node calibration/makeSchema.mjs`. What each field says lies in its description, with its unit.

const inUnit = (what: string, unit: string): string => (unit === '' ? what : `${what} in ${unit}`);
const number = (what: string, unit: string) => {
  const expected = `expected a finite ${inUnit(what, unit)}`;
  return v.pipe(v.number(expected), v.finite(expected), v.description(inUnit(what, unit)));
};
const aboveZero = (what: string, unit: string) =>
  v.pipe(number(what, unit), v.gtValue(0, `expected a ${what} above 0${unit && ` ${unit}`}`));
const notNegative = (what: string, unit: string) =>
  v.pipe(number(what, unit), v.minValue(0, `expected a ${what} of 0${unit && ` ${unit}`} or more`));
const share = (what: string) => v.pipe(notNegative(what, '1'), v.maxValue(1, `expected a ${what} of 0 to 1`));
const count = (what: string) => v.pipe(notNegative(what, ''), v.integer(`expected a whole ${what}`));
const text = (what: string) => v.pipe(v.string(), v.description(what));
const row = (what: string, unit: string) => v.array(number(what, unit));
const rangeOf = (what: string, unit: string) =>
  v.pipe(v.tuple([number(what, unit), number(what, unit)]), v.description(`least and largest ${inUnit(what, unit)}`));
const unknown = <Schema extends v.GenericSchema>(schema: Schema) => v.nullable(schema);
const hash = (what: string) =>
  v.pipe(
    v.string(),
    v.regex(/^([\da-f]{64})?$/, 'expected 64 hexadecimal digits, or nothing'),
    v.description(`SHA-256 of ${what}; empty where there is no file`),
  );

const pair = v.pipe(
  v.picklist(PAIRS),
  v.description('lower/higher species of two neighbouring oxidation states; V4 and V5 are totals, bound or not'),
);
const eachSpecies = <Schema extends v.GenericSchema>(schema: Schema) =>
  v.partial(v.strictObject({ V2: schema, V3: schema, V4: schema, V5: schema }));

const association = v.pipe(
  v.strictObject({
    name: text('e.g. V4·V5 or 2V5'),
    reactants: v.pipe(
      eachSpecies(v.pipe(count('number of reactants'), v.minValue(1), v.maxValue(4))),
      v.description('how many of each species bind'),
    ),
    associationConstant: notNegative('association constant', 'L/mol'),
  }),
  v.description(
    'something that ions form together and that absorbs beyond its parts; a constant of 0 is the weak limit, amount = product of the totals',
  ),
);

const model = v.pipe(
  v.strictObject({
    pair,
    wavelength: v.pipe(row('wavelength', 'nm'), v.description('centres of the means, nm, rising')),
    associations: v.array(association),
    spectra: v.pipe(
      v.array(row('molar absorption coefficient', 'L/(mol·cm)')),
      v.description(
        'lower species, higher species, then the excess of each association; L/(mol·cm), in the weak limit L²/(mol²·cm)',
      ),
    ),
    noise: aboveZero('standard deviation of what is independent from point to point', 'absorbance'),
    modes: v.pipe(
      v.array(row('mode', 'absorbance')),
      v.description('systematic directions of one standard deviation each, absorbance'),
    ),
    designInverse: v.pipe(
      row('covariance factor', 'L²/(mol²·cm²)'),
      v.description('(FᵀF)⁻¹ of the amounts × path of the standards, row by row; L²/(mol²·cm²)'),
    ),
  }),
  v.rawCheck((context) => agree(context, modelAgrees)),
  v.description('what an estimate needs: spectra, and how measured spectra differ from them'),
);

const errorFigures = (unit: string) =>
  v.strictObject({
    bias: number('mean of found − label', unit),
    rmse: notNegative('root mean square of found − label', unit),
    largest: notNegative('largest found − label', unit),
    coverage: share('part of the labels inside their 95 % interval'),
  });

const leftOut = v.strictObject({
  name: text('standard'),
  group: text('what was left out together with it'),
  share: number('share of the higher species on the label', '1'),
  shareError: number('found − label of the share', '1'),
  shareUncertainty: notNegative('standard uncertainty of the share before the between-group variance', '1'),
  total: notNegative('total vanadium in the cuvette', 'mol/L'),
  totalError: number('found/label − 1 of total vanadium', '1'),
  totalUncertainty: notNegative('relative standard uncertainty of total vanadium', '1'),
  reducedChiSquare: notNegative('χ² of the spectrum over its degrees of freedom', '1'),
  misfit: notNegative('root mean square of measured − fitted', 'absorbance'),
  faultScores: v.pipe(
    v.record(v.string(), number('score', '1')),
    v.description('scores of named cuvette faults, standard normal where the model is complete'),
  ),
});

const pairCalibration = v.pipe(
  v.strictObject({
    pair,
    model,
    constants: v.array(
      v.strictObject({
        association: text('name of the association'),
        value: notNegative('association constant', 'L/mol'),
        interval: v.pipe(
          v.tuple([unknown(number('lower bound', 'L/mol')), unknown(number('upper bound', 'L/mol'))]),
          v.description('95 % by profile likelihood, L/mol; null where the standards do not bound that side'),
        ),
      }),
    ),
    labelsMoved: v.pipe(v.boolean(), v.description('whether labels moved within their uncertainty in the fit')),
    labelUncertainty: v.pipe(
      v.strictObject({ share: notNegative('share', '1'), total: notNegative('total, relative', '1') }),
      v.description('root mean square of what the labels’ uncertainties make where they moved, else 0'),
    ),
    betweenGroup: v.pipe(
      v.strictObject({
        share: notNegative('share of the higher species', '1'),
        total: notNegative('total vanadium, relative', '1'),
        freedom: aboveZero('number of degrees of freedom', ''),
      }),
      v.description('standard deviations that validation shows beyond the stated uncertainties'),
    ),
    match: v.pipe(
      v.strictObject({
        mean: number('mean of ln(χ²/ν)', '1'),
        deviation: notNegative('standard deviation of ln(χ²/ν)', '1'),
        count: count('number of left-out spectra'),
      }),
      v.description('how well spectra of left-out standards matched'),
    ),
    faultScales: v.pipe(
      v.record(v.string(), aboveZero('scale', '1')),
      v.description('root mean square score of each named fault over left-out standards, at least 1'),
    ),
    domain: v.pipe(
      v.strictObject({
        share: rangeOf('share of the higher species', '1'),
        total: rangeOf('total vanadium in the cuvette', 'mol/L'),
        path: rangeOf('path', 'cm'),
        absorbance: number('largest absorbance of a standard', 'absorbance'),
      }),
      v.description('the range of the standards'),
    ),
    leftOut: v.pipe(v.array(leftOut), v.description('each standard predicted by a calibration without its group')),
    validation: v.array(
      v.strictObject({
        group: text('all, or the group left out'),
        count: count('number of standards'),
        share: v.pipe(errorFigures('1'), v.description('share of the higher species, 1')),
        total: v.pipe(errorFigures('1'), v.description('total vanadium, relative')),
      }),
    ),
    evidence: v.pipe(
      v.array(
        v.strictObject({
          model: text('complexes of the model'),
          labelsMoved: v.boolean(),
          noise: aboveZero('noise', 'absorbance'),
          modeCount: count('number of modes'),
          rmse: notNegative('root mean square error of the share over left-out standards', '1'),
          surprise: number('mean negative log density given to the errors made', 'nat'),
        }),
      ),
      v.description('choices compared, smallest error first'),
    ),
    limits: v.array(
      v.strictObject({
        species: v.picklist(SPECIES),
        path: aboveZero('path', 'cm'),
        decision: notNegative('decision limit', 'mol/L'),
        detection: notNegative('detection limit', 'mol/L'),
        quantification: notNegative('quantification limit', 'mol/L'),
        sensitivity: notNegative('sensitivity by net analyte signal', 'L/(mol·cm)'),
        selectivity: notNegative('selectivity by net analyte signal', '1'),
      }),
    ),
    design: v.strictObject({
      condition: v.pipe(
        unknown(aboveZero('condition of the design', '1')),
        v.description('s_max/s_min of the scaled amounts; null where it is beyond all bounds'),
      ),
      weak: text('weak directions of the design in words'),
    }),
  }),
  v.rawCheck((context) => agree(context, pairAgrees)),
);

const standard = v.strictObject({
  name: text('name on the sheet'),
  pair,
  role: v.pipe(
    v.picklist(['calibration', 'check', 'left-out']),
    v.description('check standards are predicted, not fitted'),
  ),
  group: text('standards left out together in validation'),
  file: text('file of the spectrum as the sheet names it'),
  column: text('column of that file'),
  sha256: hash('that file'),
  path: aboveZero('path', 'cm'),
  dilution: v.pipe(number('dilution', '1'), v.minValue(1, 'expected a dilution of 1 or more')),
  concentration: v.pipe(
    eachSpecies(notNegative('concentration', 'mol/L')),
    v.description('of the undiluted electrolyte as labelled, mol/L'),
  ),
  pathMoved: number('relative path error found', '1'),
  pathMovedInUncertainty: number('path error in units of its standard uncertainty', '1'),
  shareDoubt: number('share found − label', '1'),
  shareDoubtInUncertainty: number('the same in units of the scatter of its pair', '1'),
  leverage: notNegative('leverage', '1'),
  residualRms: notNegative('root mean square residual', 'absorbance'),
  influence: number('change of a mid-range share when it alone is left out', '1'),
  doubt: v.pipe(
    v.nullable(v.string()),
    v.description('the likeliest reason where it disagrees; null where it does not'),
  ),
});

export const calibrationSchema = v.pipe(
  v.strictObject({
    schema: v.literal('tankhue/calibration/1'),
    name: text('name of the calibration'),
    source: text('where the standards came from, in the maker’s words'),
    grid: v.pipe(
      v.strictObject({
        from: aboveZero('first wavelength', 'nm'),
        to: aboveZero('last wavelength', 'nm'),
        step: aboveZero('width of the means', 'nm'),
      }),
      v.description('spectra are read as means over step from from to to'),
    ),
    matrix: v.pipe(
      v.strictObject({
        temperature: unknown(aboveZero('temperature', 'K')),
        acid: unknown(aboveZero('total sulfate or acid as stated', 'mol/L')),
      }),
      v.description('what the calibration is valid for; null where nobody said'),
    ),
    pairs: v.pipe(v.array(pairCalibration), v.minLength(1, 'expected one pair or more')),
    standards: v.array(standard),
    findings: v.array(
      v.strictObject({
        code: text('stable word for programs'),
        severity: v.picklist(['note', 'caution', 'withhold']),
        message: text('what was seen'),
        hint: text('what to do'),
      }),
    ),
    provenance: v.strictObject({
      tool: text('tool and version'),
      command: text('command and options without paths of a machine'),
      sheetSha256: text('SHA-256 of the standards’ sheet'),
    }),
  }),
  v.rawCheck((context) => agree(context, wholeAgrees)),
  v.description(
    'A calibration of tankhue: absorbing spectra of vanadium pairs from standards, with everything needed to defend it. Wavelengths nm, paths cm, concentrations mol/L, temperatures K, shares and relative errors 1.',
  ),
);

export type CalibrationFile = v.InferOutput<typeof calibrationSchema>;
