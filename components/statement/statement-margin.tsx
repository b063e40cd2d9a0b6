import { Record } from '@/components/ui/record';
import { WordButton } from '@/components/ui/word-button';
import { Num, Stamp } from '@/components/ui/num';
import { shortName } from '@/components/words/people';
import type { Statement } from '@/lib/schemas';

/** Who wrote it, what its numbers come from, whose words they are, and the words that stood before. */
export function StatementMargin({
  statement,
  at,
  onRead,
}: {
  statement: Statement;
  /** Revision whose words are read; null for those that stand. */
  at: number | null;
  onRead: (revision: number | null) => void;
}) {
  const { written, fits, history } = statement;
  const [, ...earlier] = history;
  return (
    <>
      {written ? (
        <Record at={written.at}>
          Written by <b>{shortName(written.by)}</b> in revision {written.revision}
        </Record>
      ) : null}
      {fits.length ? (
        <Record>
          Numbers come by reference:
          {fits.map(({ number, revision, sha256 }) => (
            <span key={number} className="block">
              fit {number}, revision {revision}, snapshot{' '}
              <span className="font-numbers text-record">
                {sha256.slice(0, 4)} {sha256.slice(4, 8)}
              </span>
            </span>
          ))}
        </Record>
      ) : null}
      <Record>It is the group’s statement, not the program’s.</Record>
      {earlier.length ? (
        <Record>
          Words that stood before:
          {earlier.map(({ revision, by, at: when }) => (
            <span key={revision} className="block">
              {at === revision ? (
                <>
                  revision <Num>{revision}</Num>, read here
                </>
              ) : (
                <WordButton onClick={() => onRead(revision)}>revision {revision}</WordButton>
              )}
              , {shortName(by)}, <Stamp at={when} short />
            </span>
          ))}
        </Record>
      ) : null}
    </>
  );
}
