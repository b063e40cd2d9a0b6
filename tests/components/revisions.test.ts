import { describe, expect, it } from 'vitest';
import { templateSides, weightInWords } from '@/components/notebook/option-words';
import {
  differences,
  originInWords,
  revisionInWords,
  settledLines,
} from '@/components/notebook/revision-words';
import { conflictOf, standing } from '@/components/notebook/section-draft';
import { notebookFixture } from './fixtures';

describe('a section’s unsaved changes', () => {
  const own = { value: 'mine', base: 3, origin: 'old' };

  it('follow what is stored until something is changed', () => {
    expect(standing(null, 'stored', 7)).toEqual({
      value: 'stored',
      changed: false,
      base: 7,
      origin: 'stored',
      behind: false,
    });
  });

  it('are changes of the revision that stands as long as nobody else saved this section', () => {
    expect(standing(own, 'old', 7)).toMatchObject({ value: 'mine', changed: true, base: 7, behind: false });
  });

  it('stand still, and name their own revision, once somebody else has', () => {
    expect(standing(own, 'theirs', 7)).toMatchObject({ value: 'mine', changed: true, base: 3, behind: true });
  });

  it('are none where the other saved the same', () => {
    expect(standing(own, 'mine', 7)).toMatchObject({ changed: false, base: 7, behind: false });
  });

  it('meet what stands now, whichever way it was heard of first', () => {
    const told = notebookFixture({ revision: 7 });
    expect(conflictOf({ behind: false, base: 3 }, told, { conflict: null })).toBeNull();
    expect(conflictOf({ behind: true, base: 3 }, told, { conflict: null })).toEqual({
      base: 3,
      theirs: told,
    });
    const refusedBy = notebookFixture({ revision: 8 });
    const refused = { conflict: { base: 3, theirs: refusedBy } };
    expect(conflictOf({ behind: false, base: 3 }, told, refused)?.theirs).toBe(refusedBy);
    const later = notebookFixture({ revision: 9 });
    expect(conflictOf({ behind: false, base: 3 }, later, refused)?.theirs).toBe(later);
  });
});

describe('two revisions', () => {
  const before = notebookFixture({
    title: 'One',
    cuts: { kappaMax: 0.2 },
    template: { id: 'locked-squeezed', version: 1, options: { fields: 2, vertex: 1, background: [1, 2] } },
    priors: {
      mu1: { kind: 'uniform', lo: 0.2, hi: 8 },
      theta: { kind: 'isotropic' },
      c1: { kind: 'normal', mean: 0, sd: 3 },
    },
  });

  it('differ field by field, in words', () => {
    const after = {
      ...before,
      title: 'Two',
      cuts: {},
      template: { ...before.template, options: { fields: 3, vertex: 1, background: [1] } },
      priors: {
        mu1: { kind: 'log-uniform' as const, lo: 0.2, hi: 8 },
        theta12: { kind: 'isotropic' as const },
        c1: { kind: 'normal' as const, mean: 0, sd: 3 },
      },
    };
    expect(differences(before, after)).toEqual([
      { key: 'title', what: 'Title', before: 'One', after: 'Two' },
      { key: 'kappaMax', what: 'Highest κ', before: '0.2', after: 'no cut' },
      { key: 'template', what: 'Template', before: 'Two mixed fields', after: 'Three mixed fields' },
      { key: 'option fields', what: 'Number of fields', before: '2', after: '3' },
      { key: 'option background', what: 'Smooth background', before: 'κ and κ²', after: 'κ' },
      {
        key: 'prior mu1',
        what: 'Prior of mass 1',
        before: 'uniform 0.2 to 8',
        after: 'log-uniform 0.2 to 8',
      },
      { key: 'prior theta12', what: 'Prior of mixing angle 12', before: null, after: 'isotropic' },
      { key: 'prior theta', what: 'Prior of mixing angle', before: 'isotropic', after: null },
    ]);
    expect(differences(before, before)).toEqual([]);
  });

  it('say everything that a fit freezes: each prior and each option has its line', () => {
    const keys = settledLines(before).map(({ key }) => key);
    for (const name of Object.keys(before.priors)) expect(keys).toContain(`prior ${name}`);
    for (const name of Object.keys(before.template.options)) expect(keys).toContain(`option ${name}`);
  });

  it('are named by what they changed, or brought back', () => {
    const entry = { revision: 4, sections: ['template' as const, 'priors' as const], restoredFrom: null };
    expect(revisionInWords(entry)).toBe('template and priors');
    expect(revisionInWords({ ...entry, restoredFrom: 2 })).toBe('revision 2 brought back');
    expect(revisionInWords({ ...entry, revision: 1 })).toBe('the beginning');
    expect(originInWords({ number: 3, title: 'Beat', revision: 5, fit: null })).toBe(
      'Copied from notebook 3, “Beat”, revision 5',
    );
    expect(originInWords({ number: 3, title: 'Beat', revision: 5, fit: 2 })).toContain('as fit 2 froze it');
  });
});

describe('two templates beside each other', () => {
  it('are compared with every default in place: what was left out and what was said are one', () => {
    const sides = templateSides(
      { id: 'locked-squeezed', options: { fields: 2, vertex: 1, phases: 'locked' } },
      { id: 'locked-squeezed', options: { fields: 2 } },
    );
    expect(sides.filter(({ theirs, mine }) => theirs !== mine)).toEqual([]);
    const other = templateSides(
      { id: 'free-phase', options: { fields: 2 } },
      { id: 'locked-squeezed', options: { fields: 4 } },
    ).filter(({ theirs, mine }) => theirs !== mine);
    expect(other.map(({ key }) => key)).toEqual(['template', 'fields', 'amplitudes', 'vertex', 'phases']);
    expect(other.find(({ key }) => key === 'vertex')?.theirs).toBe('doesn’t apply');
  });
});

describe('the weight of a bin’s average', () => {
  it('is said where it isn’t uniform in ln κ and there are bins to average over', () => {
    expect(weightInWords({ binWeight: 2 }, true)).toBe('averaged over each bin with weight κ²');
    expect(weightInWords({ binWeight: -0.5 }, true)).toBe('averaged over each bin with weight κ^−0.5');
    expect(weightInWords({ binWeight: 0 }, true)).toBeNull();
    expect(weightInWords({ binWeight: 2 }, false)).toBeNull();
    expect(weightInWords({ binWeight: 2, binAverage: false }, true)).toBeNull();
  });
});

describe('bins left out', () => {
  const excluded = [
    { bin: 7, reason: 'beam not modelled.' },
    { bin: 9, reason: 'one mock field missing' },
  ];

  it('stand among what a revision settles, with their reasons', () => {
    const [before, after] = [notebookFixture({ cuts: {} }), notebookFixture({ cuts: { excluded } })];
    expect(differences(before, after)).toEqual([
      {
        key: 'excluded',
        what: 'Bins left out',
        before: 'none',
        after: 'two bins left out: 7 (beam not modelled) and 9 (one mock field missing)',
      },
    ]);
  });
});
