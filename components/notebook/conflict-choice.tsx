import type { ReactNode } from 'react';
import { Button, Buttons } from '@/components/ui/button';
import { Message } from '@/components/ui/message';
import { DataTable } from '@/components/ui/table';
import { clockTime } from '@/components/words/dates';
import { shortName } from '@/components/words/people';
import type { Conflict, SectionSave } from './use-notebook';

export interface Side {
  key: string;
  what: ReactNode;
  theirs: string;
  mine: string;
}

/** Both sides of an edit that met another one, and the choice between them. */
export function ConflictChoice({
  conflict,
  sides,
  section,
  onMine,
  onTheirs,
}: {
  conflict: Conflict;
  /** What differs, in words. */
  sides: readonly Side[];
  section: SectionSave;
  onMine: (base: number) => void;
  onTheirs: () => void;
}) {
  const { theirs, base } = conflict;
  const last = theirs.record.find(({ revision }) => revision === theirs.revision);
  const differing = sides.filter((side) => side.theirs !== side.mine);
  return (
    <Message
      level="warning"
      title={`Revision ${theirs.revision} was saved${last ? ` by ${shortName(last.by)} at ${clockTime(last.at)}` : ''} while you edited revision ${base}`}
    >
      <p>
        Nothing of yours is lost and nothing of theirs was changed. One of the two can stand in this section.
      </p>
      {differing.length ? (
        <DataTable
          label="Both sides"
          columns={[
            { key: 'what', head: '' },
            { key: 'theirs', head: `Revision ${theirs.revision}` },
            { key: 'mine', head: 'Yours' },
          ]}
          rows={differing.map(({ key, what, theirs: other, mine }) => ({
            key,
            cells: { what, theirs: other, mine },
          }))}
        />
      ) : (
        <p>What you changed here they left as it was: yours can stand beside theirs.</p>
      )}
      <Buttons>
        <Button
          onClick={() => onMine(theirs.revision)}
          reason={section.saving ? 'It is being saved.' : undefined}
        >
          Save yours as revision {theirs.revision + 1}
        </Button>
        <Button onClick={onTheirs}>Take revision {theirs.revision}</Button>
      </Buttons>
    </Message>
  );
}
