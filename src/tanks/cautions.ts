// The usual cautions. Common practice, no source unless a safety data sheet says otherwise.

export const DISCLAIMER =
  'Calculated amounts are arithmetic, not a work instruction; follow the safety data sheets, the plant’s procedures, local codes and the judgement of licensed persons.';

const CAUTIONS = {
  acid: 'strong sulfuric acid: goggles or face shield, acid-proof gloves, apron, eyewash at hand; acid into water, never the reverse',
  vanadium: 'vanadium is toxic swallowed, as mist and as dried dust; no dry sweeping',
  'charged-negative': 'V(II) heats in air and slowly makes hydrogen: vented vessels, no tight glass, no flame',
  hydrogen:
    'hydrogen is explosive from about 4 % in air: ventilate tank heads, no ignition source, test before opening',
  'carbon-dioxide': 'dosing makes gas and foam: never a closed tank, extract to the outside, CO2 meter, not alone',
  heat: 'moving charged electrolyte warms it; stop above the maker’s limit, commonly 40 °C',
  precipitate: 'warm, highly charged V(V) drops V2O5 and blocks felts: discharge, cool',
  electric: 'a charged stack cannot be switched off: isolate, lock out, authorised electricians',
  'refused-chemicals': 'no quantity is given for hydrazine, peroxide, chlorates or SO2',
  spill: 'contain, neutralise slowly (CO2), collect, dispose by local rules; never to drain',
} as const;

export type CautionCode = keyof typeof CAUTIONS;

export const cautionsOf = (...codes: readonly CautionCode[]): { code: CautionCode; text: string }[] =>
  codes.map((code) => ({ code, text: CAUTIONS[code] }));
