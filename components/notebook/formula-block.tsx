import { Formula } from '@/components/ui/formula';
import { Opened } from '@/components/ui/opened';
import type { TemplateFormula } from '@/lib/templates';

/** A template's formula as evaluated, with what its symbols stand for folded below. */
export function FormulaBlock({ formula }: { formula: TemplateFormula }) {
  return (
    <>
      <Formula tex={formula.wide} label="Formula of the template" />
      {formula.definitions.length ? (
        <Opened words="What the symbols stand for">
          {formula.definitions.map((tex, i) => (
            <Formula key={i} tex={tex} label={`Definition ${i + 1}`} />
          ))}
        </Opened>
      ) : null}
    </>
  );
}
