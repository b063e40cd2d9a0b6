import { partByName } from './preflight-view';
import type { ChosenFile } from './use-preflight';

/**
 * What newly dropped files are taken for: by their names; of several that could be the points, the smallest is. A new file
 * takes the place of an earlier one of its kind, and mocks that of a covariance: only one of the two can be used.
 */
export function addFiles(
  before: readonly ChosenFile[],
  dropped: readonly File[],
  keyOf: (file: File, index: number) => string,
): ChosenFile[] {
  const guessed = dropped.map((file, i) => ({ key: keyOf(file, i), file, part: partByName(file.name) }));
  const points = guessed.filter(({ part }) => part === 'file').sort((a, b) => a.file.size - b.file.size);
  for (const other of points.slice(1)) other.part = 'mocks';
  let result = [...before];
  for (const added of guessed) result = takePlace(result, added);
  return result;
}

/** Of each kind one file is used: mocks and a covariance both say how the points scatter. */
const kind = (part: ChosenFile['part']): string =>
  part === 'mocks' || part === 'covariance' ? 'scatter' : part;

function takePlace(files: readonly ChosenFile[], added: ChosenFile): ChosenFile[] {
  return [...files.filter(({ part }) => kind(part) !== kind(added.part)), added].sort(
    (a, b) => Number(a.part !== 'file') - Number(b.part !== 'file'),
  );
}

/** The reader says what a file is; another one of that kind is then taken for what this one was. */
export function changePart(
  files: readonly ChosenFile[],
  key: string,
  part: ChosenFile['part'],
): ChosenFile[] {
  const changed = files.find((file) => file.key === key);
  if (!changed) return [...files];
  return files.map((file) => {
    if (file.key === key) return { ...file, part };
    return kind(file.part) === kind(part) ? { ...file, part: changed.part } : file;
  });
}
