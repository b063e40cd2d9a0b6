import { inWords } from '@/components/words/counts';

/** How long a link lives, as the form says it: "within 15 minutes", "within 24 hours". */
export function lifetimeInWords(seconds: number): string {
  if (seconds < 3600) return `within ${inWords(Math.round(seconds / 60))} minutes`;
  const hours = Math.round(seconds / 3600);
  return `within ${hours === 1 ? 'an hour' : `${inWords(hours)} hours`}`;
}
