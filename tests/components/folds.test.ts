import { describe, expect, it } from 'vitest';
import { foldOf, parseFolds } from '@/components/notebook/use-folds';

describe('what a reader folded', () => {
  it('is read back section by section; anything else that was stored is passed over', () => {
    const stored = { priors: 'folded', chains: 'open', elsewhere: 'folded', template: 'ajar' };
    expect(parseFolds(JSON.stringify(stored))).toEqual({ priors: 'folded', chains: 'open' });
    for (const nothing of [null, '', '[', '3', 'null']) expect(parseFolds(nothing)).toEqual({});
  });
});

describe('a section', () => {
  it('that nobody touched is open on a wide screen, and on a phone if it is the current one', () => {
    expect(foldOf('priors', 'chains', {}, false)).toBe('open');
    expect(foldOf('priors', 'chains', {}, true)).toBe('folded');
    expect(foldOf('chains', 'chains', {}, true)).toBe('open');
  });

  it('stands as the reader left it, on any screen', () => {
    expect(foldOf('priors', 'chains', { priors: 'open' }, true)).toBe('open');
    expect(foldOf('chains', 'chains', { chains: 'folded' }, false)).toBe('folded');
  });

  it('is left to the style sheet until the browser has said what it remembers', () => {
    expect(foldOf('chains', 'chains', null, false)).toBe('open');
    expect(foldOf('priors', 'chains', null, false)).toBe('phone');
  });
});
