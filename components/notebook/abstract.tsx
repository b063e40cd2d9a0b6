import { fitPredicate } from '@/components/fit/fit-words';
import { judged, meetsGate } from '@/components/fit/quantities';
import { capital, counted, inWords, listed } from '@/components/words/counts';
import { KappaRange } from '@/components/words/kappa';
import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { templateInWords } from './template-words';

const powers: Record<string, string> = {
  '-1': 'κ⁻¹',
  '0': 'a constant',
  '1': 'κ',
  '2': 'κ²',
  '3': 'κ³',
  '4': 'κ⁴',
};

/** "background in κ and κ²" */
function backgroundInWords(options: Record<string, unknown>): string {
  const given = Array.isArray(options.background) ? options.background.map(String) : [];
  return given.length
    ? `background in ${listed(given.map((power) => powers[power] ?? power))}`
    : 'no background';
}

/** What the last fit came to, with its gate while that isn't met. */
export function fitInWords(fit: Fit | null): string {
  if (!fit) return 'No fit yet.';
  const all = judged(fit.diagnostics);
  const met = all.filter((each) => meetsGate(each, fit.gate.target)).length;
  const gate =
    all.length && met < all.length && fit.progress.draws > 0
      ? `; ${met === 0 ? 'none' : inWords(met)} of ${inWords(all.length)} quantities ${met === 1 ? 'meets' : 'meet'} the gate`
      : '';
  return `Fit ${fit.number} ${fitPredicate(fit.status)}${gate}.`;
}

/** The notebook in two sentences, made from its state. */
export function Abstract({
  notebook,
  measurement,
  fit,
}: {
  notebook: Notebook;
  measurement: Measurement;
  fit: Fit | null;
}) {
  const { cuts, bins, template } = notebook;
  const fields = typeof template.options.fields === 'number' ? template.options.fields : 0;
  return (
    <>
      {capital(counted(bins.kept, 'bin'))} with{' '}
      <KappaRange lo={cuts.kappaMin ?? measurement.kappaMin} hi={cuts.kappaMax ?? measurement.kappaMax} />;{' '}
      {templateInWords(template.id, fields)}
      {template.id === 'locked-squeezed' && template.options.phases === 'free'
        ? ' with free phases'
        : ''}; {backgroundInWords(template.options)}. {fitInWords(fit)}
    </>
  );
}
