'use client';

import { Stamp } from '@/components/ui/num';
import { Subheading } from '@/components/ui/section';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { shortName } from '@/components/words/people';
import { formatCount } from '@/lib/figures/format';
import type { CheckListed } from '@/lib/schemas';
import { isPending } from './check-words';

function Outcome({ check }: { check: CheckListed }) {
  if (isPending(check)) return <StateWord kind="run">under way</StateWord>;
  if (check.status === 'failed') return <StateWord kind="warn">failed</StateWord>;
  if (check.status === 'stopped') return <StateWord kind="open">stopped</StateWord>;
  return check.calibrated ? (
    <StateWord kind="ok">calibrated</StateWord>
  ) : (
    <StateWord kind="warn">not calibrated</StateWord>
  );
}

/** Every check of the notebook; one of them is shown above. */
export function CheckList({
  checks,
  shown,
  onShow,
}: {
  checks: readonly CheckListed[];
  shown: string;
  onShow: (id: string) => void;
}) {
  return (
    <>
      <Subheading>All checks of this notebook</Subheading>
      <DataTable
        ruled
        phoneColumns="1fr auto"
        columns={[
          { key: 'check', head: 'Check', phone: { area: '1 / 1' } },
          {
            key: 'revision',
            head: 'revision',
            numeric: true,
            phone: { area: '2 / 1', label: 'revision' },
          },
          {
            key: 'datasets',
            head: 'data sets',
            numeric: true,
            phone: { area: '3 / 1', label: 'data sets' },
          },
          { key: 'draws', head: 'draws', numeric: true, phone: 'drop' },
          { key: 'seed', head: 'seed', numeric: true, phone: 'drop' },
          { key: 'outcome', head: 'Outcome', phone: { area: '1 / 2', end: true } },
        ]}
        rows={[...checks].reverse().map((check) => ({
          key: check.id,
          cells: {
            check: (
              <>
                {check.id === shown ? (
                  <b>Check {check.number}, shown</b>
                ) : (
                  <button
                    type="button"
                    className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
                    onClick={() => onShow(check.id)}
                  >
                    Show check {check.number}
                  </button>
                )}
                <span className="block font-controls text-note text-ink-2">
                  {shortName(check.startedBy)}, <Stamp at={check.createdAt} short />
                </span>
              </>
            ),
            revision: check.revision,
            datasets: formatCount(check.request.datasets),
            draws: formatCount(check.request.draws),
            seed: formatCount(check.request.seed),
            outcome: <Outcome check={check} />,
          },
        }))}
      />
    </>
  );
}
