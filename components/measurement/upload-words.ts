import type { State } from '@/components/ui/state-word';
import { capital, counted, inWords, listed } from '@/components/words/counts';
import { levelCounts, type PreflightView } from './preflight-view';

/** "One error, two warnings, eight checks passed. The error stops the upload." */
export function preflightSentence(view: PreflightView): string {
  const { errors, warnings, notes, passed } = levelCounts(view.checks);
  const parts = [
    errors ? counted(errors, 'error') : '',
    warnings ? counted(warnings, 'warning') : '',
    notes ? counted(notes, 'note') : '',
    `${passed === 0 ? 'no' : inWords(passed)} ${passed === 1 ? 'check' : 'checks'} passed`,
  ].filter(Boolean);
  const verdict = errors
    ? `The ${errors === 1 ? 'error stops' : 'errors stop'} the upload.`
    : warnings
      ? `Nothing stops the upload; ${warnings === 1 ? 'the warning goes' : 'the warnings go'} with the measurement.`
      : 'Nothing stops the upload.';
  return `${capital(listed(parts))}. ${verdict}`;
}

export interface UploadStates {
  file: State;
  columns: State;
  preflight: State;
  store: State;
}

export function uploadStates(
  view: PreflightView | null,
  now: { files: number; reading: boolean; named: boolean; share: number | null },
): UploadStates {
  const waits = (section: number): State => ({ kind: 'wait', word: `waits for ${section}` });
  const file: State = now.reading
    ? { kind: 'run', word: 'reading' }
    : now.files === 0
      ? { kind: 'open', word: 'none yet' }
      : view
        ? { kind: 'ok', word: 'read' }
        : { kind: 'open', word: 'points missing' };
  if (!view || view.columns.length === 0) {
    const unread: State = view ? { kind: 'bad', word: 'not read' } : file;
    return {
      file: unread,
      columns: waits(1),
      preflight: view ? preflightState(view) : waits(1),
      store: waits(view ? 3 : 1),
    };
  }
  const used = view.columns.filter(({ role }) => role !== null).length;
  const missing = view.checks.some(
    ({ code }) => code === 'missing-column' || code === 'ambiguous-column' || code === 'kappa-given-twice',
  );
  return {
    file,
    columns: { kind: missing ? 'bad' : 'ok', word: `${used} of ${view.columns.length} used` },
    preflight: preflightState(view),
    store: !view.ok
      ? waits(3)
      : now.share !== null
        ? { kind: 'run', word: 'being stored' }
        : { kind: 'open', word: now.named ? 'ready' : 'waits for a name' },
  };
}

function preflightState({ checks }: PreflightView): State {
  const { errors, warnings, passed } = levelCounts(checks);
  if (errors) return { kind: 'bad', word: `${errors} ${errors === 1 ? 'error' : 'errors'}` };
  if (warnings) return { kind: 'warn', word: `${warnings} ${warnings === 1 ? 'warning' : 'warnings'}` };
  return { kind: 'ok', word: `${passed} checks` };
}

/** Why Store is not to be had; undefined where it is. */
export function storeReason(
  view: PreflightView | null,
  now: { reading: boolean; named: boolean; share: number | null },
): string | undefined {
  if (now.reading) return 'The files are being read.';
  if (!view) return 'Choose the points first.';
  const faults = view.checks.filter(({ level }) => level === 'error');
  if (!view.ok) {
    const lines = [...new Set(faults.flatMap(({ line }) => (line === undefined ? [] : [line])))];
    if (lines.length === 1 && faults.length === 1) return `Line ${lines[0]} has to be mended first.`;
    return `${capital(counted(faults.length, 'error'))} ${faults.length === 1 ? 'has' : 'have'} to be mended first.`;
  }
  if (!now.named) return 'Give it a name first.';
  if (now.share !== null) return 'It is on its way.';
  return undefined;
}

/** Name that a measurement gets from its file until somebody gives another. */
export function nameFromFile(fileName: string): string {
  const stem = fileName.replace(/\.[a-z0-9]{1,5}$/i, '');
  return capital(stem.replace(/[-_.\s]+/g, ' ').trim());
}
