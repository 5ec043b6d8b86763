import type { AssayResult } from '../../assay/result.ts';
import { speciesOfPair } from '../../electrolyte/species.ts';
import { BudgetPicture } from '../pictures/budgetPicture.tsx';
import { SpectrumPicture } from '../pictures/spectrumPicture.tsx';
import { concentrationText, percentText, quantityText } from '../quantityText.ts';
import { pathText, romanNumeral, SIDE_WORD, STATE_WORD } from '../words.ts';
import { Answer, Answers } from './answers.tsx';
import { Findings } from './findings.tsx';

/** One assay: what it says, how far to trust it, and why. */
export function AssaySection({ id, assay }: { id: string; assay: AssayResult }) {
  return (
    <section id={id} aria-labelledby={`${id}-title`}>
      <h2 id={`${id}-title`} class="break">
        {[assay.system, assay.sample].filter(Boolean).join(' / ')}, {SIDE_WORD[assay.side]} <StateBadge assay={assay} />
      </h2>
      <AssayNumbers assay={assay} />
      <Findings findings={assay.findings} />
      <SpectrumPicture id={`${id}-spectrum`} assay={assay} />
      {assay.state !== 'withheld' && <BudgetPicture id={`${id}-budget`} assay={assay} />}
    </section>
  );
}

export const StateBadge = ({ assay }: { assay: AssayResult }) => (
  <span class={`badge ${assay.state}`}>{STATE_WORD[assay.state]}</span>
);

export function AssayNumbers({ assay }: { assay: AssayResult }) {
  const [lower, higher] = speciesOfPair(assay.pair);
  const { stateOfCharge, averageOxidationState, totalVanadium } = assay;
  const { interval } = stateOfCharge;
  return (
    <>
      <Answers>
        {assay.side !== 'composite' && (
          <Answer
            name="state of charge"
            value={percentText(stateOfCharge.value, stateOfCharge.uncertainty)}
            unit="%"
            {...(interval
              ? { more: `95 %: ${(100 * interval[0]).toFixed(1)} to ${(100 * interval[1]).toFixed(1)} %` }
              : {})}
          />
        )}
        <Answer
          name="mean oxidation state"
          value={quantityText(averageOxidationState.value, averageOxidationState.uncertainty)}
          unit=""
        />
        {[lower, higher].map((species) => (
          <Answer
            key={species}
            name={romanNumeral(species)}
            value={concentrationText(
              assay.concentration[species]?.value ?? null,
              assay.concentration[species]?.uncertainty ?? null,
            )}
            unit="mol/L"
          />
        ))}
        <Answer
          name="total vanadium"
          value={quantityText(totalVanadium.value, totalVanadium.uncertainty)}
          unit="mol/L"
        />
      </Answers>
      <p class="soft break">
        Measured in {pathText(assay.pathLength)}, {assay.dilution === 1 ? 'undiluted' : `diluted 1:${assay.dilution}`};
        amounts are those of the tank. ± is the standard uncertainty (k = 1).
        {assay.assumed.length > 0 && ` Assumed: ${assay.assumed.join('; ')}.`}
      </p>
    </>
  );
}
