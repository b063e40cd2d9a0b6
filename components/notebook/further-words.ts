import { counted, plain } from '@/components/words/counts';
import { leftOutInWords } from '@/components/words/left-out';
import type { Notebook } from '@/lib/schemas';

/** Most measurements of one notebook, as the server has it. */
export const mostMeasurements = 4;

/** A further measurement as a PATCH names it. */
export interface FurtherChoice {
  measurement: string;
  version: number;
  cuts: Notebook['cuts'];
}

/** What stands in a notebook, as a PATCH would name it. */
export const furtherOf = ({ also }: Pick<Notebook, 'also'>): FurtherChoice[] =>
  also.map(({ id, version, cuts }) => ({ measurement: id, version, cuts }));

/** "κ from 0.01 to 0.1, bin 3 left out"; "no cut" */
export function cutInWords({ kappaMin, kappaMax, excluded = [] }: Notebook['cuts']): string {
  const ends = [
    ...(kappaMin === undefined ? [] : [`from ${plain(kappaMin, 6)}`]),
    ...(kappaMax === undefined ? [] : [`to ${plain(kappaMax, 6)}`]),
  ];
  const words = [
    ...(ends.length ? [`κ ${ends.join(' ')}`] : []),
    ...(excluded.length ? [leftOutInWords(excluded)] : []),
  ];
  return words.join(', ') || 'no cut';
}

/** ", with two others whose mocks are the same skies" */
export function togetherInWords(count: number, sharedMocks: boolean): string {
  if (count === 0) return '';
  return `, with ${count === 1 ? 'another measurement' : counted(count, 'other measurement')}${sharedMocks ? ' of the same mock skies' : ''}`;
}
