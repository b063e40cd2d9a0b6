import type { LogKind } from '@/lib/schemas';

export interface LogFilter {
  person?: string;
  kind?: LogKind;
}

/** The filter as the end of an address; `before` names the page. */
export function filterQuery(filter: LogFilter, before?: string): string {
  const query = new URLSearchParams();
  if (filter.person) query.set('person', filter.person);
  if (filter.kind) query.set('kind', filter.kind);
  if (before) query.set('before', before);
  const written = query.toString();
  return written ? `?${written}` : '';
}
