'use client';

import dynamic from 'next/dynamic';
import type { ReactNode } from 'react';
import type { TemplateFormula } from '@/lib/templates';

/** The typesetter is large, and comes only when a formula is wanted that the server didn't draw. */
const FormulaBlock = dynamic(() => import('./formula-block').then((m) => m.FormulaBlock), {
  ssr: false,
  loading: () => <div className="formula" />,
});

/** A formula that the server has typeset, by its TeX. */
export interface DrawnFormula {
  tex: string;
  node: ReactNode;
}

/** The formula of the template that is being chosen: the server's drawing where it is that one. */
export function LiveFormula({ formula, drawn }: { formula: TemplateFormula; drawn: DrawnFormula }) {
  return formula.wide === drawn.tex ? drawn.node : <FormulaBlock formula={formula} />;
}
