import { describe, expect, it } from 'vitest';
import { applyMapping, parseMeasurement, recogniseColumns } from '@/lib/measurements';
import { errorOf, file, placesOf } from './measurement-files';

const table = (header: string, ...rows: string[]) => {
  const cells = header.split(',').map((_, j) => `0.${j + 1}`);
  const text = [header, ...(rows.length > 0 ? rows : [cells.join(',')])].join('\n');
  return parseMeasurement(file(text).bytes, 'data.csv');
};

describe('columns recognised by name', () => {
  it.each([
    ['kappa,S', { kappa: 0, S: 1 }],
    ['κ,S,σ_S', { kappa: 0, S: 1, sigma: 2 }],
    ['k_ratio_lo,k_ratio_hi,S,S_err,n_tri', { kappaLo: 0, kappaHi: 1, S: 2, sigma: 3 }],
    ['kappa_lo,kappa_hi,kappa_eff,S,sigma_S', { kappaLo: 0, kappaHi: 1, kappa: 2, S: 3, sigma: 4 }],
    ['Sigma(S),KAPPA [1],s', { sigma: 0, kappa: 1, S: 2 }],
    ['k_long [h/Mpc],k_short (h/Mpc),S(k),error', { kLong: 0, kShort: 1, S: 2, sigma: 3 }],
    ['k1,k2,k3,S,std', { k1: 0, k2: 1, k3: 2, S: 3, sigma: 4 }],
    ['K_{long},K_{short},\\hat S,\\sigma_{S}', { kLong: 0, kShort: 1, sigma: 3 }],
    ['k_long/k_short,S', { kappa: 0, S: 1 }],
  ])('%s', (header, mapping) => {
    expect(recogniseColumns(table(header)).mapping).toEqual(mapping);
  });

  it('says what each column became', () => {
    const { how, findings } = recogniseColumns(table('kappa,S,n_tri'));
    expect(how).toEqual([
      { column: 0, name: 'kappa', role: 'kappa' },
      { column: 1, name: 'S', role: 'S' },
      { column: 2, name: 'n_tri', role: null },
    ]);
    expect(findings).toEqual([]);
  });

  it.each([
    ['kappa,value', 'missing-column', /no column for S\. The file has kappa, value\./],
    ['x,S', 'missing-column', /no column for κ/],
    ['k_long,S', 'missing-column', /no column for k_short/],
    ['kappa,B', 'missing-column', /wavenumbers that B needs/],
    ['S,s,kappa', 'ambiguous-column', /Columns 1 and 2/],
    ['0.1,0.2', 'missing-column', /2 columns without names/],
    [Array.from({ length: 30 }, (_, j) => j + 1).join(','), 'looks-like-matrix', /30 columns/],
  ])('%s is refused as %s', (header, code, message) => {
    const { findings } = recogniseColumns(table(header));
    expect(findings.map((found) => found.code)).toEqual([code]);
    expect(findings[0].message).toMatch(message);
    expect(findings[0].remedy).not.toBe('');
  });
});

it('A missing column is reported at the line of the names, header or comment', () => {
  const lineOf = (text: string) => recogniseColumns(parseMeasurement(file(text).bytes, 'a')).findings[0].line;
  expect(lineOf('# a note\n\nkappa,x\n\n\n0.1,2\n')).toBe(3);
  expect(lineOf('# a note of words\n# kappa x\n#\n0.1 2\n')).toBe(2);
  expect(lineOf('\n0.1 2\n')).toBe(2);
});

describe('a mapping by hand', () => {
  const data = table('a,b,c,d', '0.1,0.2,3,4');

  it.each([
    [{ kappa: 'a' }, 'missing-column'],
    [{ S: 2 }, 'missing-column'],
    [{ kLong: 'a', S: 'c' }, 'missing-column'],
    [{ kappa: 'a', kLong: 'b', kShort: 'd', S: 'c' }, 'kappa-given-twice'],
    [{ kappa: 'a', S: 'a' }, 'column-used-twice'],
    [{ kappa: 'a', S: 4 }, 'unknown-column'],
    [{ kappa: 'a', S: 1.5 }, 'unknown-column'],
    [{ kappa: 'nope', S: 1 }, 'unknown-column'],
  ])('%j is refused as %s', (mapping, code) => {
    expect(errorOf(() => applyMapping(data, mapping)).code).toBe(code);
  });

  it('takes names and 0-based numbers', () => {
    const { measurement } = applyMapping(data, { kLong: 'A', kShort: 1, S: 'c', sigma: 3 });
    expect(Array.from(measurement?.kappa ?? [])).toEqual([0.5]);
    expect(Array.from(measurement?.sigma ?? [])).toEqual([4]);
  });
});

describe('κ', () => {
  const apply = (header: string, ...rows: string[]) => {
    const data = table(header, ...rows);
    return applyMapping(data, recogniseColumns(data).mapping);
  };

  it('is √(lo·hi) for edges, k_long/k_short, and 2k3/(k1+k2) for triangles', () => {
    const kappa = (header: string, row: string) => apply(header, row).measurement?.kappa[0];
    expect(kappa('kappa_lo,kappa_hi,S', '0.04,0.09,1')).toBeCloseTo(0.06, 15);
    expect(kappa('k_long,k_short,S', '0.01,0.2,1')).toBeCloseTo(0.05, 15);
    expect(kappa('k1,k2,k3,S', '0.1,0.12,0.03,1')).toBeCloseTo(0.06 / 0.22, 15);
  });

  it('is put in ascending order, and the order of the file is kept', () => {
    const { measurement, findings } = apply('kappa,S,sigma', '0.3,3,30', '0.1,1,10', '0.2,2,20');
    expect(Array.from(measurement?.order ?? [])).toEqual([1, 2, 0]);
    expect(Array.from(measurement?.S ?? [])).toEqual([1, 2, 3]);
    expect(Array.from(measurement?.sigma ?? [])).toEqual([10, 20, 30]);
    expect(placesOf(findings, 'note')).toEqual([['rows-reordered', 2]]);
  });

  it.each([
    ['kappa,S', ['0.1,1', '0,1'], ['kappa-not-positive', 3, 1]],
    ['k_long,k_short,S', ['0.1,1,1', '0.2,-1,1'], ['kappa-not-positive', 3, 2]],
    ['kappa,S', ['0.1,1', '2,1'], ['kappa-too-large', 3, 1]],
    ['k1,k2,k3,S', ['1,1,0.1,1', '1,0.5,0.1,1'], ['not-a-triangle', 3, 3]],
    ['kappa_lo,kappa_hi,S', ['0.1,0.2,1', '0.4,0.3,1'], ['edges-reversed', 3, 2]],
    ['kappa_lo,kappa_hi,S', ['0.1,0.2,1', '0.19,0.3,1'], ['bins-overlap', 3]],
    ['kappa_lo,kappa_hi,kappa,S', ['0.1,0.2,0.15,1', '0.2,0.3,0.31,1'], ['kappa-outside-bin', 3, 3]],
    ['kappa,S', ['0.1,1', '0.1,2'], ['duplicate-kappa', 3, 1]],
    ['kappa,S,sigma', ['0.1,1,1', '0.2,1,0'], ['sigma-not-positive', 3, 3]],
  ])('%s with %j is refused with line and column', (header, rows, place) => {
    const { findings } = apply(header, ...rows);
    expect(placesOf(findings, 'error')).toContainEqual(place);
    expect(findings.every(({ remedy }) => remedy !== undefined && remedy !== '')).toBe(true);
  });

  it('above 0.5 is not squeezed: a warning', () => {
    expect(placesOf(apply('kappa,S', '0.4,1', '0.6,1', '0.9,1').findings, 'warning')).toEqual([
      ['not-squeezed', 4, 1],
    ]);
  });

  it('may be shared by triangles of different size: a warning', () => {
    const { findings } = apply('k_long,k_short,S', '0.01,0.1,1', '0.02,0.2,1');
    expect(placesOf(findings, 'warning')).toEqual([['duplicate-kappa', 3, 1]]);
  });

  it('may have gaps between bins, which are noted, and edges that touch', () => {
    const { findings } = apply('kappa_lo,kappa_hi,S', '0.1,0.2,1', '0.2,0.3,1', '0.35,0.4,1');
    expect(placesOf(findings, 'note')).toEqual([['bin-gaps', 4]]);
    expect(placesOf(findings, 'error')).toEqual([]);
  });
});
