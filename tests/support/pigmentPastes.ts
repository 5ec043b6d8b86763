/**
 * Moisture of pigment pastes: 15 batches, 2 samples each, 2 tests each. G. E. P. Box, W. G. Hunter, J. S. Hunter, Statistics for
 * Experimenters; data from memory, which the published table of the analysis confirms.
 */
export const PIGMENT_PASTES: readonly (readonly [number, number, number, number])[] = [
  [40, 39, 30, 30],
  [26, 28, 25, 26],
  [29, 28, 14, 15],
  [30, 31, 24, 24],
  [19, 20, 17, 17],
  [33, 32, 26, 24],
  [23, 24, 32, 33],
  [34, 34, 29, 29],
  [27, 27, 31, 31],
  [13, 16, 27, 24],
  [25, 23, 25, 27],
  [29, 29, 31, 32],
  [19, 20, 29, 30],
  [23, 24, 25, 25],
  [39, 37, 26, 28],
];
