// One thread of the engine bench: solves the shared rows as often as asked.
import { readFileSync } from 'node:fs';
import { parentPort, workerData } from 'node:worker_threads';
import { parseCalibration, prepare } from '../../dist/index.js';

const { rows, points, pair, pathLength } = workerData;
const calibration = parseCalibration(readFileSync('calibration/reference.json', 'utf8'), 'reference.json');
const axis = Float64Array.from({ length: points }, (_, i) => 430 + (520 * i) / (points - 1));
const many = prepare(calibration, axis, { pair, pathLength });
const count = rows.length / points;
const out = {
  stateOfCharge: new Float64Array(count),
  uncertainty: new Float64Array(count),
  totalVanadium: new Float64Array(count),
};
parentPort.on('message', (times) => {
  for (let i = 0; i < times; i++) many.solveMany(rows, out);
  parentPort.postMessage('done');
});
parentPort.postMessage('ready');
