/** The public API. The command line and the page use nothing else. */
export { TankhueError, TankhueErrors } from './errors.ts';
export { makeSpectrum, type Spectrum, type SpectrumOrigin } from './spectrum/spectrum.ts';
export * from './electrolyte/species.ts';
export type * from './assay/result.ts';
