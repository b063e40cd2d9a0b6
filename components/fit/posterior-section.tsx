'use client';

import { WithheldFigure } from '@/components/figures/withheld-figure';
import { Caution } from '@/components/ui/caution';
import { Record } from '@/components/ui/record';
import { Section } from '@/components/ui/section';
import { shortName } from '@/components/words/people';
import { posteriorFoldSentence } from '@/components/notebook/fold-sentences';
import { posteriorState } from '@/components/notebook/section-states';
import { templateInWords } from '@/components/notebook/template-words';
import type { SectionFold } from '@/components/notebook/use-folds';
import type { Fit, Measurement, Notebook } from '@/lib/schemas';
import { fieldCount } from '@/lib/templates';
import type { FigureDraws } from './draws';
import { MarginalTable } from './marginal-table';
import { ModesTable } from './modes-table';
import { Corner } from './posterior-corner';
import { BestFit, posteriorSentence } from './posterior-figures';
import type { Quantity } from './quantities';
import { SampleDownloads } from './sample-downloads';
import { figureNumber, sectionNumber } from '@/components/notebook/sections';

export interface PosteriorSectionProps {
  notebook: Notebook;
  measurement: Measurement;
  /** Further measurements of the fit; null where the notebook has others by now. */
  further: readonly Measurement[] | null;
  fit: Fit | null;
  draws: FigureDraws | null;
  quantities: ReadonlyMap<string, Quantity>;
  fold: SectionFold;
}

/** What limits the numbers above it. */
function Cautions({ fit }: { fit: Fit }) {
  const { template } = fit.snapshot;
  const fields = fieldCount(template.options.fields);
  const locked = template.id.startsWith('locked-') || template.id === 'light';
  return (
    <>
      <Caution>
        R-hat can’t see a mode that no chain visited. That every quantity meets the gate is needed, not
        enough.
      </Caution>
      {locked && fields >= 2 ? (
        <Caution>
          Single exchange sees the weights alone: signs of the mixing elements, and rotations among the fields
          that don’t couple, stay open. Degenerate masses give only the sum of their weights.
        </Caution>
      ) : null}
      {template.id === 'free-phase' ? (
        <Caution>
          Amplitudes of {templateInWords(template.id, fields)} contain what the interaction gives each mass,
          so they are no mixing weights.
        </Caution>
      ) : null}
      <Caution>
        <i className="sym">S</i> is the primordial shape. Bispectra of galaxies or the CMB need transfer,
        window and late-time terms of their own, which this template doesn’t supply.
      </Caution>
      <Caution>A good χ² doesn’t show that the background is sufficient.</Caution>
    </>
  );
}

/** What the draws say. */
export function PosteriorSection(props: PosteriorSectionProps) {
  const { notebook, measurement, further, fit, draws, quantities, fold } = props;
  const state = posteriorState(fit, notebook);
  const some = fit !== null && fit.progress.draws > 0;
  const sameVersion = fit?.snapshot.measurementVersion === measurement.version;
  const truth = sameVersion ? measurement.truth : null;
  return (
    <Section
      id="posterior"
      number={sectionNumber('posterior')}
      title="Posterior"
      state={state}
      fold={{ ...fold, sentence: posteriorFoldSentence(fit, notebook.blind) }}
      margin={
        some ? (
          <Record at={fit.endedAt ?? undefined}>
            Fit {fit.number}, revision {fit.revision}, by <b>{shortName(fit.startedBy)}</b>
          </Record>
        ) : null
      }
    >
      {notebook.blind ? (
        <>
          <p>
            Masses, amplitudes and every figure of data against model are withheld until the measurement is
            unblinded.
          </p>
          <WithheldFigure
            number={figureNumber('corner')}
            label="Posterior"
            caption="Posterior, after unblinding."
          />
        </>
      ) : !some ? (
        <p>
          Waits for section {sectionNumber('chains')}: the posterior stands here as soon as a fit has kept its
          first draws, and moves while it samples.
        </p>
      ) : (
        <>
          <p>{posteriorSentence(fit)}</p>
          {draws ? (
            <Corner
              key={fit.id}
              fit={fit}
              draws={draws}
              quantities={quantities}
              number={figureNumber('corner')}
              truth={truth}
            />
          ) : null}
          {fit.diagnostics.length ? (
            <MarginalTable fit={fit} quantities={quantities} number={2} truth={truth} />
          ) : null}
          <ModesTable fit={fit} />
          {draws && sameVersion && further === null ? (
            <p className="text-ink-2">
              The fit rests on other measurements than the notebook now, so its predictions aren’t drawn here.
            </p>
          ) : null}
          {draws && sameVersion && further ? (
            <BestFit
              fit={fit}
              draws={draws}
              measurement={measurement}
              further={further}
              number={figureNumber('best-fit')}
            />
          ) : null}
          <SampleDownloads fit={fit} />
          <Cautions fit={fit} />
        </>
      )}
    </Section>
  );
}
