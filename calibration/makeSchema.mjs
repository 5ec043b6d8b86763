// Writes calibration.schema.json, the schema that reads calibration files in the form other programs know (JSON Schema, draft 7).
// Run `npm run build` first, then `node calibration/makeSchema.mjs`; with --print the text goes to stdout instead.
import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { toJsonSchema } from '@valibot/to-json-schema';
import { calibrationSchema } from '../dist/calibration/schema.js';

// Checks across fields (equal lengths, rising wavelengths) and "finite" have no word in JSON Schema; `ignore` leaves them out.
const schema = toJsonSchema(calibrationSchema, { errorMode: 'ignore' });
const text = `${JSON.stringify({ $id: 'tankhue/calibration/1', title: 'tankhue/calibration/1', ...schema }, null, 1)}\n`;

if (process.argv.includes('--print')) process.stdout.write(text);
else writeFileSync(fileURLToPath(new URL('calibration.schema.json', import.meta.url)), text);
