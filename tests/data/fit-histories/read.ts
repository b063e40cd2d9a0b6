import { readdirSync, readFileSync } from 'node:fs';

/** How a fit converged: at each look, for each judged quantity, R-hat and the smaller of bulk and tail effective size. */
export interface FitHistory {
  name: string;
  replicas: number;
  warmup: number;
  quantities: string[];
  looks: { kept: number; rhat: (number | null)[]; ess: (number | null)[]; apart: boolean }[];
}

/** The recorded histories, in the order of their names. */
export function fitHistories(): FitHistory[] {
  const folder = new URL('./', import.meta.url);
  return readdirSync(folder)
    .filter((name) => name.endsWith('.json'))
    .sort()
    .map((name) => JSON.parse(readFileSync(new URL(name, folder), 'utf8')) as FitHistory);
}
