import { Record } from '@/components/ui/record';
import { shortName } from '@/components/words/people';
import type { Notebook, NotebookSection } from '@/lib/schemas';

/** The last revision that touched a section; the first touched all. */
export function lastTouched(notebook: Pick<Notebook, 'record'>, section: NotebookSection) {
  return notebook.record
    .filter(({ sections }) => sections.includes(section))
    .reduce<Notebook['record'][number] | null>(
      (last, entry) => (last && last.revision > entry.revision ? last : entry),
      null,
    );
}

/** Who settled a section and when, in the margin. */
export function SectionRecord({ notebook, section }: { notebook: Notebook; section: NotebookSection }) {
  const last = lastTouched(notebook, section);
  if (!last) return null;
  return (
    <Record at={last.at}>
      Settled by <b>{shortName(last.by)}</b> in revision {last.revision}
    </Record>
  );
}
