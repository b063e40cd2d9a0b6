import type { Notebook } from '@/lib/schemas';
import { counted, listed } from './counts';

type Excluded = readonly { bin: number; reason: string }[];

/** A sentence's own end goes where the reason stands inside another one. */
const inside = (reason: string): string => reason.replace(/[.;,\s]+$/, '');

/** "two bins left out: 7 (beam not modelled) and 9 (one mock field missing)"; empty for none. */
export function leftOutInWords(excluded: Excluded): string {
  if (excluded.length === 0) return '';
  const each = excluded.map(({ bin, reason }) => `${bin} (${inside(reason)})`);
  return `${counted(excluded.length, 'bin')} left out: ${listed(each)}`;
}

/** "without bins 7 and 9"; empty for none. */
export function withoutBins({ excluded = [] }: Pick<Notebook['cuts'], 'excluded'>): string {
  if (excluded.length === 0) return '';
  return `without ${excluded.length === 1 ? 'bin' : 'bins'} ${listed(excluded.map(({ bin }) => `${bin}`))}`;
}
