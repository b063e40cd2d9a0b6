import { quantileOfSorted, sortedFinite } from '@/lib/figures/quantiles';

/** Milliseconds of one kind of answer, collected while a load runs. */
export class Measure {
  private readonly values: number[] = [];
  private failed = 0;

  add(milliseconds: number): void {
    this.values.push(milliseconds);
  }

  /** An answer that isn't what was asked for; it has no time of its own. */
  fail(): void {
    this.failed += 1;
  }

  get summary(): Summary {
    const sorted = sortedFinite(this.values);
    const at = (p: number) => (sorted.length ? Math.round(quantileOfSorted(sorted, p)) : null);
    return {
      count: sorted.length,
      failed: this.failed,
      p50: at(0.5),
      p95: at(0.95),
      p99: at(0.99),
      max: at(1),
    };
  }
}

export interface Summary {
  count: number;
  failed: number;
  /** Milliseconds; null without any answer. */
  p50: number | null;
  p95: number | null;
  p99: number | null;
  max: number | null;
}

/** The measures of a load, by what was asked for. */
export const newMeasures = () => ({
  page: new Measure(),
  fit: new Measure(),
  draws: new Measure(),
  notebook: new Measure(),
  lag: new Measure(),
});
export type Measures = ReturnType<typeof newMeasures>;

const cell = (value: number | null) => (value === null ? '–' : String(value)).padStart(8);

/** The summaries as a table for the terminal, in milliseconds. */
export function tableOf(summaries: Readonly<Record<string, Summary>>): string {
  const head = ['count', 'failed', 'p50', 'p95', 'p99', 'max'].map((name) => name.padStart(8)).join('');
  const width = Math.max(...Object.keys(summaries).map((name) => name.length)) + 2;
  const rows = Object.entries(summaries).map(
    ([name, { count, failed, p50, p95, p99, max }]) =>
      name.padEnd(width) + [count, failed, p50, p95, p99, max].map(cell).join(''),
  );
  return [`${'milliseconds'.padEnd(width)}${head}`, ...rows].join('\n');
}
