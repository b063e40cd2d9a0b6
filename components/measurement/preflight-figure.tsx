import { PointsFigure } from '@/components/figures/points-figure';
import { Sym } from '@/components/ui/sym';
import { listed } from '@/components/words/counts';
import { marksOf, type PreflightView } from './preflight-view';

/** Whose errors the bars are. */
function errorsSentence(view: PreflightView): string {
  switch (view.covarianceSource) {
    case 'mocks':
      return 'with standard errors from the mocks';
    case 'file':
      return 'with standard errors from the covariance';
    case 'errors':
      return 'with the standard errors of the file';
    default:
      return view.points?.sigma.some(Number.isFinite)
        ? 'with the standard errors of the file'
        : 'without errors';
  }
}

/** The points as parsed, with what the checks marked. */
export function PreflightFigure({ view }: { view: PreflightView }) {
  if (!view.points) return null;
  const { kappa, lo, hi, S, sigma } = view.points;
  const { flags, gaps, missing } = marksOf(view);
  const framed = flags.length ? `; framed, ${listed(flags.map(({ word }) => word))}` : '';
  const dashed = missing.length
    ? `; dashed, the ${missing.length === 1 ? 'place of line' : 'places of lines'} ${listed(missing.map(String))}`
    : '';
  return (
    <PointsFigure
      number={1}
      label="Points as parsed"
      fileName="points-as-parsed"
      points={{ kappa, value: S, error: sigma, lo: lo ?? undefined, hi: hi ?? undefined, flags, gaps }}
      caption={
        <>
          The {kappa.length} points against <Sym base="κ" /> as parsed, {errorsSentence(view)}
          {framed}
          {dashed}.
        </>
      }
    />
  );
}
