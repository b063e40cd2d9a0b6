/**
 * Every code that reading or checking a measurement can give, with the remedy that goes with it.
 * The set is closed: programs may rely on it, and docs/measurement-files.md lists exactly these.
 */

const saveAsText = 'Save the table as CSV (UTF-8 text with commas) and hand in that file.';

const table = {
  // The file as a whole
  'empty-file': 'Choose a file with a header line and one line a bin.',
  'file-too-large': 'Hand in a smaller file: drop unused columns, or write fewer digits.',
  'format-not-read': saveAsText,
  'damaged-file': 'Write the file again, or fetch it again: it is cut off, altered, or made up.',
  'several-tables': 'Hand in a file with one table, or name the arrays after what they are.',
  'unread-column': 'Nothing has to be done unless the column is needed.',
  'trailing-bytes': 'Check that the file was written in one go; what was read is whole.',
  'not-text': saveAsText,
  'wrong-encoding': 'Save the file in the encoding UTF-8.',
  'not-utf8': 'Nothing has to be done; saved as UTF-8 the odd characters would be read as they were meant.',
  'line-too-long': 'Break the file into lines, one a bin (or one a mock).',
  'too-many-columns': 'Hand in a matrix as covariance or mocks; a measurement has one line a bin.',
  'too-many-bins': 'Join bins; a likelihood with a full covariance needs fewer.',
  'no-rows': 'Add one line a bin below the header.',
  'too-few-rows': 'Hand in at least two bins; an oscillation needs many more.',
  'single-column': 'Separate the columns by commas, semicolons, tabs or spaces.',
  'looks-like-matrix': 'Hand this file in as covariance or as mocks, and the binned measurement as the file.',
  'looks-like-table': 'Hand this file in as the measurement, and a matrix of numbers here.',
  // Lines and cells
  'unclosed-quote': 'Close the quote on the same line.',
  'duplicate-header': 'Give each column a name of its own, or map the columns by number.',
  'ragged-row': 'Fill in the missing cells or take out the extra ones; an empty value is not allowed.',
  'decimal-comma': 'Check a value below; decimal points leave no doubt.',
  'mixed-decimals': 'Write every number with a decimal point.',
  'not-a-number': 'Write the number, or leave out the whole row; a gap between bins is allowed.',
  'not-finite': 'Write a finite number, or leave out the whole row; a gap between bins is allowed.',
  'empty-cell': 'Write the number, or leave out the whole row; a gap between bins is allowed.',
  'text-column': 'Nothing has to be done unless the column is needed.',
  'more-findings': 'Mend those listed, then read the file again.',
  'matrix-header': 'Nothing has to be done if the line holds names.',
  // Columns and their meaning
  'missing-column': 'Map the columns by hand, or name them in meta.columns.',
  'ambiguous-column': 'Choose one of them by hand, or name it in meta.columns.',
  'unknown-column': 'Use a name from the header, or a number counted from 0.',
  'column-used-twice': 'Give each meaning a column of its own.',
  'kappa-given-twice': 'Map one of: kappa; kappaLo and kappaHi; kLong and kShort; k1, k2 and k3.',
  'shape-given-twice': 'Map either the shape function S or the bispectrum B.',
  'spectrum-missing':
    'Give amplitude A_s, tilt n_s and pivot k_* of the power spectrum below the columns, or in meta.spectrum.',
  'spectrum-value':
    'Give A_s itself, near 2e-9 (not ln 10^10 A_s), n_s near 1, k_* above zero, and h near 0.7.',
  'spectrum-unused': 'Nothing has to be done: the file gives S, which needs no power spectrum.',
  'unit-missing':
    'Choose 1/Mpc or h/Mpc for wavenumbers and Mpc^6 or (Mpc/h)^6 for B, or write the units behind the names in the file.',
  'hubble-missing': 'Give h, or all of them in units of one kind.',
  'bispectrum-converted':
    'Nothing has to be done: the formula stands below the columns, and the file is kept as it is.',
  // The measurement
  'units-differ': 'Give both wavenumbers in one unit, or in units that differ by a metric prefix alone.',
  'units-converted': 'Nothing has to be done: only the ratio of the wavenumbers is used.',
  'kappa-not-positive': 'Give wavenumbers and their ratio as positive numbers.',
  'kappa-too-large':
    'κ = k_long/k_short: check that long and short are not swapped, and that it is not a wavenumber.',
  'not-squeezed': 'Cut these bins in the notebook: the template holds in the squeezed regime.',
  'not-a-triangle':
    'Give three sides of a closed triangle, none longer than the other two together, with k3 the soft one.',
  'edges-reversed': 'Give the lower edge first, or swap the two columns.',
  'bins-overlap': 'Give edges so that each bin ends where the next begins or before.',
  'kappa-outside-bin': 'Correct κ or the edges of this bin.',
  'duplicate-kappa': 'Average the rows of the same κ into one.',
  'sigma-not-positive': 'Give a standard error above zero, or leave out the row.',
  'rows-reordered': 'Nothing has to be done: covariance and mocks are taken in the order of the file.',
  'bin-gaps': 'Nothing has to be done: a gap between bins is allowed.',
  'suspicious-point': 'Look at the triangles of this bin. The point is kept unless you cut it.',
  'rows-ok': '',
  'edges-ok': '',
  'sigma-ok': '',
  'points-ok': '',
  // Covariance
  'no-errors': 'Add a column of standard errors, a covariance, or mocks.',
  'errors-only': 'Squeezed bins share their long modes and are correlated: hand in a covariance or mocks.',
  'covariance-and-mocks': 'Hand in one of the two.',
  'covariance-size': 'Hand in one row and one column a bin, in the order of the measurement file.',
  'covariance-asymmetric': 'Write the full matrix, with equal elements on both sides of the diagonal.',
  'covariance-symmetrised': 'Nothing has to be done: the mean of the two sides is used.',
  'covariance-not-positive-definite':
    'Estimate it from more mocks, or join bins that carry the same triangles.',
  'covariance-ill-conditioned': 'Join the two most strongly correlated bins, or estimate it from more mocks.',
  'errors-differ': 'Check that both come from the same measurement. The covariance is used.',
  'covariance-ok': '',
  'condition-ok': '',
  'errors-agree': '',
  // Mocks
  'mocks-size': 'Hand in one row a mock and one column a bin, in the order of the measurement file.',
  'mocks-transposed': 'Transpose the file: one row a mock, one column a bin.',
  'too-few-mocks': 'Add mocks, or join bins.',
  'few-mocks': 'Add mocks: with fewer than twice the bins the likelihood is wide and its shape uncertain.',
  'duplicate-mocks': 'Leave out the copies: each mock must be independent.',
  'outlying-mock': 'Look at this mock. It is kept.',
  'mock-count': 'Give the number of mocks as a whole number.',
  'mock-count-unused': 'Leave it out: the number of mocks is counted from their file.',
  'mocks-ok': '',
  'mocks-alike': '',
  // How theory becomes data
  'window-size':
    'Write the lower edges of the theory bins, then the upper ones, then one row a bin in the order of the measurement file.',
  'window-bins':
    'Give the theory bins in ascending κ, without overlap, their lower edges in the first row and the upper in the second.',
  'window-empty-row':
    'Give the row that makes this bin from the theory bins, or leave the bin out of the measurement.',
  'window-row-sums': 'Nothing has to be done if the measurement is normalised so.',
  'window-ill-conditioned': 'Check that no row is there twice; such bins tell nothing apart.',
  'window-ok': '',
  'window-condition-ok': '',
  'columns-size': 'Hand in one row a bin, in the order of the measurement file, and one column a template.',
  'columns-kappa': 'Write the columns in the bins of the measurement and in the order of its file.',
  'column-name':
    'Name the column in a header line, in letters, digits and underscores, as no parameter is named.',
  'column-empty': 'Leave the column out.',
  'columns-ok': '',
  'theory-covariance-size': 'Hand in one row and one column a bin, in the order of the measurement file.',
  'theory-covariance-asymmetric': 'Write the full matrix, with equal elements on both sides of the diagonal.',
  'theory-covariance-negative':
    'Give the covariance of an uncertainty: a sum of squares has no negative eigenvalue.',
  'theory-covariance-ok': '',
  // Cuts
  'cut-empty': 'Widen the cut so that it holds at least one whole bin.',
} as const;

/** The closed set of codes. */
export type FindingCode = keyof typeof table;

/** The remedy of each code; empty for what passed and needs none. */
export const remedies: Readonly<Record<FindingCode, string>> = table;

/** All codes, in the order of the documentation. */
export const findingCodes = Object.keys(table) as readonly FindingCode[];
