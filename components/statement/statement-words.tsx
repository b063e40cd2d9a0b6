import { StateWord } from '@/components/ui/state-word';
import type { TypesetDraft, ValuePiece } from './use-statement';

function Marks({ marks, fit }: Pick<ValuePiece, 'marks' | 'fit'>) {
  return marks.map((mark) => (
    <span key={mark} className="ml-[6px]">
      {mark === 'earlier-revision' ? (
        <StateWord kind="old">of revision {fit.revision}</StateWord>
      ) : (
        <StateWord kind="warn">not converged</StateWord>
      )}
    </span>
  ));
}

/**
 * A number by reference, a link to its fit; or why there is none. The page itself goes there: the router writes its own address
 * after a change of `?fit`, and would take back one that the browser had set meanwhile.
 */
function Value({ piece, onShow }: { piece: ValuePiece; onShow: (fitId: string) => void }) {
  const { value, because, label, fit, marks } = piece;
  const said = value ?? `no value, because ${because}`;
  if (fit.id === null) return <span className="text-ink-2">{said}</span>;
  const { id } = fit;
  return (
    <>
      <a
        href={`?fit=${fit.number}#posterior`}
        title={`${label}, fit ${fit.number}`}
        className={`decoration-action decoration-dotted [text-decoration-thickness:1.5px] ${value === null ? 'text-ink-2' : 'text-ink lining-nums'}`}
        onClick={(event) => {
          // With a key held the browser opens the address elsewhere.
          if (event.metaKey || event.ctrlKey || event.shiftKey || event.altKey) return;
          event.preventDefault();
          onShow(id);
        }}
      >
        {said}
        <span className="sr-only"> ({`${label}, fit ${fit.number}`})</span>
      </a>
      <Marks marks={marks} fit={fit} />
    </>
  );
}

/** Greek letters are symbols, and a sign of comparison stays with what it compares. */
function Words({ text }: { text: string }) {
  const bound = text.replace(/ ([=<>≤≥≈±]) /g, '\u00a0$1\u00a0');
  return bound.split(/([α-ω])/).map((part, i) =>
    i % 2 === 1 ? (
      <i key={i} className="sym">
        {part}
      </i>
    ) : (
      part
    ),
  );
}

/** A statement as it is read. */
export function StatementWords({
  paragraphs,
  onShow,
}: {
  paragraphs: TypesetDraft['paragraphs'];
  /** Shows a fit in the sections above, and goes there. */
  onShow: (fitId: string) => void;
}) {
  return paragraphs.map((pieces, i) => (
    <p key={i} className="mb-3 max-w-figure text-lead">
      {pieces.map((piece, j) =>
        piece.kind === 'text' ? (
          <Words key={j} text={piece.text} />
        ) : piece.kind === 'value' ? (
          <Value key={j} piece={piece} onShow={onShow} />
        ) : (
          <span key={j} className="text-ink-2">
            {piece.reference}
            {piece.wrong ? (
              <span className="ml-[6px]">
                <StateWord kind="bad">names nothing</StateWord>
              </span>
            ) : null}
          </span>
        ),
      )}
    </p>
  ));
}
