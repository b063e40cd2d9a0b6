import { describe, expect, it } from 'vitest';
import { returnPath } from '@/lib/http/return-path';

describe('the way back after signing in', () => {
  it('is a path of ours with its query', () => {
    expect(returnPath('/notebooks/x?fit=2#chains')).toBe('/notebooks/x?fit=2#chains');
  });

  it.each([
    'https://elsewhere.example/',
    '//elsewhere.example',
    '/\\elsewhere.example',
    'javascript:alert(1)',
    '',
  ])('never leads elsewhere: %s', (given) => {
    expect(returnPath(given)).toBe('/');
  });

  it('is the first page where nothing was given, or more than one', () => {
    expect(returnPath(undefined)).toBe('/');
    expect(returnPath(['/a', '/b'])).toBe('/');
  });
});
