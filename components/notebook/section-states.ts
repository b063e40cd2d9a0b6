import type { ContentsEntry } from '@/components/ui/contents';
import type { State } from '@/components/ui/state-word';
import { fitState } from '@/components/fit/fit-words';
import type { Fit, FitStatus, Notebook } from '@/lib/schemas';
import { settingSections } from '@/lib/schemas/notebook-sections';
import { sectionIds, sectionNumber, sectionTitle, type SectionId } from './sections';

/** A form that is being changed is being set; what is saved is settled. */
export function sectionState(changed: boolean, notebook: Pick<Notebook, 'may'>): State {
  return changed && notebook.may.includes('notebook.edit')
    ? { kind: 'open', word: 'being set' }
    : { kind: 'ok', word: 'settled' };
}

/**
 * Which revision settled what each one stands for. One that brings another back stands for what that one did, unless the
 * measurement changed in between: it may rest on another version then.
 */
function settledBy({ record }: Pick<Notebook, 'record'>): Map<number, number> {
  const settled = new Map<number, number>();
  let last = 1;
  for (const { revision, sections, restoredFrom } of record) {
    if (sections.some((section) => settingSections.includes(section))) {
      const between = record.filter(
        (each) => each.revision > (restoredFrom ?? 0) && each.revision <= revision,
      );
      const sameNumbers = between.every((each) => !each.sections.includes('measurement'));
      last = (restoredFrom !== null && sameNumbers ? settled.get(restoredFrom) : undefined) ?? revision;
    }
    settled.set(revision, last);
  }
  return settled;
}

/** True where the notebook's settings aren't those any more that a fit of this revision froze. */
export function isOutdated(revision: number, notebook: Pick<Notebook, 'record'>): boolean {
  const settled = settledBy(notebook);
  const standing = notebook.record.at(-1)?.revision ?? revision;
  return settled.get(revision) !== settled.get(standing);
}

interface SomeFit {
  number: number;
  status: FitStatus;
  revision: number;
}

export function chainsState(fit: SomeFit | null, notebook: Pick<Notebook, 'record'>): State {
  if (!fit) return { kind: 'open', word: 'not begun' };
  const running = fitState(fit.status).kind === 'run';
  if (!running && isOutdated(fit.revision, notebook))
    return { kind: 'old', word: `of revision ${fit.revision}` };
  return fitState(fit.status);
}

export function posteriorState(
  fit: (SomeFit & Pick<Fit, 'progress'>) | null,
  notebook: Pick<Notebook, 'record' | 'blind'>,
): State {
  if (notebook.blind) return { kind: 'blind', word: 'blind' };
  if (!fit || fit.progress.draws === 0) return { kind: 'wait', word: `waits for ${sectionNumber('chains')}` };
  if (isOutdated(fit.revision, notebook)) return { kind: 'old', word: `of revision ${fit.revision}` };
  return fit.status === 'converged'
    ? { kind: 'ok', word: `of fit ${fit.number}` }
    : { kind: 'open', word: `of fit ${fit.number}, so far` };
}

export type SectionStates = Record<SectionId, State>;

/** Sections that are never called for: a scan or a check may be left out, and words are read or written last. */
const uncalled: readonly SectionId[] = ['scan', 'comparison', 'checks', 'statement'];

/** Where the work stands: the chains while they run, else the first section that isn't settled, else the posterior. */
export function currentSection(states: SectionStates): SectionId {
  if (states.chains.kind === 'run' || states.chains.kind === 'wait') return 'chains';
  return sectionIds.find((id) => !uncalled.includes(id) && states[id].kind !== 'ok') ?? 'posterior';
}

export function contentsEntries(states: SectionStates): ContentsEntry[] {
  return sectionIds.map((id) => ({
    href: `#${id}`,
    number: sectionNumber(id),
    title: sectionTitle(id),
    state: states[id],
  }));
}
