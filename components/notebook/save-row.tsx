import { Button, Buttons } from '@/components/ui/button';
import type { Draft } from './section-draft';

/** Saves a section's changes as the next revision, or drops them. */
export function SaveRow<T>({
  draft,
  revision,
  saving,
  fault,
  onSave,
}: {
  draft: Draft<T>;
  /** The revision that stands. */
  revision: number;
  saving: boolean;
  /** Why the changes can't be saved as they are. */
  fault?: string;
  onSave: () => void;
}) {
  const reason = !draft.changed ? `As saved in revision ${revision}.` : saving ? 'It is being saved.' : fault;
  return (
    <Buttons>
      <Button onClick={onSave} reason={reason}>
        Save as revision {draft.base + 1}
      </Button>
      {draft.changed ? <Button onClick={draft.reset}>Back to revision {revision}</Button> : null}
    </Buttons>
  );
}
