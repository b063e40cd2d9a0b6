import { Formula } from '@/components/ui/formula';
import type { TemplateFormula } from '@/lib/templates';

/** A template's formula as evaluated, with what its symbols stand for folded below. */
export function FormulaBlock({ formula }: { formula: TemplateFormula }) {
  return (
    <>
      <Formula tex={formula.wide} label="Formula of the template" />
      {formula.definitions.length ? (
        <details className="mb-2">
          <summary className="inline-flex min-h-target items-center font-controls text-note text-action underline decoration-1 underline-offset-[3px]">
            What the symbols stand for
          </summary>
          {formula.definitions.map((tex, i) => (
            <Formula key={i} tex={tex} label={`Definition ${i + 1}`} />
          ))}
        </details>
      ) : null}
    </>
  );
}
