import { Fit } from '@/models';
import { notFound } from '@/lib/errors';
import { authorise, type Access } from './access';
import { watchFit } from './fit-events';
import { watchNotebook } from './notebook-events';

/** Where the events of a page go: named, each a whole state. */
export interface PageSink {
  send(event: 'notebook' | 'presence' | 'fit' | 'trouble' | 'beat', data: unknown): void;
  end(): void;
}

/** Milliseconds between two words that the server is there: a page can't see whether a silent stream is dead. */
const beat = 15_000;

/**
 * All that changes on the page of a notebook, over one stream: the notebook, who else has it open, and one of its fits until
 * that ends. `not_found` for a fit of another notebook.
 */
export async function watchNotebookPage(
  access: Access,
  fitId: string | null,
  sink: PageSink,
): Promise<() => void> {
  const fit = fitId === null ? null : await authorise(access.actor, 'fit', fitId, 'fit.read');
  if (fit && (await Fit.count({ where: { id: fit.id, notebookId: access.id } })) === 0) throw notFound('fit');
  const stops: (() => void)[] = [];
  const stop = () => stops.forEach((each) => each());
  const beating = setInterval(() => sink.send('beat', {}), beat);
  stops.push(() => clearInterval(beating));
  const onTrouble = (message: string) => sink.send('trouble', { message });
  try {
    stops.push(
      await watchNotebook(access, {
        onNotebook: (notebook) => sink.send('notebook', notebook),
        onPresence: (presence) => sink.send('presence', presence),
        onTrouble,
        onEnd: () => sink.end(),
      }),
    );
    if (fit) {
      const onEvent = (event: unknown) => sink.send('fit', event);
      stops.push(await watchFit(fit, { onEvent, onTrouble, onEnd: () => undefined }));
    }
  } catch (error) {
    stop();
    throw error;
  }
  return stop;
}
