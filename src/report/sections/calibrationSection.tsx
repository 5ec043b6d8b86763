import type { Calibration, PairCalibration } from '../../calibration/calibration.ts';
import { speciesOfPair } from '../../electrolyte/species.ts';
import { celsiusFromKelvin } from '../../units.ts';
import { LimitsPicture } from '../pictures/limitsPicture.tsx';
import { PureSpectraPicture } from '../pictures/pureSpectraPicture.tsx';
import { StandardsPicture } from '../pictures/standardsPicture.tsx';
import { ErrorPicture, PredictedPicture } from '../pictures/validationPictures.tsx';
import { absorberName, pathText } from '../words.ts';
import { Answer, Answers } from './answers.tsx';
import { Findings } from './findings.tsx';

/** A calibration explained: how good, on what evidence, which standards to look at. */
export function CalibrationSection({ id, calibration }: { id: string; calibration: Calibration }) {
  const { grid, matrix, standards } = calibration;
  return (
    <>
      <section aria-labelledby={`${id}-title`}>
        <h2 id={`${id}-title`} class="break">
          Calibration {calibration.name}
        </h2>
        <Answers>
          {calibration.pairs.map((pair) => (
            <Answer
              key={pair.pair}
              name={`${pairName(pair)}, left-out error`}
              value={(100 * (pair.validation[0]?.share.rmse ?? NaN)).toFixed(2)}
              unit="points, root mean square"
              more={`${Math.round(100 * (pair.validation[0]?.share.coverage ?? NaN))} % inside 95 % intervals`}
            />
          ))}
        </Answers>
        <p class="soft break">
          {standards.length} standards, {grid.from} to {grid.to} nm in means of {grid.step} nm; temperature{' '}
          {matrix.temperature === null ? 'unknown' : `${celsiusFromKelvin(matrix.temperature).toFixed(1)} °C`}, acid{' '}
          {matrix.acid === null ? 'unknown' : `${matrix.acid} mol/L`}.
          {calibration.source && ` Source: ${calibration.source}.`}
        </p>
        <Findings findings={calibration.findings} />
        <StandardsPicture id={`${id}-standards`} calibration={calibration} />
        <LimitsPicture id={`${id}-limits`} calibration={calibration} />
      </section>
      {calibration.pairs.map((pair, i) => (
        <PairSection key={pair.pair} id={`${id}-pair-${i + 1}`} pair={pair} />
      ))}
    </>
  );
}

const pairName = ({ pair }: PairCalibration): string => speciesOfPair(pair).map(absorberName).join(' / ');

function PairSection({ id, pair }: { id: string; pair: PairCalibration }) {
  const { domain, model, betweenGroup } = pair;
  const [lower, higher] = speciesOfPair(pair.pair).map(absorberName);
  return (
    <section aria-labelledby={`${id}-title`}>
      <h2 id={`${id}-title`}>
        {lower} and {higher}
      </h2>
      <p>
        Valid for {domain.total[0].toPrecision(3)} to {domain.total[1].toPrecision(3)} mol/L in the cuvette,{' '}
        {Math.round(100 * domain.share[0])} to {Math.round(100 * domain.share[1])} % {higher},{' '}
        {pathText(domain.path[0])}
        {domain.path[0] !== domain.path[1] && ` to ${pathText(domain.path[1])}`}. Model:{' '}
        {['Beer-Lambert', ...model.associations.map(({ name }) => absorberName(name))].join(' + ')}
        {pair.constants
          .filter(({ value }) => value > 0)
          .map(
            ({ association, value, interval }) =>
              `; constant of ${absorberName(association)} ${value.toPrecision(3)} L/mol (95 %: ${interval[0]?.toPrecision(3) ?? 'no lower bound'} to ${interval[1]?.toPrecision(3) ?? 'no upper bound'})`,
          )}
        . Errors that preparations do not share with each other, {(100 * betweenGroup.share).toFixed(2)} points and{' '}
        {(100 * betweenGroup.total).toFixed(2)} % of the total, are part of every uncertainty.
      </p>
      <PredictedPicture id={`${id}-predicted`} pair={pair} />
      <ErrorPicture id={`${id}-error`} pair={pair} />
      <PureSpectraPicture id={`${id}-spectra`} pair={pair} />
    </section>
  );
}
