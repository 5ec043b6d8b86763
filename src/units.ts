/** The only conversions. Inside: cm, K, decadic absorbance, mol/L, fractions; at the border: mm, °C, %T, mA, per cent. */

export const centimetresFromMillimetres = (millimetres: number): number => millimetres / 10;
export const millimetresFromCentimetres = (centimetres: number): number => centimetres * 10;
export const kelvinFromCelsius = (celsius: number): number => celsius + 273.15;
export const celsiusFromKelvin = (kelvin: number): number => kelvin - 273.15;

/** Transmittance 0…1 to decadic absorbance; NaN where nothing came through (transmittance ≤ 0), because no absorbance can be stated. */
export const absorbanceFromTransmittance = (transmittance: number): number =>
  transmittance > 0 ? 0 - Math.log10(transmittance) : NaN;

/** Per cent transmittance to decadic absorbance. */
export const absorbanceFromPercentTransmittance = (percent: number): number =>
  absorbanceFromTransmittance(percent / 100);

export const absorbanceFromMilliabsorbance = (milliabsorbance: number): number => milliabsorbance / 1000;

/** Wavelength in nm of a wavenumber in cm⁻¹ (and the other way round: the rule is its own inverse). */
export const nanometresFromWavenumber = (wavenumber: number): number => 1e7 / wavenumber;

export const nanometresFromMicrometres = (micrometres: number): number => micrometres * 1000;

/** Faraday constant in ampere-hours per mole of electrons: 96485.33212 C/mol / 3600 (CODATA 2018, exact from the SI definition). */
export const AMPERE_HOURS_PER_MOLE = 96485.33212331 / 3600;
