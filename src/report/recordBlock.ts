// What        The record inside a report: the result JSON, plain where it is short, gzip in base64 where it is long.
// Why so      A person can read a short one in the source of the page; a hundred assays at 5 kB each would not fit into a file that is mailed.

/** id of the script block that holds the record */
export const RECORD_ID = 'tankhue-record';
/** characters of JSON above which the record is compressed */
const LONGEST_PLAIN = 150_000;
/** assays above which curves for drawing are left out of the record */
export const MOST_WITH_CURVES = 8;
const CURVE_DIGITS = 5;

const CURVE_KEYS = new Set(['measured', 'fitted', 'shares', 'residualUncertainty', 'absorbancePerCentimetre']);

/** JSON of a document; every reported number as it is, curves for drawing to five digits or, with many assays, not at all. */
export function recordJson(document: unknown, keepCurves: boolean): string {
  return JSON.stringify(document, (key, value: unknown) => {
    if (!keepCurves && (key === 'curve' || key === 'tank')) return undefined;
    return CURVE_KEYS.has(key) ? rounded(value) : value;
  });
}

function rounded(value: unknown): unknown {
  if (typeof value === 'number') return Number(value.toPrecision(CURVE_DIGITS));
  if (Array.isArray(value)) return value.map(rounded);
  if (typeof value === 'object' && value !== null)
    return Object.fromEntries(Object.entries(value).map(([key, inner]) => [key, rounded(inner)]));
  return value;
}

/** The script block. Nothing in it can end the block or begin another: `<` is written `\u003c`, base64 has none. */
export async function recordBlock(json: string): Promise<string> {
  if (json.length <= LONGEST_PLAIN)
    return `<script type="application/json" id="${RECORD_ID}">${json.replaceAll('<', '\\u003c')}</script>`;
  const packed = await new Response(new Blob([json]).stream().pipeThrough(new CompressionStream('gzip'))).arrayBuffer();
  return `<script type="application/gzip" id="${RECORD_ID}">${base64Of(new Uint8Array(packed))}</script>`;
}

function base64Of(bytes: Uint8Array): string {
  let text = '';
  for (let i = 0; i < bytes.length; i += 8192) text += String.fromCharCode(...bytes.subarray(i, i + 8192));
  return btoa(text);
}
