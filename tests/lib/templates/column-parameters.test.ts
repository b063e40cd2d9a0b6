import { describe, expect, it } from 'vitest';
import { columnNameFault, findTemplate, ofPart, partOfName, templateCatalogue } from '@/lib/templates';

describe('names of columns', () => {
  it('never are those of a parameter or a derived quantity, whatever the template and its options', () => {
    const every = [
      {},
      { fields: 2 },
      { fields: 3 },
      { fields: 4 },
      { fields: 4, amplitudes: 'amplitude-phase' },
      { fields: 4, phases: 'free' },
      { fields: 2, vertex: 'mixture' },
      { fields: ['light', 'heavy'] },
      { background: [-1, 0, 1, 2, 3, 4] },
    ];
    let looked = 0;
    for (const { id } of templateCatalogue()) {
      for (const options of every) {
        const template = findTemplate(id);
        const settled = (() => {
          try {
            return template.normaliseOptions(options);
          } catch {
            return null;
          }
        })();
        if (!settled) continue;
        for (const { name } of [...template.parameters(settled), ...template.derived(settled)]) {
          expect(columnNameFault(name), name).toMatch(/^is the name of a parameter/);
          looked += 1;
        }
      }
    }
    expect(looked).toBeGreaterThan(200);
  });

  it('are letters, digits and underscores that every format of samples keeps', () => {
    expect(['gravity', 'lateTime', 'sys_2', 'd'].map(columnNameFault)).toEqual([null, null, null, null]);
    for (const name of ['', '2nd', 'late time', 'κ', 'a-b', 'x'.repeat(33)]) {
      expect(columnNameFault(name)).toMatch(/^is no name/);
    }
    for (const name of ['replica', 'log_prior', 'c3', 'cm1', 'mu1', 'M2_11', 'm2_over_H']) {
      expect(columnNameFault(name)).toMatch(/^is the name of/);
    }
  });

  it('end with the number of the measurement where there are several', () => {
    const [, , , c1] = findTemplate('free-phase').parameters({ background: [1] });
    expect(ofPart(c1, 1, 'north')).toMatchObject({ name: 'c1_2', label: 'background κ, north' });
    expect(partOfName('c1_2')).toEqual({ name: 'c1', part: 1 });
    expect(partOfName('cm1')).toEqual({ name: 'cm1', part: 0 });
  });
});
