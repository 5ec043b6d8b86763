import { calibrationReport, serialiseCalibration, VERSION } from '../index.ts';
import { CalibrationSection } from '../report/sections/calibrationSection.tsx';
import type { Bench } from './bench.ts';
import { REFERENCE_NAME } from './protocol.ts';
import { saveFile } from './saveFile.ts';

/** Which calibration is used, and what it is worth. */
export function CalibrationChoice({ bench }: { bench: Bench }) {
  const { files, calibration, inspected } = bench.state;
  const own = files.filter(({ read }) => read?.kind === 'calibration').map(({ name }) => name);
  return (
    <section aria-labelledby="calibration-title">
      <h2 id="calibration-title">Calibration</h2>
      <p class="inline-form">
        <label>
          in use{' '}
          <select value={calibration} onChange={(event) => bench.chooseCalibration(event.currentTarget.value)}>
            {[REFERENCE_NAME, ...own].map((name) => (
              <option key={name}>{name}</option>
            ))}
          </select>
        </label>
        <button
          type="button"
          aria-expanded={inspected !== null}
          onClick={() => (inspected ? bench.closeInspected() : void bench.inspect())}
        >
          {inspected ? 'Close it' : 'Look into it'}
        </button>
      </p>
      {calibration === REFERENCE_NAME && (
        <p class="soft">
          The shipped one was made from published spectra of another electrolyte: good for a first look, never better
          than “use with caution”. To build your own, drop a sheet of standards and their spectra.
        </p>
      )}
      {inspected && (
        <>
          <p>
            <button
              type="button"
              onClick={() =>
                saveFile(
                  `${inspected.calibration.name}.json`,
                  serialiseCalibration(inspected.calibration),
                  'application/json',
                )
              }
            >
              Save this calibration (JSON)
            </button>{' '}
            <button
              type="button"
              onClick={() =>
                void calibrationReport(inspected.calibration, inspected.sha256, `tankhue ${VERSION}, the page`).then(
                  (html) => saveFile(`${inspected.calibration.name}.html`, html, 'text/html'),
                )
              }
            >
              Save its report (HTML)
            </button>
          </p>
          <CalibrationSection id="inspected" calibration={inspected.calibration} />
        </>
      )}
    </section>
  );
}
