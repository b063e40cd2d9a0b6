import { fitState } from '@/components/fit/fit-words';
import { templateTitle } from '@/components/notebook/template-words';
import { StateWord } from '@/components/ui/state-word';
import { DataTable } from '@/components/ui/table';
import { noValue } from '@/lib/figures/format';
import type { ComparedFit, Comparison } from '@/lib/schemas';
import { dataInWords, evidenceKindInWords } from './comparison-words';
import { Missing, ValueWithError } from './evidence';

type FitSet = Comparison['sets'][number];

function Gate({ fit }: { fit: ComparedFit }) {
  if (fit.gate.met) return <StateWord kind="ok">met</StateWord>;
  const [reason] = fit.gate.reasons;
  return (
    <span title={fit.gate.reasons.join(' ')}>
      <StateWord kind="open">not met</StateWord>
      {reason ? <span className="sr-only">: {reason}</span> : null}
    </span>
  );
}

/** One set of fits whose evidences may be compared, side by side; each is shown on request. */
export function FitsTable({ set, onShow }: { set: FitSet; onShow: (id: string) => void }) {
  const kind = evidenceKindInWords(set.evidenceKind);
  return (
    <DataTable
      ruled
      label={set.standing ? 'Fits that may be compared' : `Fits set apart, because ${set.apart ?? ''}`}
      caption={
        set.standing
          ? `Fits of the same numbers, bins and likelihood as the notebook’s (evidences: ${kind}); Bayes factors to the best of them.`
          : `Set apart, because ${set.apart ?? ''} (evidences: ${kind}); Bayes factors to the best of these alone.`
      }
      columns={[
        { key: 'fit', head: 'Fit' },
        { key: 'template', head: 'Template' },
        { key: 'state', head: 'State', phone: 'drop' },
        { key: 'gate', head: 'Gate', phone: 'drop' },
        { key: 'evidence', head: 'ln Z', numeric: true },
        { key: 'best', head: 'ln B', numeric: true },
      ]}
      rows={[...set.fits].reverse().map((fit) => {
        const state = fitState(fit.status);
        return {
          key: fit.id,
          cells: {
            fit: (
              <button
                type="button"
                className="min-h-target text-action underline decoration-1 underline-offset-[3px]"
                aria-label={`Show fit ${fit.number}`}
                onClick={() => onShow(fit.id)}
              >
                {fit.number}
              </button>
            ),
            template: (
              <>
                {templateTitle(fit.template.id, fit.fields)}
                <span className="block font-controls text-note text-ink-2">{dataInWords(fit)}</span>
              </>
            ),
            state: <StateWord kind={state.kind}>{state.word}</StateWord>,
            gate: <Gate fit={fit} />,
            evidence: fit.logEvidence ? (
              <ValueWithError of={fit.logEvidence} />
            ) : (
              <Missing>no value, because {fit.noEvidence ?? 'there is none yet'}</Missing>
            ),
            best: fit.lnBayesBest ? <ValueWithError of={fit.lnBayesBest} /> : noValue,
          },
        };
      })}
    />
  );
}
