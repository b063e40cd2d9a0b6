import { readName } from './delimiter';
import { finding, MeasurementError, showName } from './errors';
import type { ColumnMapping, ColumnRef, ColumnRole, Finding, ParsedTable } from './types';

/** Names of a standard error that don't say of what. */
const anyErrors = ['sigma', 'err', 'error', 'stderr', 'standarderror', 'std', 'sd', 'uncertainty'];

/** Names of the standard error of a quantity, itself a letter. */
function errorsOf(quantity: 's' | 'b'): string[] {
  const before = ['sigma', 'err', 'error', 'stderr', 'std', 'sd', 'delta', 'd'];
  const behind = ['err', 'error', 'sigma', 'stderr', 'std', 'sd'];
  return [...before.map((word) => word + quantity), ...behind.map((word) => quantity + word)];
}

/** Names by which a meaning is recognised, the most exact first; letters and digits only, lower case, Greek spelt out. */
const knownNames: Record<ColumnRole, string[]> = {
  kappa: [
    'kappa',
    'kappaeff',
    'kappamean',
    'kappamid',
    'kappacentre',
    'kappacenter',
    'kratio',
    'klongkshort',
    'klks',
  ],
  kappaLo: [
    'kappalo',
    'kappalow',
    'kappalower',
    'kappamin',
    'kappaleft',
    'kratiolo',
    'kratiolow',
    'kratiomin',
    'binlo',
  ],
  kappaHi: [
    'kappahi',
    'kappahigh',
    'kappaupper',
    'kappamax',
    'kapparight',
    'kratiohi',
    'kratiohigh',
    'kratiomax',
    'binhi',
  ],
  kLong: ['klong', 'ksoft', 'kl'],
  kShort: ['kshort', 'khard', 'ks'],
  k1: ['k1'],
  k2: ['k2'],
  k3: ['k3'],
  S: ['s', 'shape', 'shapefunction', 'sshape', 'smean', 'sobs', 'sdata', 'smeasured'],
  B: ['b', 'bk', 'bispectrum', 'bk1k2k3', 'bzeta', 'bsqueezed', 'bmean', 'bobs', 'bdata', 'bmeasured'],
  sigma: [...errorsOf('s'), ...anyErrors],
};

/** The same for a file that gives B and no S: the standard errors are those of B. */
const namesWithB: Record<ColumnRole, string[]> = { ...knownNames, sigma: [...errorsOf('b'), ...anyErrors] };

const roles = Object.keys(knownNames) as ColumnRole[];

/** The ways of giving κ, the first that is complete is taken. */
const kappaWays: ColumnRole[][] = [
  ['kappaLo', 'kappaHi'],
  ['kappa'],
  ['kLong', 'kShort'],
  ['k1', 'k2', 'k3'],
];

/** Those that B is turned into S by. */
const wavenumberWays = kappaWays.slice(2);

const needOfB = 'the wavenumbers that B needs (k_long and k_short, or k1, k2 and k3)';

/** The first way of giving wavenumbers that is complete; none is an empty list. */
function wavenumbersOf(columns: Partial<Record<ColumnRole, unknown>>): ColumnRole[] {
  return wavenumberWays.find((way) => way.every((role) => columns[role] !== undefined)) ?? [];
}

/** What one column was recognised as; null where it is not used. */
export interface RecognisedColumn {
  /** 0-based. */
  column: number;
  name: string;
  role: ColumnRole | null;
}

/** A mapping found by names, what each column became, and errors if it is not complete. */
export interface Recognition {
  /** By 0-based number; the roles that were found, even if something is missing. */
  mapping: ColumnMapping;
  how: RecognisedColumn[];
  /** Empty if the mapping can be applied. */
  findings: Finding[];
}

/** The forms in which a name is compared: with what stands in brackets, and without. */
function comparable(name: string): string[] {
  const spell = (text: string) =>
    text
      .normalize('NFKC')
      .toLowerCase()
      .replace(/κ|ϰ/g, 'kappa')
      .replace(/σ|ς/g, 'sigma')
      .replace(/δ/g, 'delta')
      .replace(/[^a-z0-9]/g, '');
  return [spell(name), spell(name.replace(/\([^)]*\)|\[[^\]]*\]/g, ''))];
}

function rankOf(name: string, role: ColumnRole, known = knownNames): number {
  const forms = comparable(name);
  // "errors(S)" is a standard error, not S: the whole name decides before its part outside brackets.
  for (const form of forms) {
    const owner = roles.find((other) => known[other].includes(form));
    if (owner !== undefined) return owner === role ? known[role].indexOf(form) : -1;
  }
  return -1;
}

/**
 * Recognises columns by their names: κ (or its edges, k_long and k_short, or k1, k2, k3), S and its standard error; or, in a
 * file without S, the bispectrum B, its standard error and the wavenumbers that it is turned into S by.
 * Upper and lower case, brackets, underscores and units do not matter. Two columns of equally good names are an
 * `ambiguous-column`; what is missing is a `missing-column` that says what the file has.
 */
export function recogniseColumns(table: ParsedTable): Recognition {
  const found: Partial<Record<ColumnRole, number>> = {};
  const findings: Finding[] = [];
  const named = (role: ColumnRole) => table.columns.some(({ name }) => rankOf(name, role) >= 0);
  const known = !named('S') && named('B') ? namesWithB : knownNames;
  for (const role of roles) {
    const ranked = table.columns
      .map(({ name }, column) => ({ column, rank: rankOf(name, role, known) }))
      .filter(({ rank }) => rank >= 0)
      .sort((a, b) => a.rank - b.rank);
    if (ranked.length === 0) continue;
    found[role] = ranked[0].column;
    if (ranked.length > 1 && ranked[1].rank === ranked[0].rank) {
      const [first, second] = ranked.map(({ column }) => column + 1);
      const message = `Columns ${first} and ${second} can both be ${roleName(role)}.`;
      findings.push(finding('ambiguous-column', 'error', message, { part: 'file', column: second }));
    }
  }
  const mapping = chooseKappa(found);
  if (found.S !== undefined) mapping.S = found.S;
  else if (found.B !== undefined) {
    mapping.B = found.B;
    for (const role of wavenumbersOf(found)) mapping[role] = found[role];
  }
  if (found.sigma !== undefined) mapping.sigma = found.sigma;
  const ambiguous = findings.length > 0;
  const missing = missingFrom(mapping, found);
  if (missing.length > 0 && !ambiguous) findings.push(missingColumn(table, missing));
  const how = table.columns.map(({ name }, column) => ({
    column,
    name,
    role: roles.find((role) => mapping[role] === column) ?? null,
  }));
  return { mapping, how, findings };
}

function chooseKappa(found: Partial<Record<ColumnRole, number>>): ColumnMapping {
  const mapping: ColumnMapping = {};
  const way = kappaWays.find((needed) => needed.every((role) => found[role] !== undefined));
  for (const role of way ?? []) mapping[role] = found[role];
  // κ within its edges is kept beside them.
  if (way?.[0] === 'kappaLo' && found.kappa !== undefined) mapping.kappa = found.kappa;
  return mapping;
}

function missingFrom(mapping: ColumnMapping, found: Partial<Record<ColumnRole, number>>): string[] {
  const missing: string[] = [];
  if (!kappaWays.some((way) => way.every((role) => mapping[role] !== undefined))) {
    const begun = kappaWays.find((way) => way.some((role) => found[role] !== undefined));
    const rest = begun?.filter((role) => found[role] === undefined).map(roleName);
    missing.push(rest ? rest.join(' and ') : 'κ (or its edges, or k_long and k_short)');
  }
  if (mapping.S === undefined && mapping.B === undefined) missing.push('S');
  if (mapping.B !== undefined && wavenumbersOf(mapping).length === 0) missing.push(needOfB);
  return missing;
}

function missingColumn(table: ParsedTable, missing: string[]): Finding {
  const names = table.columns.slice(0, 12).map(({ name }) => showName(name));
  const unnamed = table.columns.every(({ name }, j) => name === `column ${j + 1}`);
  if (unnamed && table.columns.length > 12) {
    const message = `The file has ${table.columns.length} columns and no names: it looks like a covariance or mocks.`;
    return finding('looks-like-matrix', 'error', message, { part: 'file', line: table.lines[0] });
  }
  const has = unnamed
    ? `The file has ${names.length} columns without names.`
    : `The file has ${names.join(', ')}${table.columns.length > 12 ? ', …' : ''}.`;
  return finding('missing-column', 'error', `There is no column for ${missing.join(', nor for ')}. ${has}`, {
    part: 'file',
    line: table.headerLine ?? table.lines[0],
  });
}

/**
 * True if any of the names is recognised: then the columns are those of a measurement, not of a matrix. A bispectrum stands beside its
 * wavenumbers; “b” alone may be anything.
 */
export function recogniseNames(names: string[]): boolean {
  const telling = roles.filter((role) => role !== 'B');
  return names.some((name) => telling.some((role) => rankOf(readName(name).name, role) >= 0));
}

/** What a role is called in a message. */
export function roleName(role: ColumnRole): string {
  const names: Partial<Record<ColumnRole, string>> = {
    kappa: 'κ',
    kappaLo: 'the lower edge in κ',
    kappaHi: 'the upper edge in κ',
    kLong: 'k_long',
    kShort: 'k_short',
    sigma: 'the standard error',
  };
  return names[role] ?? role;
}

/** 0-based number of a column given by name or number. Throws `unknown-column`. */
export function columnIndex(table: ParsedTable, ref: ColumnRef, role: ColumnRole): number {
  const { columns } = table;
  if (typeof ref === 'number') {
    if (Number.isInteger(ref) && ref >= 0 && ref < columns.length) return ref;
    const message = `${roleName(role)} is mapped to column number ${ref}; the file has 0 to ${columns.length - 1}.`;
    throw new MeasurementError('unknown-column', message, { part: 'file' });
  }
  const exact = columns.findIndex(({ name }) => name === ref);
  if (exact >= 0) return exact;
  // Columns of one name were told apart by their number; the bare name does not say which.
  const same = columns.flatMap(({ name }, j) => (name === `${ref} (column ${j + 1})` ? [j + 1] : []));
  if (same.length > 0) {
    const message = `${roleName(role)} is mapped to ${showName(ref)}, and columns ${same.join(', ')} have that name.`;
    throw new MeasurementError('ambiguous-column', message, { part: 'file', column: same[0] });
  }
  const trimmed = columns.flatMap(({ name }, j) =>
    name.toLowerCase() === ref.trim().toLowerCase() ? [j] : [],
  );
  if (trimmed.length === 1) return trimmed[0];
  const has = columns.slice(0, 12).map(({ name }) => showName(name));
  const message = `${roleName(role)} is mapped to ${showName(ref)}, which the file lacks: it has ${has.join(', ')}.`;
  throw new MeasurementError('unknown-column', message, { part: 'file' });
}

/** A mapping by numbers. Throws `unknown-column`, `ambiguous-column` or `column-used-twice`. */
export function requireColumns(
  table: ParsedTable,
  mapping: ColumnMapping,
): Partial<Record<ColumnRole, number>> {
  const result: Partial<Record<ColumnRole, number>> = {};
  for (const role of roles) {
    const ref = mapping[role];
    if (ref === undefined || ref === null) continue;
    const column = columnIndex(table, ref, role);
    const other = roles.find((before) => result[before] === column);
    if (other !== undefined) {
      const message = `Column ${column + 1} is mapped both to ${roleName(other)} and to ${roleName(role)}.`;
      throw new MeasurementError('column-used-twice', message, { part: 'file', column: column + 1 });
    }
    result[role] = column;
  }
  return result;
}

/**
 * A mapping by numbers that can be applied: S or B, and exactly one way of giving κ (κ beside its edges is one way). With B, which needs
 * wavenumbers, κ or its edges may stand beside them. Throws what `requireColumns` throws, `missing-column`, `shape-given-twice` or `kappa-given-twice`.
 */
export function completeMapping(
  table: ParsedTable,
  mapping: ColumnMapping,
): Partial<Record<ColumnRole, number>> {
  const columns = requireColumns(table, mapping);
  const begun = kappaWays.filter((way) => way.some((role) => columns[role] !== undefined));
  const missing: string[] = [];
  if (begun.length === 0) missing.push('κ');
  for (const way of begun) missing.push(...way.filter((role) => columns[role] === undefined).map(roleName));
  if (columns.S === undefined && columns.B === undefined) missing.push('S');
  const sides = columns.B === undefined ? [] : wavenumbersOf(columns);
  if (columns.B !== undefined && sides.length === 0) missing.push(needOfB);
  if (missing.length > 0) {
    const message = `The mapping has no column for ${missing.join(', nor for ')}.`;
    throw new MeasurementError('missing-column', message, { part: 'file' });
  }
  if (columns.S !== undefined && columns.B !== undefined) {
    const message = 'Both the shape function S and the bispectrum B are mapped.';
    throw new MeasurementError('shape-given-twice', message, { part: 'file', column: columns.B + 1 });
  }
  const besideB = (way: ColumnRole[]) => begun.length > 1 && way.every((role) => sides.includes(role));
  const ways = begun.filter((way) => !(way[0] === 'kappa' && columns.kappaLo !== undefined) && !besideB(way));
  if (ways.length > 1) {
    const message = `κ is given in ${ways.length} ways: ${ways.map((way) => way.map(roleName).join(' and ')).join('; ')}.`;
    throw new MeasurementError('kappa-given-twice', message, { part: 'file' });
  }
  return columns;
}
