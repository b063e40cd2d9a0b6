import { fitState, isRunning } from '@/components/fit/fit-words';
import { StateWord } from '@/components/ui/state-word';
import { DataTable, type Column } from '@/components/ui/table';
import { capital } from '@/components/words/counts';
import { formatPercent, noValue } from '@/lib/figures/format';
import type { ComparedFit, Comparison } from '@/lib/schemas';
import { fieldsInWords } from './comparison-words';
import { Missing, ValueWithError } from './evidence';

type Count = Comparison['counts'][number];

function State({ count, fit }: { count: Count; fit: ComparedFit | null }) {
  if (!fit) return <Missing>{count.because ? 'can’t be fitted' : 'not fitted yet'}</Missing>;
  const state = fitState(fit.status);
  return (
    <>
      Fit {fit.number}: <StateWord kind={state.kind}>{state.word}</StateWord>
      {isRunning(fit.status) && fit.progress > 0 ? (
        <span className="font-numbers text-number text-ink-2"> {formatPercent(fit.progress)}</span>
      ) : null}
    </>
  );
}

/** Evidence and Bayes factors against the number of fields, of the notebook as it stands. */
export function CountTable({
  counts,
  fits,
}: {
  counts: Comparison['counts'];
  fits: ReadonlyMap<string, ComparedFit>;
}) {
  const columns: Column[] = [
    { key: 'fields', head: 'Fields' },
    { key: 'state', head: 'Fit', phone: 'drop' },
    { key: 'evidence', head: 'ln Z', numeric: true },
    { key: 'best', head: 'ln B, to the best', numeric: true },
    { key: 'none', head: 'to no field', numeric: true },
  ];
  const rows = counts.map((count) => ({ count, fit: (count.fit && fits.get(count.fit)) || null }));
  const lacking = rows.flatMap(({ count, fit }) => {
    if (count.because) return [{ count, why: `can’t be fitted: ${count.because}` }];
    return fit?.noEvidence && !isRunning(fit.status)
      ? [{ count, why: `no value of ln Z, because ${fit.noEvidence}.` }]
      : [];
  });
  return (
    <>
      <DataTable
        ruled
        label="Evidence against the number of fields"
        caption="Evidence against the number of fields. B is the ratio of evidences; errors are standard errors, with their degrees of freedom (dof), and no digit is finer than twice its error."
        columns={columns}
        rows={rows.map(({ count, fit }) => ({
          key: String(count.fields),
          cells: {
            fields: capital(fieldsInWords(count.fields)),
            state: <State count={count} fit={fit} />,
            evidence: fit?.logEvidence ? <ValueWithError dof of={fit.logEvidence} /> : noValue,
            best: count.lnBayesBest ? <ValueWithError of={count.lnBayesBest} /> : noValue,
            none: count.lnBayesNone ? <ValueWithError of={count.lnBayesNone} /> : noValue,
          },
        }))}
      />
      {lacking.length ? (
        <ul className="mt-1 list-none p-0 text-small text-ink-2">
          {lacking.map(({ count, why }) => (
            <li key={count.fields}>
              {capital(fieldsInWords(count.fields))}: {why}
            </li>
          ))}
        </ul>
      ) : null}
    </>
  );
}
