'use client';

import { Stamp } from '@/components/ui/num';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { shortName } from '@/components/words/people';
import type { FitStatus, FitSummary, Notebook } from '@/lib/schemas';
import { isOutdated } from '@/components/notebook/section-states';
import { fitState } from './fit-words';

/** Every fit of the notebook, the newest first; one of them is shown above and below. */
export function FitList({
  fits,
  notebook,
  shownId,
  shownStatus,
  onShow,
}: {
  fits: readonly FitSummary[];
  notebook: Notebook;
  shownId: string;
  /** Its status as it is now; the list is read less often. */
  shownStatus: FitStatus;
  onShow: (id: string) => void;
}) {
  return (
    <DataTable
      label="Fits of this notebook"
      columns={[
        { key: 'fit', head: 'Fit' },
        { key: 'state', head: 'State' },
        { key: 'revision', head: 'Revision' },
        { key: 'by', head: 'Started by', phone: 'drop' },
        { key: 'at', head: 'Started', phone: 'drop' },
      ]}
      rows={[...fits]
        .sort((a, b) => b.number - a.number)
        .map((fit) => {
          const state = fitState(fit.id === shownId ? shownStatus : fit.status);
          return {
            key: fit.id,
            cells: {
              fit:
                fit.id === shownId ? (
                  <b>Fit {fit.number}, shown here</b>
                ) : (
                  <button
                    type="button"
                    className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
                    onClick={() => onShow(fit.id)}
                  >
                    Show fit {fit.number}
                  </button>
                ),
              state: <StateWord kind={state.kind}>{state.word}</StateWord>,
              revision: isOutdated(fit.revision, notebook) ? (
                <StateWord kind="old">of revision {fit.revision}</StateWord>
              ) : (
                String(fit.revision)
              ),
              by: shortName(fit.startedBy),
              at: <Stamp at={fit.createdAt} />,
            },
          };
        })}
    />
  );
}
